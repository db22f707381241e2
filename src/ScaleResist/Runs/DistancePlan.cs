// A validated plan of a distances run, and what it takes beside the network.

namespace ScaleResist.Runs;

/// <summary>The tables a distances run can write.</summary>
[Flags]
public enum WantDistances
{
    /// <summary>Nothing.</summary>
    None = 0,

    /// <summary>One row a requested pair.</summary>
    Pairs = 1,

    /// <summary>One row a node: its eccentricity.</summary>
    Eccentricity = 2,

    /// <summary>One row a component: diameter, radius, Wiener index.</summary>
    Summary = 4,

    /// <summary>Rows of a component by distance: the share of pairs within it.</summary>
    Profile = 8,
}

/// <summary>What a distances run computes.</summary>
public sealed record DistancePlan
{
    /// <summary>The tables wanted.</summary>
    public WantDistances Want { get; init; } = WantDistances.Eccentricity | WantDistances.Summary;

    /// <summary>The relative standard error of sampled Wiener indices to reach.</summary>
    public double TargetError { get; init; } = 0.005;

    /// <summary>The confidence of intervals, in (0, 1).</summary>
    public double Confidence { get; init; } = 0.95;

    /// <summary>The seed of sampled sources.</summary>
    public ulong Seed { get; init; } = 1;

    /// <summary>Threads; results do not depend on them.</summary>
    public int Threads { get; init; } = Environment.ProcessorCount;
}

/// <summary>What a distances run takes beside the network, by internal node.</summary>
public sealed record DistanceInputs
{
    /// <summary>Node weights, finite and not negative; null: every node counts 1, or 0 where links have lengths.</summary>
    public double[]? NodeWeights { get; init; }

    /// <summary>Requested pairs in the order of the request.</summary>
    public IReadOnlyList<(int U, int V)>? Pairs { get; init; }

    /// <summary>The resistance of each requested pair in another run, NaN where it has none; null: none to set beside.</summary>
    public double[]? Resistances { get; init; }

    /// <summary>The nodes whose eccentricities, sums and profiles are asked for; null: all nodes.</summary>
    public IReadOnlyList<int>? Sources { get; init; }
}

/// <summary>One row of the summary table.</summary>
public sealed record DistanceEntry
{
    /// <summary>0 is the largest component.</summary>
    public required int ComponentId { get; init; }

    /// <summary>Its nodes.</summary>
    public required long Nodes { get; init; }

    /// <summary>The largest eccentricity.</summary>
    public required double Diameter { get; init; }

    /// <summary>The least.</summary>
    public required double Radius { get; init; }

    /// <summary>The label of the centre: of all nodes of least eccentricity the one with the smallest label.</summary>
    public required string Centre { get; init; }

    /// <summary>How many nodes have the least eccentricity.</summary>
    public required long CentreNodes { get; init; }

    /// <summary>From where the diameter is reached.</summary>
    public required string PeripherySource { get; init; }

    /// <summary>And where to.</summary>
    public required string PeripheryTarget { get; init; }

    /// <summary>The Wiener index.</summary>
    public required double WienerIndex { get; init; }

    /// <summary>Its standard error, 0 where it is exact.</summary>
    public required double WienerIndexSe { get; init; }

    /// <summary>Lower end of its interval.</summary>
    public required double WienerIndexLower { get; init; }

    /// <summary>Upper end.</summary>
    public required double WienerIndexUpper { get; init; }

    /// <summary>Sum over pairs of w_u w_v t(u,v), or null without weights.</summary>
    public double? NodeWeightedWienerIndex { get; init; }

    /// <summary>The mean of t(u,v) over the pairs, 0 where there is none.</summary>
    public required double MeanDistance { get; init; }

    /// <summary>Searches behind the sums, 0 where a tree needed none.</summary>
    public required long Sources { get; init; }
}

/// <summary>What a finished distances run tells.</summary>
public sealed record DistanceSummary
{
    /// <summary>Nodes.</summary>
    public required long Nodes { get; init; }

    /// <summary>Links after cleaning.</summary>
    public required long Links { get; init; }

    /// <summary>Components.</summary>
    public required int Components { get; init; }

    /// <summary>How routes were searched: <c>hops</c>, <c>buckets</c> or <c>heap</c>.</summary>
    public required string Search { get; init; }

    /// <summary>Single-source searches that all eccentricities took; null where not wanted.</summary>
    public long? EccentricitySearches { get; init; }

    /// <summary>The summary table.</summary>
    public required IReadOnlyList<DistanceEntry> Entries { get; init; }

    /// <summary>Rows by table.</summary>
    public required IReadOnlyDictionary<string, long> Rows { get; init; }
}
