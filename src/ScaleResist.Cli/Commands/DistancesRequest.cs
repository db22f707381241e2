// A validated `distances` command. Touches no file.

using System.Globalization;
using ScaleResist.Cli.Lake;
using ScaleResist.Graphs;
using ScaleResist.Runs;

namespace ScaleResist.Cli.Commands;

/// <summary>What a <c>distances</c> command asks for.</summary>
internal sealed record DistancesRequest
{
    private static readonly Dictionary<string, WantDistances> Tables = new(StringComparer.Ordinal)
    {
        ["pairs"] = WantDistances.Pairs,
        ["eccentricity"] = WantDistances.Eccentricity,
        ["summary"] = WantDistances.Summary,
        ["profile"] = WantDistances.Profile,
    };

    /// <summary>The network's path as named.</summary>
    public required string Network { get; init; }

    /// <summary>How its columns are read; a third one is a length or nothing.</summary>
    public required ReadOptions Reading { get; init; }

    /// <summary>The lake's folder as named.</summary>
    public required string Lake { get; init; }

    /// <summary>The run's name.</summary>
    public required string RunId { get; init; }

    /// <summary>What is computed and how.</summary>
    public required DistancePlan Plan { get; init; }

    /// <summary>The file of requested pairs, or null.</summary>
    public string? Pairs { get; init; }

    /// <summary>The file of node weights, or null.</summary>
    public string? NodeWeights { get; init; }

    /// <summary>The file of sources, or null.</summary>
    public string? Sources { get; init; }

    /// <summary>The run of the lake whose resistances stand beside the distances, or null.</summary>
    public string? Beside { get; init; }

    /// <summary>Whether leftovers of an unfinished run are discarded.</summary>
    public bool Restart { get; init; }

    /// <summary>The names of the tables in a set, in the order of the contract.</summary>
    public static IEnumerable<string> NamesOf(WantDistances want) => Tables.Where(t => want.HasFlag(t.Value)).Select(t => t.Key);

    /// <summary>Takes the words of the command; null and the problem where they are wrong.</summary>
    public static DistancesRequest? Parse(string[] words, DateTimeOffset now, out string problem)
    {
        DistancesRequest? request = null;
        if (VerbLine.Parse("distances", "a run",
            [
                "lake", "run-id", "want", "columns", "node-weights", "pairs", "sources", "beside", "target-error", "confidence", "seed", "threads",
            ],
            ["lengths", "restart", "verbose"], words, out problem) is VerbLine line)
        {
            problem = Problem(line, now, out request) ?? "";
        }
        return problem.Length == 0 ? request : null;
    }

    private static string? Problem(VerbLine line, DateTimeOffset now, out DistancesRequest? request)
    {
        request = null;
        if (string.IsNullOrEmpty(line.Network))
            return "no network is named; give its file: scaleresist distances NETWORK --lake DIR";
        if (string.IsNullOrEmpty(line["lake"]))
            return "no lake is named; say where the tables go: --lake DIR";
        foreach (string file in (string[])["pairs", "node-weights", "sources"])
        {
            if (line[file] is "")
                return $"--{file} names no file; give its path";
        }
        string runId = line["run-id"] ?? RunFolder.DefaultRunId(line.Network, now);
        if (!RunFolder.IsRunId(runId))
        {
            return $"--run-id '{InputException.Show(runId)}' is not a plain name; "
                + "use up to 100 letters, digits, '.', '-' or '_', beginning with a letter or digit";
        }
        if (line["beside"] is string other && !RunFolder.IsRunId(other))
            return $"--beside '{InputException.Show(other)}' is not the name of a run; give the id of a run of estimate in the same lake";
        if (WantProblem(line, out WantDistances want) is string wantProblem)
            return wantProblem;
        if (ColumnsProblem(line, out ReadOptions reading) is string columnsProblem)
            return columnsProblem;
        if (EstimateValidation.CountsProblem(null, line["threads"], out _, out int threads) is string countsProblem)
            return countsProblem;
        if (!EstimateValidation.TryFraction(line["target-error"] ?? "0.005", out double target))
            return $"--target-error '{InputException.Show(line["target-error"])}' is not a number between 0 and 1; write 0.01 for one per cent";
        if (!EstimateValidation.TryFraction(line["confidence"] ?? "0.95", out double confidence))
            return $"--confidence '{InputException.Show(line["confidence"])}' is not a number between 0 and 1, such as 0.95";
        if (!ulong.TryParse(line["seed"] ?? "1", NumberStyles.None, CultureInfo.InvariantCulture, out ulong seed))
            return $"--seed '{InputException.Show(line["seed"])}' is not a whole number from 0 to {ulong.MaxValue}";
        request = new DistancesRequest
        {
            Network = line.Network,
            Reading = reading,
            Lake = line["lake"]!,
            RunId = runId,
            Plan = new DistancePlan { Want = want, TargetError = target, Confidence = confidence, Seed = seed, Threads = threads },
            Pairs = line["pairs"],
            NodeWeights = line["node-weights"],
            Sources = line["sources"],
            Beside = line["beside"],
            Restart = line.Has("restart"),
        };
        return null;
    }

    private static string? WantProblem(VerbLine line, out WantDistances want)
    {
        want = line["want"] is null ? new DistancePlan().Want : WantDistances.None;
        foreach (string name in line["want"]?.Split(',', StringSplitOptions.TrimEntries) ?? [])
        {
            if (!Tables.TryGetValue(name, out WantDistances table))
            {
                string hint = Suggestion.For(name, Tables.Keys) is string near
                    ? $"did you mean {near}?"
                    : $"choose from {string.Join(',', Tables.Keys)}";
                return $"--want '{InputException.Show(name)}' is not a table; {hint}";
            }
            want |= table;
        }
        if (want.HasFlag(WantDistances.Pairs) && line["pairs"] is null)
            return "--want pairs needs the pairs; name their file with --pairs FILE";
        if (line["pairs"] is not null)
            want |= WantDistances.Pairs;
        if (line["beside"] is not null && line["pairs"] is null)
            return "--beside sets resistances beside the distances of pairs; name their file with --pairs FILE";
        if (line["sources"] is not null && want == WantDistances.Pairs)
            return "--sources serves eccentricity, summary and profile, which --want leaves out; add one of them to --want";
        return null;
    }

    private static string? ColumnsProblem(VerbLine line, out ReadOptions reading)
    {
        string[]? columns = line["columns"]?.Split(',', StringSplitOptions.TrimEntries);
        bool lengths = line.Has("lengths");
        reading = new ReadOptions { Weights = lengths ? WeightMeaning.Length : WeightMeaning.None, Columns = columns };
        if (columns is null)
            return null;
        if (columns.Length is < 2 or > 3 || columns.Any(c => c.Length == 0))
            return $"--columns '{InputException.Show(line["columns"])}' is not two or three columns; write SRC,DST or SRC,DST,W";
        if (columns.Length == 3 && !lengths)
            return $"--columns names a third column '{InputException.Show(columns[2])}'; add --lengths where it holds lengths, or leave it out";
        return columns.Length == 2 && lengths
            ? $"--lengths needs their column too; write --columns {InputException.Show(columns[0])},{InputException.Show(columns[1])},W"
            : null;
    }
}
