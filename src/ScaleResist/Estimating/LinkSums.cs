// The two sums a link that all probes leave behind; resistances follow from them when the last panel is in.
// Memory: 8 bytes a link, and 12 (16) more where the walk takes two (three) steps. A pass over a panel walks on from b, then reads z, b and the
// walks at both ends of each link, and the adjacency.

using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Estimating;

/// <summary>Sums of squared residuals for every link, panel by panel.</summary>
public sealed class LinkSums
{
    private readonly Network network;
    private readonly Bridges bridges;
    private readonly float[] shorted;
    private readonly float[] single;
    private readonly List<(int Start, int End)> chunks;
    private readonly LinkSteps? steps;
    private WalkPanels? walks;

    /// <summary>Empty sums for the network's links, one step around each.</summary>
    public LinkSums(Network network, Bridges bridges)
        : this(network, bridges, null)
    {
    }

    /// <summary>Empty sums with what several steps say of each link, or null.</summary>
    internal LinkSums(Network network, Bridges bridges, LinkSteps? steps)
    {
        this.network = network;
        this.bridges = bridges;
        this.steps = steps;
        shorted = new float[network.LinkCount];
        single = new float[network.LinkCount];
        chunks = RowChunks.Of(network);
    }

    /// <summary>Probes added so far.</summary>
    public int Probes { get; private set; }

    /// <summary>Adds a solved panel. Panels are added in order of their numbers, so that results do not depend on who solved first.</summary>
    public void Add(ProbePanel panel, int threads)
    {
        if (steps is not null)
        {
            walks ??= new WalkPanels(network, steps.Reach);
            walks.Walk(panel.B, threads);
        }
        Parallel.For(0, chunks.Count, new ParallelOptions { MaxDegreeOfParallelism = threads }, i => AddRows(panel, chunks[i].Start, chunks[i].End));
        Probes += panel.Probes;
    }

    /// <summary>After the last panel: frees what only panels need.</summary>
    public void Complete()
    {
        walks?.Dispose();
        walks = null;
    }

    private unsafe void AddRows(ProbePanel panel, int start, int end)
    {
        float* z = panel.Z.Pointer;
        float* b = panel.B.Pointer;
        float* one = walks is null ? null : walks.One.Pointer;
        float* two = walks?.Two is null ? null : walks.Two.Pointer;
        float* factors = stackalloc float[2 * WalkReach.MostSteps];
        uint lanes = panel.Lanes;
        int nextBridge = bridges.FirstFrom(network.LinkStart[start]);
        for (int u = start; u < end; u++)
        {
            long link = network.LinkStart[u];
            double du = network.Strengths[u];
            for (long k = network.FirstLaterArc(u); k < network.RowStart[u + 1]; k++, link++)
            {
                if (nextBridge < bridges.Count && bridges.Links[nextBridge] == link)
                {
                    nextBridge++; // exact: 1/c
                    continue;
                }
                int v = network.Neighbours[k];
                double c = network.Conductance(k);
                LinkBounds bounds = LinkBounds.Of(c, du, network.Strengths[v]);
                float unit = (float)Math.Sqrt(bounds.Upper);
                (float first, float second) = steps is null
                    ? ProbeKernels.LinkSquares(
                        z + (u * 16L), z + (v * 16L), b + (u * 16L), b + (v * 16L),
                        (float)bounds.FactorU, (float)bounds.FactorV, panel.Signs(u, v), unit, lanes)
                    : ProbeKernels.LinkSquares(z, b, one, two, u, v, Factors(bounds, link, factors), panel.Signs(u, v), unit, lanes);
                shorted[link] += first;
                single[link] += second;
            }
        }
    }

    // Of b at both ends, then of each walk: one step and the corrections to it.
    private unsafe float* Factors(in LinkBounds bounds, long link, float* factors)
    {
        ReadOnlySpan<ushort> corrections = steps!.Corrections(link);
        for (int i = 0; i < corrections.Length; i++)
            factors[i] = LinkSteps.Widen(corrections[i]);
        factors[0] += (float)bounds.FactorU;
        factors[1] += (float)bounds.FactorV;
        return factors;
    }

    /// <summary>The estimate of a link that is no bridge.</summary>
    /// <param name="link">Its number.</param>
    /// <param name="arc">Its arc from u.</param>
    /// <param name="u">Its smaller node.</param>
    /// <param name="quantile">Of the standard normal.</param>
    internal Estimate Estimate(long link, long arc, int u, double quantile)
    {
        LinkBounds bounds = LinkBounds.Of(network.Conductance(arc), network.Strengths[u], network.Strengths[network.Neighbours[arc]]);
        if (steps is not null)
            bounds = bounds.Raised(steps.Gains[(int)link]);
        return LinkLikelihood.Estimate(bounds, shorted[link], single[link], Probes, quantile);
    }
}
