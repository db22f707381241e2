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

    /// <summary>The options as typed, or null and the problem.</summary>
    public static EstimateOptions? Parse(string[] words, out string problem)
    {
        VerbLine? line = VerbLine.Parse(
            "estimate", "an estimate",
            [
                "lake", "run-id", "want", "weights", "columns", "pairs", "node-weights", "terminals", "route", "probes", "target-error",
                "confidence", "time-budget", "memory-budget", "seed", "threads", "shard",
            ],
            ["restart", "verbose"], words, out problem);
        return line is null ? null : new EstimateOptions
        {
            Network = line.Network,
            Lake = line["lake"],
            RunId = line["run-id"],
            Want = line["want"],
            Weights = line["weights"],
            Columns = line["columns"],
            Pairs = line["pairs"],
            NodeWeights = line["node-weights"],
            Terminals = line["terminals"],
            Route = line["route"],
            Probes = line["probes"],
            TargetError = line["target-error"],
            Confidence = line["confidence"],
            TimeBudget = line["time-budget"],
            MemoryBudget = line["memory-budget"],
            Seed = line["seed"],
            Threads = line["threads"],
            Shard = line["shard"],
            Restart = line.Has("restart"),
        };
    }
}
