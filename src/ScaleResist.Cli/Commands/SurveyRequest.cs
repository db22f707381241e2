// A validated `survey` command.

using ScaleResist.Graphs;
using ScaleResist.Runs;

namespace ScaleResist.Cli.Commands;

/// <summary>What a <c>survey</c> command asks for.</summary>
internal sealed record SurveyRequest
{
    /// <summary>The network's path as named.</summary>
    public required string Network { get; init; }

    /// <summary>How its columns are read.</summary>
    public required ReadOptions Reading { get; init; }

    /// <summary>The run to foresee.</summary>
    public required EstimatePlan Plan { get; init; }

    /// <summary>Takes the words of a survey; null and the problem where they are wrong.</summary>
    public static SurveyRequest? Parse(string[] words, out string problem)
    {
        SurveyRequest? request = null;
        if (VerbLine.Parse("survey", "a survey", ["weights", "columns", "probes", "time-budget", "memory-budget", "threads"],
            ["verbose"], words, out problem) is VerbLine line)
        {
            problem = Problem(line, out request) ?? "";
        }
        return problem.Length == 0 ? request : null;
    }

    private static string? Problem(VerbLine line, out SurveyRequest? request)
    {
        request = null;
        if (string.IsNullOrEmpty(line.Network))
            return "no network is named; give its file: scaleresist survey NETWORK";
        if (EstimateValidation.ColumnsProblem(line["weights"], line["columns"], out ReadOptions reading) is string columnsProblem)
            return columnsProblem;
        if (EstimateValidation.BudgetProblem(line["time-budget"], line["memory-budget"], out TimeSpan? time, out long? memory)
            is string budgetProblem)
        {
            return budgetProblem;
        }
        if (EstimateValidation.CountsProblem(line["probes"], line["threads"], out int? probes, out int threads) is string countsProblem)
            return countsProblem;
        request = new SurveyRequest
        {
            Network = line.Network,
            Reading = reading,
            Plan = new EstimatePlan { Probes = probes, Threads = threads, TimeBudget = time, MemoryBudget = memory },
        };
        return null;
    }
}
