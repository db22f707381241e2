// `tune` from the command line: the table in the lake as DuckDB reads it, the commands it proposes, what it refuses; and, slow, its predictions against
// runs of the program.

using System.Diagnostics;
using System.Globalization;
using System.Text.Json;
using ScaleResist.Cli;
using ScaleResist.DataGen.Files;
using ScaleResist.DataGen.Networks;
using ScaleResist.Tests.Cli;
using ScaleResist.Tests.Lake;

namespace ScaleResist.Tests.EndToEnd;

public sealed class Tuning
{
    [Fact]
    public void The_frontier_lies_in_the_lake_as_the_contract_says()
    {
        using Place place = new();
        string network = Generated(place, Family.Grid, 400);
        CliResult result = Tune(network, "--lake", place.Lake, "--run-id", "a", "--want", "index,links", "--seed", "7");
        Assert.True(result.Exit == 0, result.Error);
        Assert.Empty(result.Messages);
        Assert.Equal(["run=a", "run=a/_SUCCESS", "run=a/frontier", "run=a/frontier/part-00000.parquet", "run=a/run.json"], place.LakeContent());

        string table = DuckLake.Table(place.Lake, "frontier");
        Assert.Equal(
            [
                ("route", "VARCHAR"), ("probes", "BIGINT"), ("predicted_error", "DOUBLE"), ("predicted_index_error", "DOUBLE"),
                ("achieved_error", "DOUBLE"), ("achieved_index_error", "DOUBLE"), ("predicted_seconds", "DOUBLE"), ("achieved_seconds", "DOUBLE"),
                ("predicted_bytes", "BIGINT"), ("on_frontier", "BOOLEAN"), ("command", "VARCHAR"), ("run", "VARCHAR"),
            ],
            DuckLake.Query($"DESCRIBE SELECT * FROM {table}").Select(row => ((string)row[0]!, (string)row[1]!)));
        Assert.Equal([("exact", 1L, 0L), ("probe", 7L, 7L)],
            DuckLake.Query($"SELECT route, count(*), count(probes) FROM {table} GROUP BY route ORDER BY route").Select(r => ((string)r[0]!, (long)r[1]!, (long)r[2]!)));
        // The definition, over all pairs of points.
        Assert.Equal(0L, DuckLake.Query($"""
            SELECT count(*) FROM {table} p WHERE on_frontier = EXISTS (
                SELECT 1 FROM {table} q WHERE q.predicted_seconds < p.predicted_seconds AND q.predicted_error < p.predicted_error)
            """)[0][0]);
        Assert.Equal([64L], DuckLake.Query($"SELECT probes FROM {table} WHERE achieved_seconds IS NOT NULL AND route = 'probe'").Select(r => (long)r[0]!));

        using JsonDocument record = JsonDocument.Parse(File.ReadAllBytes(Path.Combine(place.Run("a"), "run.json")));
        Assert.Equal("tune", record.RootElement.GetProperty("plan").GetProperty("verb").GetString());
        Assert.Equal(8, record.RootElement.GetProperty("frontier").GetArrayLength());
        Assert.Equal(8, record.RootElement.GetProperty("rows").GetProperty("frontier").GetInt32());
        Assert.Equal(
            DuckLake.Query($"SELECT command FROM {table}").Select(row => (string)row[0]!),
            record.RootElement.GetProperty("frontier").EnumerateArray().Select(point => point.GetProperty("command").GetString()));
    }

    [Fact]
    public void A_command_of_the_frontier_is_a_run_with_the_errors_foreseen()
    {
        using Place place = new();
        string network = Generated(place, Family.SmallWorld, 1000);
        Assert.Equal(0, Tune(network, "--lake", place.Lake, "--run-id", "a", "--want", "index,links,nodes").Exit);
        object?[] point = DuckLake.Query($"SELECT command, achieved_error, achieved_index_error FROM {DuckLake.Table(place.Lake, "frontier")} WHERE probes = 64")[0];
        string[] words = ((string)point[0]!).Split(' ');
        Assert.Equal("scaleresist", words[0]);
        CliResult run = CliRun.InProcess(new LibraryEngine(), [.. words.Skip(1), "--run-id", "b"]);
        Assert.True(run.Exit == 0, run.Error);
        double rows = Math.Max(Percentile(place, "links", "resistance"), Percentile(place, "nodes", "resistance_diagonal"));
        Assert.Equal(rows, (double)point[1]!, 1e-9);
        Assert.Equal(Percentile(place, "index", "kirchhoff_index"), (double)point[2]!, 1e-9);
    }

    [Fact]
    public void Without_a_lake_it_prints_and_leaves_nothing()
    {
        using Place place = new();
        CliResult result = Tune(Generated(place, Family.Grid, 400), "--want", "index");
        Assert.True(result.Exit == 0, result.Error);
        Assert.Equal(7, result.OutLines.Count(line => line.Contains(" probes: rows -, index ")));
        Assert.Contains(result.OutLines, line => line.StartsWith("command    scaleresist estimate ", StringComparison.Ordinal)
            && line.EndsWith(" --lake lake --route exact --want index", StringComparison.Ordinal));
        Assert.Empty(place.LakeContent());
    }

    [Fact]
    public void A_finished_tuning_is_answered_and_never_overwritten()
    {
        using Place place = new();
        string network = Generated(place, Family.Path, 40);
        string[] command = ["--lake", place.Lake, "--run-id", "a"];
        Assert.Equal(0, Tune(network, command).Exit);
        Assert.Contains("already done", Tune(network, command).Out);
        Assert.Contains("--want", Command.Refused(Tune(network, [.. command, "--want", "links"]), 2));
        Assert.Contains("--verb tune, not estimate", Command.Refused(Command.Estimate(network, place.Lake, "--run-id", "a"), 2));
    }

    [Fact]
    public void Refusals_have_the_exit_codes_of_an_estimate_and_leave_nothing()
    {
        using Place place = new();
        string[] lake = ["--lake", place.Lake, "--run-id", "a"];
        Command.Refused(Tune(Path.Combine(place.Folder, "none.csv"), lake), 3);
        Command.Refused(Tune(Generated(place, Family.Grid, 400), [.. lake, "--memory-budget", "1MB"]), 4);
        Assert.Empty(place.LakeContent());
        using CancellationTokenSource interrupted = new();
        interrupted.Cancel();
        CliResult result = CliRun.InProcess(new LibraryEngine(), ["tune", Generated(place, Family.Grid, 400), .. lake], interrupted.Token);
        Assert.Equal(5, result.Exit);
        Assert.Empty(place.LakeContent());
    }

    // Both are whole processes, one after the other in turns; the median of three of each, since other work on the machine disturbs single ones.
    [Theory]
    [Trait("Category", "Slow")]
    [InlineData(Family.Grid, 10_000)]
    [InlineData(Family.Road, 100_000)]
    [InlineData(Family.Preferential, 40_000)]
    [InlineData(Family.SmallWorld, 30_000)]
    public void Time_and_error_of_a_run_are_foreseen_within_a_quarter(Family family, int nodes)
    {
        using Place place = new();
        string network = Generated(place, family, nodes);
        string[] counts = ["64", "256"];
        Dictionary<string, List<double>> foreseen = counts.ToDictionary(k => k, _ => new List<double>()), taken = counts.ToDictionary(k => k, _ => new List<double>());
        for (int i = 0; i < 3; i++)
        {
            Processed(["tune", network, "--lake", place.Lake, "--run-id", $"t{i}", "--want", "index,nodes,links"]);
            foreach (string probes in counts)
            {
                foreseen[probes].Add((double)Foreseen(probes, i, "predicted_seconds"));
                taken[probes].Add(Processed(["estimate", network, "--lake", place.Lake, "--run-id", $"e{probes}{i}", "--want", "index,nodes,links",
                    "--route", "probe", "--probes", probes]));
            }
        }
        foreach (string probes in counts)
        {
            double rows = Math.Max(Percentile(place, "links", "resistance", $"e{probes}0"), Percentile(place, "nodes", "resistance_diagonal", $"e{probes}0"));
            Assert.InRange((double)Foreseen(probes, 0, "predicted_error") / rows, 0.75, 1.25);
            Assert.InRange((double)Foreseen(probes, 0, "predicted_index_error") / Percentile(place, "index", "kirchhoff_index", $"e{probes}0"), 0.75, 1.25);
            double ratio = foreseen[probes].Order().ElementAt(1) / taken[probes].Order().ElementAt(1);
            Assert.True(ratio is > 0.75 and < 1.25, $"{family}, {probes} probes: foreseen {Listed(foreseen[probes])} s, taken {Listed(taken[probes])} s");
        }

        object Foreseen(string probes, int run, string column) =>
            DuckLake.Query($"SELECT {column} FROM {DuckLake.Table(place.Lake, "frontier")} WHERE run = 't{run}' AND probes = {probes}")[0][0]!;

        static string Listed(List<double> seconds) => string.Join(", ", seconds.Select(s => s.ToString("0.00", CultureInfo.InvariantCulture)));
    }

    // Wall seconds of the program as users get it.
    private static double Processed(string[] args)
    {
        long begin = Stopwatch.GetTimestamp();
        using Process process = CliRun.Start(fake: false, args);
        Task<string> output = process.StandardOutput.ReadToEndAsync(), error = process.StandardError.ReadToEndAsync();
        process.WaitForExit();
        double seconds = Stopwatch.GetElapsedTime(begin).TotalSeconds;
        Assert.True(process.ExitCode == 0, output.Result + error.Result);
        return seconds;
    }

    private static CliResult Tune(string network, params string[] more) => CliRun.InProcess(new LibraryEngine(), ["tune", network, .. more]);

    private static string Generated(Place place, Family family, int nodes)
    {
        string file = Path.Combine(place.Folder, $"{family}.tsv");
        Assert.True(LinkForm.TryOf(file, out LinkForm form));
        LinkFile.Write(new FamilyPlan(family, nodes), form, file, default);
        return file;
    }

    // By rank: at least 95 % of the probed rows lie there or below.
    private static double Percentile(Place place, string table, string column, string run = "b") => (double)DuckLake.Query(
        $"SELECT quantile_disc({column}_se / {column}, 0.95) FROM {DuckLake.Table(place.Lake, table)} WHERE run = '{run}' AND method = 'probe'")[0][0]!;
}
