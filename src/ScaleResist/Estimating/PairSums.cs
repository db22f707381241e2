// Requested pairs: the same residuals as for links, for any two nodes.
// Invariant: two nodes of different components get +infinity, one node twice gets 0, a linked pair gets the link's own estimate.

using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Estimating;

/// <summary>Sums of squared residuals for requested pairs, panel by panel.</summary>
public sealed class PairSums
{
    private readonly Network network;
    private readonly Bridges bridges;
    private readonly IReadOnlyList<(int U, int V)> pairs;
    private readonly int[] componentOf;
    private readonly double[] shorted;
    private readonly double[] single;
    private int probes;

    /// <summary>Empty sums.</summary>
    /// <param name="network">The network.</param>
    /// <param name="bridges">Its bridges.</param>
    /// <param name="pairs">Internal nodes.</param>
    public PairSums(Network network, Bridges bridges, IReadOnlyList<(int U, int V)> pairs)
    {
        this.network = network;
        this.bridges = bridges;
        this.pairs = pairs;
        componentOf = network.ComponentOfNodes();
        shorted = new double[pairs.Count];
        single = new double[pairs.Count];
    }

    /// <summary>Adds a solved panel. Panels are added in order of their numbers.</summary>
    public unsafe void Add(ProbePanel panel)
    {
        float* z = panel.Z.Pointer;
        float* b = panel.B.Pointer;
        for (int i = 0; i < pairs.Count; i++)
        {
            (int u, int v) = pairs[i];
            if (u == v || componentOf[u] != componentOf[v])
                continue;
            long arc = network.FindArc(u, v);
            if (arc >= 0 && bridges.Contains(network.LinkBetween(u, v)))
                continue;
            LinkBounds bounds = BoundsOf(u, v, arc);
            float unit = arc < 0 ? 0 : (float)Math.Sqrt(bounds.Upper);
            (float one, float other) = ProbeKernels.LinkSquares(
                z + (u * 16L), z + (v * 16L), b + (u * 16L), b + (v * 16L),
                (float)bounds.FactorU, (float)bounds.FactorV, panel.Signs(u, v), unit, panel.Lanes);
            shorted[i] += one;
            single[i] += other;
        }
        probes += panel.Probes;
    }

    /// <summary>The estimate of a pair, and how it was found: <c>bridge</c>, <c>exact</c> or <c>probe</c>.</summary>
    public (Estimate Resistance, string Method) Estimate(int pair, double quantile)
    {
        (int u, int v) = pairs[pair];
        if (u == v)
            return (Estimating.Estimate.Exact(0), "exact");
        if (componentOf[u] != componentOf[v])
            return (Estimating.Estimate.Exact(double.PositiveInfinity), "exact");
        long arc = network.FindArc(u, v);
        if (arc >= 0 && bridges.Contains(network.LinkBetween(u, v)))
            return (Estimating.Estimate.Exact(1 / network.Conductance(arc)), "bridge");
        LinkBounds bounds = BoundsOf(u, v, arc);
        return (arc < 0
            ? LinkLikelihood.EstimatePair(bounds, shorted[pair], probes, quantile)
            : LinkLikelihood.Estimate(bounds, shorted[pair], single[pair], probes, quantile), "probe");
    }

    private LinkBounds BoundsOf(int u, int v, long arc) => arc < 0
        ? LinkBounds.OfPair(network.Strengths[u], network.Strengths[v])
        : LinkBounds.Of(network.Conductance(arc), network.Strengths[u], network.Strengths[v]);
}
