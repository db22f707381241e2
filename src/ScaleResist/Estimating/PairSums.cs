// Requested pairs: where they are few, each is solved and enclosed; else the same residuals as for links, for any two nodes.
// Invariant: two nodes of different components get +infinity, one node twice gets 0, and what is not solved is estimated as a link would be.
// A solver's error e has energy delta^2 at most (delta the mode error), so (e_u - e_v)^2 <= delta^2 R; conjugate gradient's e is orthogonal to what it
// found, so that the mean of the squares moves by no more. It is the whole error where x1 = 0, as in complete networks.

using ScaleResist.Graphs;
using ScaleResist.Kernels;
using ScaleResist.Solving;

namespace ScaleResist.Estimating;

/// <summary>Enclosures of requested pairs, or sums of squared residuals, panel by panel.</summary>
public sealed class PairSums
{
    // An enclosure wider than this is no result: where conductances lie so far apart that doubles cannot solve, the probes say what is known.
    private const double WidestEnclosure = 1e-3;

    private readonly Network network;
    private readonly Bridges bridges;
    private readonly IReadOnlyList<(int U, int V)> pairs;
    private readonly ExactPairs? exact;
    private readonly int[] componentOf;
    private readonly double[] shorted;
    private readonly double[] single;
    private readonly Dictionary<int, Enclosure> solved = [];
    private int probes;
    private double solverError; // squares of mode errors, summed over probes

    /// <summary>Empty sums.</summary>
    /// <param name="network">The network.</param>
    /// <param name="bridges">Its bridges.</param>
    /// <param name="pairs">Internal nodes.</param>
    public PairSums(Network network, Bridges bridges, IReadOnlyList<(int U, int V)> pairs)
        : this(network, bridges, pairs, null)
    {
    }

    /// <summary>Empty sums; what <paramref name="exact"/> holds needs neither probe nor solve.</summary>
    internal PairSums(Network network, Bridges bridges, IReadOnlyList<(int U, int V)> pairs, ExactPairs? exact)
    {
        this.exact = exact;
        this.network = network;
        this.bridges = bridges;
        this.pairs = pairs;
        componentOf = network.ComponentOfNodes();
        shorted = new double[pairs.Count];
        single = new double[pairs.Count];
    }

    /// <summary>How many pairs there are.</summary>
    internal int Count => pairs.Count;

    /// <summary>
    /// Solves and encloses the pairs that are not exact, if at most <paramref name="most"/> are: a solve costs as much as a probe, and tells all.
    /// Comes before the first panel.
    /// </summary>
    public void SolveFew(LaplacianSolver solver, int most, int threads, CancellationToken cancel)
    {
        int[] open = [.. Enumerable.Range(0, pairs.Count).Where(IsOpen)];
        if (open.Length == 0 || open.Length > most)
            return;
        CertifiedPairs certified = CertifiedPairs.Solve(network, solver, [.. open.Select(i => pairs[i])], threads, cancel);
        for (int i = 0; i < open.Length; i++)
        {
            if (certified[i].RelativeWidth <= WidestEnclosure)
                solved[open[i]] = certified[i];
        }
    }

    /// <summary>Adds a solved panel. Panels are added in order of their numbers.</summary>
    public unsafe void Add(ProbePanel panel)
    {
        float* z = panel.Z.Pointer;
        float* b = panel.B.Pointer;
        for (int i = 0; i < pairs.Count; i++)
        {
            if (solved.ContainsKey(i) || !IsOpen(i))
                continue;
            (int u, int v) = pairs[i];
            long arc = network.FindArc(u, v);
            LinkBounds bounds = BoundsOf(u, v, arc);
            float unit = arc < 0 ? 0 : (float)Math.Sqrt(bounds.Upper);
            (float one, float other) = ProbeKernels.LinkSquares(
                z + (u * 16L), z + (v * 16L), b + (u * 16L), b + (v * 16L),
                (float)bounds.FactorU, (float)bounds.FactorV, panel.Signs(u, v), unit, panel.Lanes);
            shorted[i] += one;
            single[i] += other;
        }
        probes += panel.Probes;
        solverError += panel.Probes * panel.ModeError * panel.ModeError;
    }

    /// <summary>What is known of a pair, and how it was found. Safe from several threads.</summary>
    public (Estimate Resistance, ResistanceMethod Method) Estimate(int pair, double quantile)
    {
        if (Known(pair) is { } known)
            return known;
        if (IsExact(pair))
            return (Estimating.Estimate.Exact(exact!.Between(pairs[pair].U, pairs[pair].V)), ResistanceMethod.Exact);
        if (solved.TryGetValue(pair, out Enclosure enclosure))
            return (new Estimate(enclosure.Middle, 0, enclosure.Lower, enclosure.Upper), ResistanceMethod.Solve);
        (int u, int v) = pairs[pair];
        long arc = network.FindArc(u, v);
        LinkBounds bounds = BoundsOf(u, v, arc);
        Estimate found = arc < 0
            ? LinkLikelihood.EstimatePair(bounds, shorted[pair], probes, quantile)
            : LinkLikelihood.Estimate(bounds, shorted[pair], single[pair], probes, quantile);
        return (found.WithBias(found.Value * solverError / probes, bounds.Lower), ResistanceMethod.Probe);
    }

    /// <summary>Whether a pair needs probes or a solve.</summary>
    internal bool IsOpen(int pair) => Known(pair) is null && !IsExact(pair);

    private bool IsExact(int pair) => exact?.Holds(pairs[pair].U, pairs[pair].V) == true;

    // What needs neither probe nor solve.
    private (Estimate Resistance, ResistanceMethod Method)? Known(int pair)
    {
        (int u, int v) = pairs[pair];
        if (u == v)
            return (Estimating.Estimate.Exact(0), ResistanceMethod.Exact);
        if (componentOf[u] != componentOf[v])
            return (Estimating.Estimate.Exact(double.PositiveInfinity), ResistanceMethod.Exact);
        long arc = network.FindArc(u, v);
        return arc >= 0 && bridges.Contains(network.LinkBetween(u, v))
            ? (Estimating.Estimate.Exact(1 / network.Conductance(arc)), ResistanceMethod.Bridge)
            : null;
    }

    private LinkBounds BoundsOf(int u, int v, long arc) => arc < 0
        ? LinkBounds.OfPair(network.Strengths[u], network.Strengths[v])
        : LinkBounds.Of(network.Conductance(arc), network.Strengths[u], network.Strengths[v]);
}
