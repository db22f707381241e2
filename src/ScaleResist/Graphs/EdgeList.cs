// A raw edge list as read: dense node indices in order of first appearance, nothing cleaned yet.
// Invariant: every index is below Labels.Count; Weights is null or has one value a link: a finite positive conductance, or a length
// from zero up.

namespace ScaleResist.Graphs;

/// <summary>The end nodes of a link as dense indices.</summary>
public readonly record struct EndNodes(int Source, int Target);

/// <summary>What was read, for the run's records.</summary>
public sealed record InputFacts
{
    /// <summary>The path as the user named it.</summary>
    public required string Path { get; init; }

    /// <summary>
    /// The form: <c>csv</c>, <c>tsv</c>, <c>text</c>, <c>mtx</c> or <c>parquet</c>, with <c>+gz</c> or <c>+zst</c>.
    /// </summary>
    public required string Form { get; init; }

    /// <summary>Bytes on disk.</summary>
    public long Bytes { get; init; }

    /// <summary>SHA-256 of the bytes on disk, lower-case hexadecimal (over all parts in order of their names).</summary>
    public required string Sha256 { get; init; }

    /// <summary>Data rows.</summary>
    public long Rows { get; init; }

    /// <summary>Comment lines passed over.</summary>
    public long CommentLines { get; init; }

    /// <summary>The header's column names, or null where there was none.</summary>
    public IReadOnlyList<string>? Header { get; init; }

    /// <summary>The columns used, by name where there are names, else by 1-based position.</summary>
    public required IReadOnlyList<string> Columns { get; init; }
}

/// <summary>A raw edge list: links in file order, labels, and what was read.</summary>
public sealed class EdgeList
{
    internal EdgeList(
        NodeLabels labels, AppendBuffer<EndNodes> links, AppendBuffer<double>? weights, bool areLengths, InputFacts facts)
    {
        Labels = labels;
        Links = links;
        Weights = weights;
        AreLengths = areLengths;
        Facts = facts;
    }

    /// <summary>The labels by dense index.</summary>
    public NodeLabels Labels { get; }

    /// <summary>The end nodes of each row.</summary>
    public AppendBuffer<EndNodes> Links { get; }

    /// <summary>The conductance or length of each row, or null where there is none: conductances are 1, lengths 0.</summary>
    public AppendBuffer<double>? Weights { get; }

    /// <summary>Whether <see cref="Weights"/> are lengths.</summary>
    public bool AreLengths { get; }

    /// <summary>What was read.</summary>
    public InputFacts Facts { get; }
}
