// What the tables of a run say at a glance: distributions, the rows to look at first, the audit row by row.
// Invariant: a function of the tables' rows in their order, so the same whatever the threads; small whatever the network.

using ScaleResist.Estimating;

namespace ScaleResist.Cli.Report.Findings;

/// <summary>Findings by table; what a run did not write is null.</summary>
internal sealed record RunFindings(LinkFindings? Links, NodeFindings? Nodes, PairFindings? Pairs, IReadOnlyList<AuditRow>? Audit)
{
    /// <summary>Of a run without tables.</summary>
    public static RunFindings None { get; } = new(null, null, null, null);
}

/// <summary>Of the links table.</summary>
internal sealed record LinkFindings
{
    /// <summary>Links by method.</summary>
    public required IReadOnlyDictionary<string, long> Methods { get; init; }

    /// <summary>Links by spanning probability; bridges are marked.</summary>
    public required Histogram SpanningProbability { get; init; }

    /// <summary>Links by resistance; bridges are marked.</summary>
    public required Histogram Resistance { get; init; }

    /// <summary>Relative standard errors of probed links, or null without any.</summary>
    public required ErrorBounds? RelativeError { get; init; }

    /// <summary>The bridges that cut off most nodes.</summary>
    public required IReadOnlyList<LinkRow> Bridges { get; init; }

    /// <summary>The other links of the largest spanning probability.</summary>
    public required IReadOnlyList<LinkRow> Others { get; init; }

    /// <summary>The links whose loss raises the Kirchhoff index most; empty where that was not estimated.</summary>
    public required IReadOnlyList<LinkRow> Losses { get; init; }
}

/// <summary>A histogram and the range of what it counts.</summary>
/// <param name="Scale"><c>log</c> or <c>linear</c>.</param>
/// <param name="Least">The smallest value; null where there is none.</param>
/// <param name="Most">The largest.</param>
/// <param name="Bins">Bins without gaps between them.</param>
internal sealed record Histogram(string Scale, double? Least, double? Most, IReadOnlyList<Bin> Bins);

/// <summary>Bounds that shares of the rows lie below, up to 4.5 % too wide.</summary>
/// <param name="Rows">Rows with an error.</param>
/// <param name="HalfBelow">Half of them lie below.</param>
/// <param name="Percent95Below">95 % of them do.</param>
internal sealed record ErrorBounds(long Rows, double HalfBelow, double Percent95Below);

/// <summary>A row of the links table.</summary>
internal sealed record LinkRow(string Source, string Target, double Conductance, Estimate Resistance, double SpanningProbability,
    long? NodesCutOff, double? LossImpact, double? LossImpactSe, string Method);

/// <summary>Of the nodes table: both ends of the ranking of the largest component.</summary>
internal sealed record NodeFindings(IReadOnlyList<NodeRow> Closest, IReadOnlyList<NodeRow> Remotest);

/// <summary>A row of the nodes table.</summary>
internal sealed record NodeRow(string Node, long Degree, double ResistanceDiagonal, double ResistanceDiagonalSe, double TotalResistance,
    double Closeness, long ClosenessRank, long RankLower, long RankUpper, string Method);

/// <summary>Of the pairs table: how many there are, and the first.</summary>
internal sealed record PairFindings(long Rows, IReadOnlyList<PairRow> First);

/// <summary>A row of the pairs table.</summary>
internal sealed record PairRow(string Source, string Target, Estimate Resistance, string Method);

/// <summary>A row of the audit table.</summary>
internal sealed record AuditRow(string Source, string Target, double Resistance, double ReferenceLower, double ReferenceUpper, double RelativeError);
