// A validated `impact` command, and how its words become one. Touches no file.

using System.Globalization;
using ScaleResist.Cli.Lake;
using ScaleResist.Graphs;
using ScaleResist.Runs;

namespace ScaleResist.Cli.Commands;

/// <summary>What an <c>impact</c> command asks for.</summary>
internal sealed record ImpactRequest
{
    public const int MostSuggestions = 1000;

    /// <summary>The network's path as named.</summary>
    public required string Network { get; init; }

    /// <summary>How its columns are read.</summary>
    public required ReadOptions Reading { get; init; }

    /// <summary>The lake's folder as named.</summary>
    public required string Lake { get; init; }

    /// <summary>The run's name.</summary>
    public required string RunId { get; init; }

    /// <summary>How it is computed.</summary>
    public required ImpactPlan Plan { get; init; }

    /// <summary>The file of planned cases, or null where additions are suggested.</summary>
    public string? Changes { get; init; }

    /// <summary>The file of candidates, or null.</summary>
    public string? Candidates { get; init; }

    /// <summary>The file of requested pairs, or null.</summary>
    public string? Pairs { get; init; }

    /// <summary>The file of node weights, or null.</summary>
    public string? NodeWeights { get; init; }

    /// <summary>Whether leftovers of an unfinished run are discarded.</summary>
    public bool Restart { get; init; }

    /// <summary>Takes the words of an impact; null and the problem where they are wrong.</summary>
    public static ImpactRequest? Parse(string[] words, DateTimeOffset now, out string problem)
    {
        ImpactRequest? request = null;
        if (VerbLine.Parse("impact", "an impact",
            [
                "lake", "run-id", "changes", "suggest", "candidates", "budget", "pairs", "node-weights", "weights", "columns", "route", "threads",
                "seed", "confidence", "memory-budget",
            ],
            ["restart", "verbose"], words, out problem) is VerbLine line)
        {
            problem = Problem(line, now, out request) ?? "";
        }
        return problem.Length == 0 ? request : null;
    }

    private static string? Problem(VerbLine line, DateTimeOffset now, out ImpactRequest? request)
    {
        request = null;
        if (string.IsNullOrEmpty(line.Network))
            return "no network is named; give its file: scaleresist impact NETWORK --changes FILE --lake DIR";
        if (string.IsNullOrEmpty(line["lake"]))
            return "no lake is named; say where the tables go: --lake DIR";
        foreach (string file in (string[])["changes", "candidates", "pairs", "node-weights"])
        {
            if (line[file] is "")
                return $"--{file} names no file; give its path";
        }
        if (JobProblem(line, out int? suggest, out double? budget) is string jobProblem)
            return jobProblem;
        string runId = line["run-id"] ?? RunFolder.DefaultRunId(line.Network, now);
        if (!RunFolder.IsRunId(runId))
        {
            return $"--run-id '{InputException.Show(runId)}' is not a plain name; "
                + "use up to 100 letters, digits, '.', '-' or '_', beginning with a letter or digit";
        }
        if (EstimateValidation.ColumnsProblem(line["weights"], line["columns"], out ReadOptions reading) is string columnsProblem)
            return columnsProblem;
        if (EstimateValidation.RouteProblem(line["route"], false, out Route route) is string routeProblem)
            return routeProblem;
        if (EstimateValidation.BudgetProblem(null, line["memory-budget"], out _, out long? memory) is string budgetProblem)
            return budgetProblem;
        if (EstimateValidation.CountsProblem(null, line["threads"], out _, out int threads) is string countsProblem)
            return countsProblem;
        if (!TryNumber(line["confidence"] ?? "0.95", out double confidence) || confidence >= 1)
            return $"--confidence '{InputException.Show(line["confidence"])}' is not a number between 0 and 1, such as 0.95";
        if (!ulong.TryParse(line["seed"] ?? "1", NumberStyles.None, CultureInfo.InvariantCulture, out ulong seed))
            return $"--seed '{InputException.Show(line["seed"])}' is not a whole number from 0 to {ulong.MaxValue}";
        request = new ImpactRequest
        {
            Network = line.Network,
            Reading = reading,
            Lake = line["lake"]!,
            RunId = runId,
            Plan = new ImpactPlan
            {
                Route = route,
                Suggest = suggest,
                Budget = budget,
                Confidence = confidence,
                Seed = seed,
                Threads = threads,
                MemoryBudget = memory,
            },
            Changes = line["changes"],
            Candidates = line["candidates"],
            Pairs = line["pairs"],
            NodeWeights = line["node-weights"],
            Restart = line.Has("restart"),
        };
        return null;
    }

    private static string? JobProblem(VerbLine line, out int? suggest, out double? budget)
    {
        (suggest, budget) = (null, null);
        if (line["changes"] is null && line["suggest"] is null)
            return "nothing is planned; name a table of cases with --changes FILE, or ask for additions with --suggest N";
        if (line["changes"] is not null && line["suggest"] is not null)
            return "--changes and --suggest are two jobs; run them one after the other, each with its own --run-id";
        if (line["suggest"] is null)
        {
            return (line["candidates"] ?? line["budget"]) is null ? null
                : $"--{(line["candidates"] is null ? "budget" : "candidates")} serves --suggest; leave it out, or write --suggest N for --changes";
        }
        if (line["pairs"] is not null)
            return "--pairs serves --changes; leave it out, or try the suggested links as cases of --changes";
        if (!int.TryParse(line["suggest"], NumberStyles.None, CultureInfo.InvariantCulture, out int count) || count is < 1 or > MostSuggestions)
            return $"--suggest '{InputException.Show(line["suggest"])}' is not a number from 1 to {MostSuggestions}";
        suggest = count;
        if (line["budget"] is not string text)
            return null;
        if (line["candidates"] is null)
            return "--budget needs costs; name candidates with a column cost: --candidates FILE";
        if (!TryNumber(text, out double most))
            return $"--budget '{InputException.Show(text)}' is not a number above zero, in the unit of the column cost";
        budget = most;
        return null;
    }

    private static bool TryNumber(string text, out double value) =>
        double.TryParse(text, NumberStyles.Float, CultureInfo.InvariantCulture, out value) && value > 0 && double.IsFinite(value);
}
