// A validated `estimate` command: from here on nothing is text that may be wrong. Files are named, not yet opened.

using ScaleResist.Graphs;
using ScaleResist.Runs;

namespace ScaleResist.Cli.Commands;

/// <summary>What an <c>estimate</c> command asks for.</summary>
internal sealed record EstimateRequest
{
    /// <summary>The network's path as named.</summary>
    public required string Network { get; init; }

    /// <summary>How its columns are read.</summary>
    public required ReadOptions Reading { get; init; }

    /// <summary>The lake's folder as named.</summary>
    public required string Lake { get; init; }

    /// <summary>The run's name.</summary>
    public required string RunId { get; init; }

    /// <summary>What is computed and how.</summary>
    public required EstimatePlan Plan { get; init; }

    /// <summary>The file of requested pairs, or null.</summary>
    public string? Pairs { get; init; }

    /// <summary>The file of node weights, or null.</summary>
    public string? NodeWeights { get; init; }

    /// <summary>The file of terminals, or null.</summary>
    public string? Terminals { get; init; }

    /// <summary>Whether leftovers of an unfinished run are discarded rather than resumed.</summary>
    public bool Restart { get; init; }
}
