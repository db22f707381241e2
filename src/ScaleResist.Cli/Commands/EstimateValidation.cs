// From typed text to a request, or to one line that says what is wrong and how to mend it. Touches no file.
// An option this version does not serve is refused here, never accepted and ignored.

using System.Globalization;
using ScaleResist.Cli.Lake;
using ScaleResist.Graphs;
using ScaleResist.Runs;

namespace ScaleResist.Cli.Commands;

/// <summary>Validates the options of <c>estimate</c>.</summary>
internal static class EstimateValidation
{
    public const int FewestProbes = 4;
    public const int MostProbes = EstimatePlan.LargestProbes;
    public const int MostThreads = 256;

    private static readonly Dictionary<string, Want> Tables = new(StringComparer.Ordinal)
    {
        ["index"] = Want.Index,
        ["components"] = Want.Components,
        ["nodes"] = Want.Nodes,
        ["links"] = Want.Links,
        ["pairs"] = Want.Pairs,
        ["coordinates"] = Want.Coordinates,
    };

    /// <summary>The names of the tables in a set, in the order of the contract.</summary>
    public static IEnumerable<string> NamesOf(Want want) => Tables.Where(t => want.HasFlag(t.Value)).Select(t => t.Key);

    /// <summary>Gives the request, or null and the problem.</summary>
    public static EstimateRequest? Validate(EstimateOptions options, DateTimeOffset now, out string problem)
    {
        problem = Problem(options, now, out EstimateRequest? request) ?? "";
        return problem.Length == 0 ? request : null;
    }

    private static string? Problem(EstimateOptions options, DateTimeOffset now, out EstimateRequest? request)
    {
        request = null;
        if (string.IsNullOrEmpty(options.Network))
            return "no network is named; give its file: scaleresist estimate NETWORK --lake DIR";
        if (string.IsNullOrEmpty(options.Lake))
            return "no lake is named; say where the tables go: --lake DIR";
        if (options.Pairs is "" || options.NodeWeights is "" || options.Terminals is "")
        {
            string unnamed = options.Pairs is "" ? "--pairs" : options.NodeWeights is "" ? "--node-weights" : "--terminals";
            return $"{unnamed} names no file; give its path";
        }
        if (NotInThisVersion(options) is string missing)
            return missing;

        string runId = options.RunId ?? RunFolder.DefaultRunId(options.Network, now);
        if (!RunFolder.IsRunId(runId))
        {
            return $"--run-id '{InputException.Show(runId)}' is not a plain name; "
                + "use up to 100 letters, digits, '.', '-' or '_', beginning with a letter or digit";
        }
        if (WantProblem(options, out Want want) is string wantProblem)
            return wantProblem;
        if (ColumnsProblem(options.Weights, options.Columns, out ReadOptions reading) is string columnsProblem)
            return columnsProblem;
        if (RouteProblem(options.Route, options.Probes is not null, out Route route) is string routeProblem)
            return routeProblem;
        if (BudgetProblem(options.TimeBudget, options.MemoryBudget, out TimeSpan? time, out long? memory) is string budgetProblem)
            return budgetProblem;
        if (CountsProblem(options.Probes, options.Threads, out int? probes, out int threads) is string countsProblem)
            return countsProblem;
        if (TargetProblem(options, out double? target) is string targetProblem)
            return targetProblem;
        if (!TryFraction(options.Confidence ?? "0.95", out double confidence))
            return $"--confidence '{InputException.Show(options.Confidence)}' is not a number between 0 and 1, such as 0.95";
        if (!ulong.TryParse(options.Seed ?? "1", NumberStyles.None, CultureInfo.InvariantCulture, out ulong seed))
            return $"--seed '{InputException.Show(options.Seed)}' is not a whole number from 0 to {ulong.MaxValue}";

        request = new EstimateRequest
        {
            Network = options.Network,
            Reading = reading,
            Lake = options.Lake,
            RunId = runId,
            Plan = new EstimatePlan
            {
                Want = want,
                Route = route,
                Probes = probes,
                TargetError = target,
                Confidence = confidence,
                Seed = seed,
                Threads = threads,
                TimeBudget = time,
                MemoryBudget = memory,
            },
            Pairs = options.Pairs,
            NodeWeights = options.NodeWeights,
            Terminals = options.Terminals,
            Restart = options.Restart,
        };
        return null;
    }

    private static string? TargetProblem(EstimateOptions options, out double? target)
    {
        target = null;
        if (options.TargetError is not string text)
            return null;
        if (options.Probes is not null)
            return "--probes and --target-error both say how many probes there are; choose one";
        if (!TryFraction(text, out double error))
            return $"--target-error '{InputException.Show(text)}' is not a number between 0 and 1; write 0.01 for one per cent";
        target = error;
        return null;
    }

    private static string? NotInThisVersion(EstimateOptions options)
    {
        if (options.Shard is not null)
            return "--shard is not in this version; run the whole estimate on one machine";
        return null;
    }

    /// <summary>
    /// The route of a plan, or what is wrong with it. Who names a number of probes has chosen to probe.
    /// </summary>
    public static string? RouteProblem(string? text, bool probesNamed, out Route route)
    {
        route = text switch
        {
            "exact" => Route.Exact,
            "probe" => Route.Probe,
            _ => probesNamed ? Route.Probe : Route.Auto,
        };
        return text is null or "auto" or "exact" or "probe"
            ? null
            : $"--route '{InputException.Show(text)}' is unknown; choose auto, exact or probe";
    }

    /// <summary>The budgets of a plan, null where not given, or what is wrong with them.</summary>
    public static string? BudgetProblem(string? timeText, string? memoryText, out TimeSpan? time, out long? memory)
    {
        (time, memory) = (null, null);
        if (timeText is not null)
        {
            if (!Units.TryDuration(timeText, out TimeSpan duration))
                return $"--time-budget '{InputException.Show(timeText)}' is not a duration such as 4h, 90m or 30s";
            time = duration;
        }
        if (memoryText is not null)
        {
            if (!Units.TrySize(memoryText, out long bytes))
                return $"--memory-budget '{InputException.Show(memoryText)}' is not a size such as 16GiB or 500MB";
            memory = bytes;
        }
        return null;
    }

    /// <summary>The numbers of probes (null where not given) and threads, or what is wrong with them.</summary>
    public static string? CountsProblem(string? probesText, string? threadsText, out int? probes, out int threads)
    {
        (probes, threads) = (null, 0);
        bool good = TryWhole(probesText, 0, FewestProbes, MostProbes, out int count);
        probes = probesText is null ? null : count;
        if (!good)
            return $"--probes '{InputException.Show(probesText)}' is not a number from {FewestProbes} to {MostProbes}";
        if (!TryWhole(threadsText, Math.Min(Environment.ProcessorCount, MostThreads), 1, MostThreads, out threads))
            return $"--threads '{InputException.Show(threadsText)}' is not a number from 1 to {MostThreads}";
        return null;
    }

    private static string? WantProblem(EstimateOptions options, out Want want)
    {
        want = options.Want is null ? new EstimatePlan().Want : Want.None;
        foreach (string name in options.Want?.Split(',', StringSplitOptions.TrimEntries) ?? [])
        {
            if (!Tables.TryGetValue(name, out Want table))
            {
                string hint = Suggestion.For(name, Tables.Keys) is string near
                    ? $"did you mean {near}?"
                    : $"choose from {string.Join(',', Tables.Keys)}";
                return $"--want '{InputException.Show(name)}' is not a table; {hint}";
            }
            want |= table;
        }
        if (want.HasFlag(Want.Pairs) && options.Pairs is null)
            return "--want pairs needs the pairs; name their file with --pairs FILE";
        if (options.Pairs is not null)
            want |= Want.Pairs;
        if (options.NodeWeights is not null && !want.HasFlag(Want.Index))
            return "--node-weights serves the index table, which --want leaves out; add index to --want";
        if (options.Terminals is not null && !want.HasFlag(Want.Nodes))
            return "--terminals serves the nodes table, which --want leaves out; add nodes to --want";
        return null;
    }

    /// <summary>How the network's columns are read, or what is wrong with it.</summary>
    public static string? ColumnsProblem(string? meaning, string? columnList, out ReadOptions reading)
    {
        reading = new ReadOptions();
        WeightMeaning weights;
        switch (meaning)
        {
            case null:
                weights = WeightMeaning.Unsaid;
                break;
            case "none":
                weights = WeightMeaning.None;
                break;
            case "conductance":
                weights = WeightMeaning.Conductance;
                break;
            case "resistance":
                weights = WeightMeaning.Resistance;
                break;
            default:
                return $"--weights '{InputException.Show(meaning)}' is unknown; choose none, conductance or resistance";
        }
        string[]? columns = columnList?.Split(',', StringSplitOptions.TrimEntries);
        if (columns is not null && (columns.Length is < 2 or > 3 || columns.Any(c => c.Length == 0)))
            return $"--columns '{InputException.Show(columnList)}' is not two or three columns; write SRC,DST or SRC,DST,W";
        bool weighted = weights is WeightMeaning.Conductance or WeightMeaning.Resistance;
        if (columns?.Length == 3 && !weighted)
        {
            return $"--columns names the weight column '{InputException.Show(columns[2])}'; "
                + "say what it means: --weights conductance or --weights resistance";
        }
        if (columns?.Length == 2 && weighted)
        {
            return $"--weights {meaning} needs the weight's column too; "
                + $"write --columns {InputException.Show(columns[0])},{InputException.Show(columns[1])},W";
        }
        reading = new ReadOptions { Weights = weights, Columns = columns };
        return null;
    }

    internal static bool TryWhole(string? text, int otherwise, int least, int most, out int value)
    {
        value = otherwise;
        return text is null
            || (int.TryParse(text, NumberStyles.None, CultureInfo.InvariantCulture, out value)
                && value >= least && value <= most);
    }

    internal static bool TryFraction(string text, out double value) =>
        double.TryParse(text, NumberStyles.Float, CultureInfo.InvariantCulture, out value) && value > 0 && value < 1;
}
