// The options of `estimate` as typed: text, nothing checked. What they mean is EstimateRequest's affair.

namespace ScaleResist.Cli.Commands;

/// <summary>Raw options of <c>estimate</c>; null where not given.</summary>
internal sealed record EstimateOptions
{
    public string? Network { get; init; }

    public string? Lake { get; init; }

    public string? RunId { get; init; }

    public string? Want { get; init; }

    public string? Weights { get; init; }

    public string? Columns { get; init; }

    public string? Pairs { get; init; }

    public string? NodeWeights { get; init; }

    public string? Terminals { get; init; }

    public string? Route { get; init; }

    public string? Probes { get; init; }

    public string? TargetError { get; init; }

    public string? Confidence { get; init; }

    public string? TimeBudget { get; init; }

    public string? MemoryBudget { get; init; }

    public string? Seed { get; init; }

    public string? Threads { get; init; }

    public string? Shard { get; init; }

    public bool Restart { get; init; }
}
