// A validated `tune` command, and the command line of each point it finds.

using System.Globalization;
using ScaleResist.Cli.Lake;
using ScaleResist.Graphs;
using ScaleResist.Runs;

namespace ScaleResist.Cli.Commands;

/// <summary>What a <c>tune</c> command asks for.</summary>
internal sealed record TuneRequest
{
    // Options that an estimate takes as they are.
    private static readonly string[] Passed = ["want", "weights", "columns", "memory-budget", "confidence", "seed", "threads"];

    /// <summary>The network's path as named.</summary>
    public required string Network { get; init; }

    /// <summary>How its columns are read.</summary>
    public required ReadOptions Reading { get; init; }

    /// <summary>The lake's folder as named; null where nothing is written.</summary>
    public required string? Lake { get; init; }

    /// <summary>The run's name; null without a lake.</summary>
    public required string? RunId { get; init; }

    /// <summary>The estimate to foresee.</summary>
    public required EstimatePlan Plan { get; init; }

    /// <summary>The options that go into every command, with their values.</summary>
    public required IReadOnlyList<(string Name, string Value)> Options { get; init; }

    /// <summary>Takes the words of a tuning; null and the problem where they are wrong.</summary>
    public static TuneRequest? Parse(string[] words, DateTimeOffset now, out string problem)
    {
        VerbLine? line = VerbLine.Parse("tune", "a tuning", ["lake", "run-id", .. Passed], ["verbose"], words, out problem);
        if (line is null)
            return null;
        if (string.IsNullOrEmpty(line.Network))
        {
            problem = "no network is named; give its file: scaleresist tune NETWORK";
            return null;
        }
        if (line["run-id"] is not null && line["lake"] is null)
        {
            problem = "--run-id names a run of a lake; say which: --lake DIR";
            return null;
        }
        // What an estimate would refuse is refused in its words.
        EstimateRequest? estimate = EstimateValidation.Validate(
            new EstimateOptions
            {
                Network = line.Network,
                Lake = line["lake"] ?? "lake",
                RunId = line["run-id"],
                Want = line["want"],
                Weights = line["weights"],
                Columns = line["columns"],
                MemoryBudget = line["memory-budget"],
                Confidence = line["confidence"],
                Seed = line["seed"],
                Threads = line["threads"],
                Route = "probe",
            },
            now, out problem);
        if (line["want"]?.Split(',', StringSplitOptions.TrimEntries).Contains("pairs") == true)
            problem = "--want pairs is not foreseen by tune; leave pairs out";
        else if (estimate is { Plan.Want: Want.Components })
            problem = "--want components has no error bars, so that nothing is to tune; add index, nodes or links";
        return problem.Length > 0 ? null : new TuneRequest
        {
            Network = line.Network,
            Reading = estimate!.Reading,
            Lake = line["lake"],
            RunId = line["lake"] is null ? null : line["run-id"] ?? RunFolder.DefaultRunId(line.Network, now),
            Plan = estimate.Plan with { Route = Route.Auto },
            Options = [.. Passed.Where(name => line[name] is not null).Select(name => (name, line[name]!))],
        };
    }

    /// <summary>The command line of a point, as a shell takes it.</summary>
    public string CommandOf(FrontierPoint point)
    {
        List<string> words = ["scaleresist", "estimate", Network, "--lake", Lake ?? "lake"];
        if (point.Probes is int probes)
            words.AddRange(["--route", "probe", "--probes", probes.ToString(CultureInfo.InvariantCulture)]);
        else
            words.AddRange(["--route", "exact"]);
        foreach ((string name, string value) in Options)
            words.AddRange(["--" + name, value]);
        return string.Join(' ', words.Select(Quoted));
    }

    private static string Quoted(string word) =>
        word.Length > 0 && word.All(c => char.IsAsciiLetterOrDigit(c) || "-_./,:=+@%".Contains(c)) ? word : $"'{word.Replace("'", "'\\''")}'";
}
