// A request as run.json keeps it, and what makes two requests the same run. Invariant: everything that can change a number in
// the tables is in it; threads, the lake and the names of files (their digests are) are not.

using System.Text.Json.Nodes;
using ScaleResist.Graphs;

namespace ScaleResist.Cli.Commands;

/// <summary>Plans as JSON.</summary>
internal static class RunPlan
{
    // Names of files: for people, not for comparison.
    private static readonly string[] NotCompared = ["pairs", "node_weights", "terminals", "changes", "candidates"];

    /// <summary>The plan of a request; reads pairs, node weights and terminals for their digests.</summary>
    /// <exception cref="InputException">One of these files cannot be read.</exception>
    public static JsonObject Of(EstimateRequest request, CancellationToken interrupted) => new()
    {
        ["verb"] = "estimate",
        ["want"] = string.Join(',', EstimateValidation.NamesOf(request.Plan.Want)),
        // Nobody's number and no dial: what the default is.
        ["probes"] = request.Plan is { TargetError: null, TimeBudget: null } ? request.Plan.MostProbes : request.Plan.Probes,
        ["target_error"] = request.Plan.TargetError,
        ["route"] = request.Plan.Route.ToString().ToLowerInvariant(),
        ["confidence"] = request.Plan.Confidence,
        ["seed"] = request.Plan.Seed,
        ["time_budget"] = request.Plan.TimeBudget?.TotalSeconds,
        ["memory_budget"] = request.Plan.MemoryBudget,
        ["mode_error"] = request.Plan.ModeErrorOf(0),
        ["weights"] = WeightsOf(request.Reading),
        ["columns"] = ColumnsOf(request.Reading),
        ["pairs"] = request.Pairs,
        ["pairs_sha256"] = request.Pairs is string pairs ? InputDigest.Sha256(pairs, interrupted) : null,
        ["node_weights"] = request.NodeWeights,
        ["node_weights_sha256"] = request.NodeWeights is string weights ? InputDigest.Sha256(weights, interrupted) : null,
        ["terminals"] = request.Terminals,
        ["terminals_sha256"] = request.Terminals is string terminals ? InputDigest.Sha256(terminals, interrupted) : null,
    };

    /// <summary>The plan of a tuning; threads and memory are part of what it finds.</summary>
    public static JsonObject Of(TuneRequest request) => new()
    {
        ["verb"] = "tune",
        ["want"] = string.Join(',', EstimateValidation.NamesOf(request.Plan.Want)),
        ["confidence"] = request.Plan.Confidence,
        ["seed"] = request.Plan.Seed,
        ["threads"] = request.Plan.Threads,
        ["memory_budget"] = request.Plan.MemoryBudget,
        ["weights"] = WeightsOf(request.Reading),
        ["columns"] = ColumnsOf(request.Reading),
    };

    // Without --weights a third column is refused, so a run that finished had none.
    private static string WeightsOf(ReadOptions reading) =>
        reading.Weights is WeightMeaning.Unsaid ? "none" : reading.Weights.ToString().ToLowerInvariant();

    private static string? ColumnsOf(ReadOptions reading) => reading.Columns is { } columns ? string.Join(',', columns) : null;

    /// <summary>The first difference between a finished run's plan and a new one, or null: <c>--probes 64, not 16</c>.</summary>
    public static string? Difference(JsonObject finished, JsonObject asked)
    {
        foreach ((string key, JsonNode? value) in asked)
        {
            string before = Text(finished[key]);
            string now = Text(value);
            if (NotCompared.Contains(key) || before == now)
                continue;
            string option = "--" + key.Replace("_sha256", "").Replace('_', '-');
            return key.EndsWith("_sha256", StringComparison.Ordinal)
                ? $"other content in {option}"
                : $"{option} {before}, not {now}";
        }
        return null;
    }

    private static string Text(JsonNode? node) => node is null ? "(none)" : node.ToJsonString().Trim('"');
}
