// What the user said about the columns of an edge list. Nothing here is guessed.

namespace ScaleResist.Graphs;

/// <summary>What the number in a third column means.</summary>
public enum WeightMeaning
{
    /// <summary>The user has not said: a file with a third column is refused.</summary>
    Unsaid,

    /// <summary>Every link has conductance 1; further columns are ignored.</summary>
    None,

    /// <summary>The number is the conductance c of the link.</summary>
    Conductance,

    /// <summary>The number is the resistance r of the link; c = 1/r.</summary>
    Resistance,

    /// <summary>The number is the length of the link, for distances; conductances stay 1.</summary>
    Length,
}

/// <summary>How an edge list is to be read.</summary>
public sealed record ReadOptions
{
    /// <summary>The meaning of the weight column.</summary>
    public WeightMeaning Weights { get; init; }

    /// <summary>
    /// Two or three column names (or 1-based positions): source, target and, where weights are used, the weight.
    /// Null: the first two columns, and the third as the weight.
    /// </summary>
    public IReadOnlyList<string>? Columns { get; init; }
}
