// What all probes say of nodes and of whole components: squares by node, and one independent sample of each index a probe.
//
// With x_u = z_u - k b_u / d_u, k = 1 - 1/n (Cov(z_u, b_u) = k, Var b_u = d_u):   l_u = L+_uu = k^2 / d_u + E x_u^2.
// So each probe gives an unbiased sample of the weighted traces
//     tr L+ = k^2 sum 1/d_u + sum x_u^2,      sum w_u l_u = k^2 sum w_u / d_u + sum w_u x_u^2.

using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Estimating;

/// <summary>Mean and spread of independent samples (Welford 1962).</summary>
internal struct RunningMoments
{
    private double mean;
    private double spread;

    public readonly double Mean => mean;

    public int Count { get; private set; }

    /// <summary>Standard error of the mean.</summary>
    public readonly double StandardError => Math.Sqrt(spread / Count / (Count - 1));

    public void Add(double sample)
    {
        Count++;
        double step = sample - mean;
        mean += step / Count;
        spread += step * (sample - mean);
    }
}

/// <summary>Squares by node and traces by component, panel by panel.</summary>
public sealed class NodeSums
{
    private const int RowsPerChunk = 1 << 13;
    private readonly Network network;
    private readonly double[]? weights;
    private readonly double[] squares;
    private readonly RunningMoments[] plain;
    private readonly RunningMoments[] byStrength;
    private readonly RunningMoments[] byWeight;
    private readonly int largeComponents;

    /// <summary>Empty sums.</summary>
    /// <param name="network">The network.</param>
    /// <param name="weights">Node weights in internal order, or null.</param>
    public NodeSums(Network network, double[]? weights)
    {
        this.network = network;
        this.weights = weights;
        squares = new double[network.NodeCount];
        plain = new RunningMoments[network.Components.Count];
        byStrength = new RunningMoments[network.Components.Count];
        byWeight = new RunningMoments[network.Components.Count];
        while (largeComponents < network.Components.Count && network.Components[largeComponents].Nodes > RowsPerChunk)
            largeComponents++;
    }

    /// <summary>Probes added so far.</summary>
    public int Probes { get; private set; }

    /// <summary>Adds a solved panel. Panels are added in order of their numbers.</summary>
    public void Add(ProbePanel panel, int threads)
    {
        ParallelOptions options = new() { MaxDegreeOfParallelism = threads };
        for (int c = 0; c < largeComponents; c++)
        {
            Component component = network.Components[c];
            NodeSquareSums[] parts = new NodeSquareSums[(component.Nodes + RowsPerChunk - 1) / RowsPerChunk];
            Parallel.For(0, parts.Length, options, i =>
            {
                int start = component.Start + (i * RowsPerChunk);
                parts[i] = Squares(panel, component, start, Math.Min(component.End, start + RowsPerChunk));
            });
            NodeSquareSums total = default;
            foreach (NodeSquareSums part in parts)
            {
                for (int lane = 0; lane < ProbePanel.Width; lane++)
                {
                    total.Plain[lane] += part.Plain[lane];
                    total.ByStrength[lane] += part.ByStrength[lane];
                    total.ByWeight[lane] += part.ByWeight[lane];
                }
            }
            AddSamples(c, panel.Probes, total);
        }
        for (int c = largeComponents; c < network.Components.Count && network.Components[c].Nodes > 1; c++)
            AddSamples(c, panel.Probes, Squares(panel, network.Components[c], network.Components[c].Start, network.Components[c].End));
        Probes += panel.Probes;
    }

    private NodeSquareSums Squares(ProbePanel panel, Component component, int start, int end) =>
        NodeKernels.Squares(panel.Z, panel.B, 1 - (1.0 / component.Nodes), network.Strengths, weights, squares, start, end);

    private void AddSamples(int component, int probes, in NodeSquareSums sums)
    {
        for (int lane = 0; lane < probes; lane++)
        {
            plain[component].Add(sums.Plain[lane]);
            byStrength[component].Add(sums.ByStrength[lane]);
            byWeight[component].Add(sums.ByWeight[lane]);
        }
    }

    /// <summary>l_u with one standard error sqrt(2/K) E x^2; exactly 0 for a single node.</summary>
    /// <param name="node">Internal node.</param>
    /// <param name="nodes">n of its component.</param>
    /// <param name="quantile">Of the standard normal; the interval is symmetric in the log of the probed part.</param>
    public Estimate Diagonal(int node, int nodes, double quantile)
    {
        if (nodes == 1)
            return Estimate.Exact(0);
        double share = 1 - (1.0 / nodes);
        double known = share * share / network.Strengths[node];
        double probed = squares[node] / Probes;
        double root = Math.Sqrt(2.0 / Probes);
        double stretch = Math.Exp(quantile * root);
        return new Estimate(known + probed, probed * root, known + (probed / stretch), known + (probed * stretch));
    }

    /// <summary>tr L+ of a component: Student t interval over the probes.</summary>
    public Estimate Trace(int component, double confidence) => Weighted(component, plain, confidence, static (_, _) => 1);

    /// <summary>The sum of d_u l_u over a component.</summary>
    public double TraceByStrength(int component) => Weighted(component, byStrength, 0.5, static (sums, u) => sums.network.Strengths[u]).Value;

    /// <summary>The sum of w_u l_u over a component.</summary>
    public double TraceByWeight(int component) => Weighted(component, byWeight, 0.5, static (sums, u) => sums.weights![u]).Value;

    private Estimate Weighted(int component, RunningMoments[] moments, double confidence, Func<NodeSums, int, double> weight)
    {
        Component range = network.Components[component];
        if (range.Nodes == 1)
            return Estimate.Exact(0);
        double share = 1 - (1.0 / range.Nodes);
        double known = 0;
        for (int u = range.Start; u < range.End; u++)
            known += weight(this, u) / network.Strengths[u];
        RunningMoments probed = moments[component];
        double value = (share * share * known) + probed.Mean;
        double half = Quantiles.Student(confidence, Probes - 1) * probed.StandardError;
        return new Estimate(value, probed.StandardError, value - half, value + half);
    }
}
