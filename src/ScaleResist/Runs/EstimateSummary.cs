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

/// <summary>A link that much depends on: bridges by the nodes they cut off, then links by the loss impact.</summary>
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

    /// <summary>How much the Kirchhoff index of the component rises when the link is lost; null for a bridge.</summary>
    public Estimate? LossImpact { get; init; }

    /// <summary>Its place among all links by loss impact, 1 the highest; null for a bridge.</summary>
    public int? LossRank { get; init; }

    /// <summary>The best rank that the intervals allow; the rank itself where all is exact.</summary>
    public int? LossRankLower { get; init; }

    /// <summary>The worst rank that the intervals allow.</summary>
    public int? LossRankUpper { get; init; }
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

/// <summary>What ended the probes.</summary>
public enum StoppedBy
{
    /// <summary>Their number was reached: the one asked for, or the most that a run takes.</summary>
    Probes,

    /// <summary>The target error was.</summary>
    Target,

    /// <summary>Another batch of panels would not have fitted the time budget.</summary>
    Time,
}

/// <summary>How many probes there were, and why not more.</summary>
public sealed record ProbingFacts
{
    /// <summary>K.</summary>
    public required int Probes { get; init; }

    /// <summary>Why K and no more: <c>probes</c>, <c>target</c> or <c>time</c>.</summary>
    public required string StoppedBy { get; init; }

    /// <summary>The target error; null without one.</summary>
    public required double? TargetError { get; init; }

    /// <summary>With a target: what it was compared with at the end, the largest 95th percentile of relative standard errors over the tables.</summary>
    public required double? RelativeStandardError { get; init; }
}

/// <summary>Probed links and pairs against certified enclosures, and a panel's solves against the error they may have.</summary>
public sealed record AuditFacts
{
    /// <summary>Links and pairs whose enclosure is narrow enough to compare with.</summary>
    public required int Compared { get; init; }

    /// <summary>Those whose enclosure is not, where conductances lie too far apart; they count nowhere.</summary>
    public required int TooWide { get; init; }

    /// <summary>Median of the relative error, without sign; null where nothing was compared, as the next two.</summary>
    public required double? MedianError { get; init; }

    /// <summary>95th percentile of the relative error.</summary>
    public required double? Percentile95Error { get; init; }

    /// <summary>Largest relative error.</summary>
    public required double? WorstError { get; init; }

    /// <summary>Intervals that surely hold the true value or surely do not; one that cuts its enclosure counts as neither.</summary>
    public required int Intervals { get; init; }

    /// <summary>Of them, those that hold it.</summary>
    public required int Held { get; init; }

    /// <summary>Held / Intervals; null without any.</summary>
    public double? ShareHeld => Intervals == 0 ? null : (double)Held / Intervals;

    /// <summary>Of <see cref="Intervals"/>, those of links, whose errors are nearly independent.</summary>
    public required int LinkIntervals { get; init; }

    /// <summary>Of them, those that hold the true value.</summary>
    public required int LinksHeld { get; init; }

    /// <summary>Links and pairs further from the truth than six standard errors.</summary>
    public required int FarOff { get; init; }

    /// <summary>The largest error of the first panel's columns, relative to a mode's standard deviation, as a second solve found it; null without one.</summary>
    public required double? SolverError { get; init; }

    /// <summary>What it may be: a twentieth of the relative statistical error.</summary>
    public required double SolverErrorAllowed { get; init; }

    /// <summary>What speaks against the error bars, in words; null where nothing does.</summary>
    public required string? Warning { get; init; }
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

/// <summary>Resistances to terminals.</summary>
public sealed record TerminalFacts
{
    /// <summary>Nodes that were shorted into one.</summary>
    public required int Terminals { get; init; }

    /// <summary>Nodes of components without a terminal: their resistance is infinite.</summary>
    public required int NodesWithout { get; init; }

    /// <summary>Components without a terminal.</summary>
    public required int ComponentsWithout { get; init; }

    /// <summary><c>exact</c> or <c>probe</c>.</summary>
    public required string Method { get; init; }

    /// <summary>Probes of the shorted network; 0 where exact.</summary>
    public required int Probes { get; init; }
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

    /// <summary>Up to five bridges that cut off most, then up to twenty links of the highest loss impact; empty where links were not wanted.</summary>
    public required IReadOnlyList<CriticalLink> CriticalLinks { get; init; }

    /// <summary>Sum over components of the estimated spanning probabilities, or null where nothing was probed.</summary>
    public required double? FosterSum { get; init; }

    /// <summary>The exact part, or null where nothing but bridges was exact.</summary>
    public required ExactFacts? Exact { get; init; }

    /// <summary>Of a trial: the percentile of relative standard errors over the tables of rows, and the index's; null where there is none.</summary>
    internal (double? Rows, double? Index) TrialErrors { get; init; }

    /// <summary>Solver statistics, or null where nothing was solved.</summary>
    public required SolverFacts? Solver { get; init; }

    /// <summary>The probes, or null where nothing was probed.</summary>
    public required ProbingFacts? Probing { get; init; }

    /// <summary>The audit of the probes, or null without one.</summary>
    public required AuditFacts? Audit { get; init; }

    /// <summary>Algebraic connectivity and weakest cut of the largest component, or null where they were not looked for.</summary>
    public ConnectivityFacts? Connectivity { get; init; }

    /// <summary>Resistances to terminals, or null without them.</summary>
    public TerminalFacts? Terminals { get; init; }

    /// <summary>Phases in order.</summary>
    public required IReadOnlyList<PhaseTime> Phases { get; init; }

    /// <summary>Rows by table.</summary>
    public required IReadOnlyDictionary<string, long> Rows { get; init; }
}
