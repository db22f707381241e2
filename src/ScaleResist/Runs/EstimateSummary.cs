// What a finished estimate says to a person and to run.json. The tables themselves went to the sink.

using ScaleResist.Estimating;

namespace ScaleResist.Runs;

/// <summary>One row of the index table: the global measures of a component.</summary>
public sealed record IndexEntry
{
    /// <summary>0 is the largest component.</summary>
    public required int ComponentId { get; init; }

    /// <summary>Nodes n of the component.</summary>
    public required long Nodes { get; init; }

    /// <summary>Links m of the component, after cleaning.</summary>
    public required long Links { get; init; }

    /// <summary>The sum of all conductances.</summary>
    public required double TotalConductance { get; init; }

    /// <summary>Kf, the sum of R over unordered pairs.</summary>
    public required Estimate KirchhoffIndex { get; init; }

    /// <summary>Kf / (n (n-1) / 2); 0 for a single node.</summary>
    public required double MeanResistance { get; init; }

    /// <summary>The sum over unordered pairs of d_u d_v R (strengths d).</summary>
    public required double DegreeKirchhoffIndex { get; init; }

    /// <summary>Kemeny's constant: degree-Kirchhoff index / (2 x total conductance); 0 for a single node.</summary>
    public required double KemenyConstant { get; init; }

    /// <summary>The sum over unordered pairs of w_u w_v R, or null without node weights.</summary>
    public double? NodeWeightedKirchhoffIndex { get; init; }

    /// <summary>The sum of the estimated spanning probabilities; n - 1 by Foster (1949).</summary>
    public required double FosterSum { get; init; }

    /// <summary>The logarithm of the number of (weighted) spanning trees; null on the probed route.</summary>
    public double? LogSpanningTrees { get; init; }

    /// <summary>The second smallest eigenvalue of L; null where it was not computed.</summary>
    public double? AlgebraicConnectivity { get; init; }

    /// <summary><c>bridge</c>, <c>exact</c>, <c>solve</c> or <c>probe</c>.</summary>
    public required string Method { get; init; }

    /// <summary>Probes used; 0 where exact.</summary>
    public required int Probes { get; init; }
}

/// <summary>A link that much depends on: bridges by the nodes they cut off, then links by spanning probability.</summary>
public sealed record CriticalLink
{
    /// <summary>Label of one end.</summary>
    public required string Source { get; init; }

    /// <summary>Label of the other end.</summary>
    public required string Target { get; init; }

    /// <summary>Resistance distance between the ends.</summary>
    public required Estimate Resistance { get; init; }

    /// <summary>c R: the probability that a random spanning tree uses the link.</summary>
    public required double SpanningProbability { get; init; }

    /// <summary>For a bridge, the nodes on its smaller side; else null.</summary>
    public long? NodesCutOff { get; init; }
}

/// <summary>How the solves went.</summary>
public sealed record SolverFacts
{
    /// <summary>Name of the preconditioner used on the largest component.</summary>
    public required string Preconditioner { get; init; }

    /// <summary>Why it was chosen.</summary>
    public required string Reason { get; init; }

    /// <summary>Nodes eliminated exactly before anything iterates.</summary>
    public required long Eliminated { get; init; }

    /// <summary>Right-hand sides solved, over all components.</summary>
    public required long Columns { get; init; }

    /// <summary>The most iterations a panel needed.</summary>
    public required int MostIterations { get; init; }

    /// <summary>The largest true relative residual, recomputed after the solve.</summary>
    public required double LargestResidual { get; init; }

    /// <summary>The largest relative error of a solve in the energy norm, estimated from the true residual.</summary>
    public required double LargestEnergyError { get; init; }

    /// <summary>Columns solved again in doubles because floats did not reach the tolerance.</summary>
    public required long Retried { get; init; }

    /// <summary>Further right-hand sides, solved roughly, to deflate the Kirchhoff index and the diagonals; 0 where that was not worth it.</summary>
    public int DeflationSolves { get; init; }
}

/// <summary>How the exact part went.</summary>
public sealed record ExactFacts
{
    /// <summary>Blocks left to the probes; 0 where all is exact.</summary>
    public required int ProbedBlocks { get; init; }

    /// <summary>Entries of the factor.</summary>
    public required long Entries { get; init; }

    /// <summary>Floating-point operations of factorisation and selected inversion.</summary>
    public required double Operations { get; init; }

    /// <summary>Seconds foreseen for what comes after the choice of a route, without probes.</summary>
    public required double ForecastSeconds { get; init; }

    /// <summary>Seconds that it took.</summary>
    public required double Seconds { get; init; }

    /// <summary>Peak resident memory foreseen.</summary>
    public required long ForecastBytes { get; init; }
}

/// <summary>Wall time of a phase.</summary>
/// <param name="Name">The phase as the observer saw it.</param>
/// <param name="Seconds">Wall-clock seconds.</param>
public sealed record PhaseTime(string Name, double Seconds);

/// <summary>What a finished estimate says of itself.</summary>
public sealed record EstimateSummary
{
    /// <summary>Nodes of the network.</summary>
    public required long Nodes { get; init; }

    /// <summary>Links of the network after cleaning.</summary>
    public required long Links { get; init; }

    /// <summary>Components, single nodes included.</summary>
    public required int Components { get; init; }

    /// <summary>Bridges.</summary>
    public required long Bridges { get; init; }

    /// <summary>Rows of the index table: all components where the index was wanted, else empty.</summary>
    public required IReadOnlyList<IndexEntry> Index { get; init; }

    /// <summary>The five most critical links; empty where links were not wanted.</summary>
    public required IReadOnlyList<CriticalLink> CriticalLinks { get; init; }

    /// <summary>Sum over components of the estimated spanning probabilities, or null where nothing was probed.</summary>
    public required double? FosterSum { get; init; }

    /// <summary>The exact part, or null where nothing but bridges was exact.</summary>
    public required ExactFacts? Exact { get; init; }

    /// <summary>Solver statistics, or null where nothing was solved.</summary>
    public required SolverFacts? Solver { get; init; }

    /// <summary>Phases in order.</summary>
    public required IReadOnlyList<PhaseTime> Phases { get; init; }

    /// <summary>Rows by table.</summary>
    public required IReadOnlyDictionary<string, long> Rows { get; init; }
}
