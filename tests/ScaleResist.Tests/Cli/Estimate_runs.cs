// The verb `estimate` from command line to lake, inside the test's process with the fake engine.

using System.Text.Json;
using ScaleResist.Cli.Lake;
using ScaleResist.Graphs;
using ScaleResist.Tests.Lake;

namespace ScaleResist.Tests.Cli;

public sealed class Estimate_runs
{
    [Fact]
    public void A_finished_run_is_told_in_at_most_25_lines()
    {
        using Place place = new();
        CliResult result = CliRun.InProcess(new FakeEngine { Nodes = 1234 }, place.Estimate());
        Assert.True(result.Exit == 0, result.Error);
        Assert.InRange(result.OutLines.Length, 10, 25);
        Assert.Contains("1,234 nodes, 100 links", result.Out);
        Assert.Contains("1 self-loop dropped, 2 parallel links merged", result.Out);
        Assert.Contains("index 63,769,600, 95 % interval 63,700,000 to 63,840,000", result.Out);
        Assert.Contains("mean resistance 5.2253", result.Out);
        Assert.Contains("(-0.041 %)", result.Out); // (1231.5 - 1232) / 1232
        Assert.Contains("7 - 8: bridge, cuts off 12 nodes", result.Out);
        Assert.Contains("solver     12 nodes eliminated, jacobi, 64 right-hand sides, at most 123 iterations", result.Out);
        Assert.Empty(result.Messages);

        // The query is there to be pasted, so it must run.
        string query = result.OutLines.Single(l => l.StartsWith("query")).Split(' ', 2)[1];
        Assert.Equal(20, DuckLake.Query(query).Count);
    }

    [Fact]
    public void The_record_is_valid_json_also_where_numbers_are_not_finite()
    {
        using Place place = new();
        Assert.Equal(0, CliRun.InProcess(new FakeEngine(),
            place.Estimate("a", "--seed", "18446744073709551615", "--probes", "9")).Exit);
        using JsonDocument json = JsonDocument.Parse(File.ReadAllBytes(Path.Combine(place.Run("a"), "run.json")));
        JsonElement record = json.RootElement;
        Assert.Equal(1, record.GetProperty("schema_version").GetInt32());
        Assert.Equal("a", record.GetProperty("run_id").GetString());
        Assert.Equal(0, record.GetProperty("exit_status").GetInt32());
        Assert.Equal(9, record.GetProperty("plan").GetProperty("probes").GetInt32());
        Assert.Equal(ulong.MaxValue, record.GetProperty("plan").GetProperty("seed").GetUInt64());
        Assert.Equal(place.Network, record.GetProperty("input").GetProperty("path").GetString());
        Assert.Equal(64, record.GetProperty("input").GetProperty("sha256").GetString()!.Length);
        Assert.Equal(2, record.GetProperty("cleaning").GetProperty("parallel_links").GetInt64());
        Assert.Equal(100, record.GetProperty("network").GetProperty("links").GetInt64());
        Assert.Equal(["reading", "solving"],
            record.GetProperty("phases").EnumerateArray().Select(p => p.GetProperty("name").GetString()));
        Assert.Equal("jacobi", record.GetProperty("solver").GetProperty("preconditioner").GetString());
        Assert.Equal(38, record.GetProperty("foster").GetProperty("expected").GetInt64());
        Assert.Equal("NaN", record.GetProperty("index")[1].GetProperty("mean_resistance").GetString());
        Assert.Equal(63769632.8, record.GetProperty("index")[0].GetProperty("kirchhoff_index").GetProperty("value").GetDouble());
        Assert.Equal(["index", "components", "nodes", "links"], record.GetProperty("rows").EnumerateObject().Select(r => r.Name));
        Assert.True(record.GetProperty("peak_resident_bytes").GetInt64() > 10_000_000);
        Assert.True(record.GetProperty("machine").GetProperty("cores").GetInt32() > 0);
        Assert.EndsWith("Z", record.GetProperty("finished").GetString());
    }

    [Fact]
    public void Only_what_is_wanted_is_written()
    {
        using Place place = new();
        Assert.Equal(0, CliRun.InProcess(new FakeEngine(), place.Estimate("a", "--want", "index,links")).Exit);
        Assert.Equal(["index", "links"], Directory.GetDirectories(place.Run("a")).Select(Path.GetFileName).Order());
    }

    [Fact]
    public void The_same_command_again_says_that_it_is_done()
    {
        using Place place = new();
        FakeEngine engine = new();
        Assert.Equal(0, CliRun.InProcess(engine, place.Estimate("a", "--threads", "1")).Exit);
        DateTime written = File.GetLastWriteTimeUtc(Path.Combine(place.Run("a"), "run.json"));
        CliResult again = CliRun.InProcess(engine, place.Estimate("a", "--threads", "2"));
        Assert.Equal(0, again.Exit);
        Assert.Contains("already done", again.Out);
        Assert.Contains(place.Run("a"), again.Out);
        Assert.Equal(1, engine.Runs);
        Assert.Equal(written, File.GetLastWriteTimeUtc(Path.Combine(place.Run("a"), "run.json")));
    }

    [Theory]
    [InlineData("--probes", "16", "--probes 64, not 16")]
    [InlineData("--seed", "2", "--seed 1, not 2")]
    [InlineData("--confidence", "0.9", "--confidence 0.95, not 0.9")]
    [InlineData("--want", "index", "--want index,components,nodes,links, not index")]
    [InlineData("--weights", "conductance", "--weights none, not conductance")]
    [InlineData("--columns", "from,to", "--columns (none), not from,to")]
    public void Another_plan_under_a_finished_id_is_refused_by_name(string option, string value, string difference)
    {
        using Place place = new();
        Assert.Equal(0, CliRun.InProcess(new FakeEngine(), place.Estimate()).Exit);
        string[] before = place.LakeContent();
        CliResult other = CliRun.InProcess(new FakeEngine(), place.Estimate("a", option, value));
        Assert.Equal(2, other.Exit);
        Assert.Contains(difference, Assert.Single(other.ErrorLines));
        Assert.Contains("never overwritten", other.Error);
        Assert.Equal(before, place.LakeContent());
    }

    [Fact]
    public void Other_content_of_the_network_or_the_pairs_is_another_plan()
    {
        using Place place = new();
        string pairs = Path.Combine(place.Folder, "p.csv");
        File.WriteAllText(pairs, "1,2\n");
        Assert.Equal(0, CliRun.InProcess(new FakeEngine(), place.Estimate("a", "--pairs", pairs)).Exit);
        File.WriteAllText(pairs, "1,3\n");
        CliResult other = CliRun.InProcess(new FakeEngine(), place.Estimate("a", "--pairs", pairs));
        Assert.Equal(2, other.Exit);
        Assert.Contains("other content in --pairs", other.Error);
        File.WriteAllText(pairs, "1,2\n");
        File.AppendAllText(place.Network, "3,4\n");
        other = CliRun.InProcess(new FakeEngine(), place.Estimate("a", "--pairs", pairs));
        Assert.Equal(2, other.Exit);
        Assert.Contains("a network of other content", other.Error);
    }

    [Fact]
    public void Restart_does_not_overwrite_a_finished_run()
    {
        using Place place = new();
        FakeEngine engine = new();
        Assert.Equal(0, CliRun.InProcess(engine, place.Estimate()).Exit);
        CliResult again = CliRun.InProcess(engine, place.Estimate("a", "--restart"));
        Assert.Equal(2, again.Exit);
        Assert.Contains("never overwritten", Assert.Single(again.ErrorLines));
        Assert.Equal(1, engine.Runs);
    }

    [Fact]
    public void A_missing_network_is_exit_3_and_leaves_nothing()
    {
        using Place place = new();
        File.Delete(place.Network);
        CliResult result = CliRun.InProcess(new FakeEngine(), place.Estimate());
        Assert.Equal(3, result.Exit);
        Assert.Equal($"scaleresist: {place.Network}: no such file; check the path", Assert.Single(result.Messages));
        Assert.False(Directory.Exists(place.Lake));
    }

    [Fact]
    public void Missing_pairs_are_exit_3_before_anything_is_written()
    {
        using Place place = new();
        CliResult result = CliRun.InProcess(new FakeEngine(),
            place.Estimate("a", "--pairs", Path.Combine(place.Folder, "none.csv")));
        Assert.Equal(3, result.Exit);
        Assert.Contains("none.csv: no such file; check the path", Assert.Single(result.ErrorLines));
        Assert.False(Directory.Exists(place.Lake));
    }

    public static TheoryData<Exception, int, string> Failures => new()
    {
        { new InputException("n.csv", 7, "weight 'x' is not a number", "mend the weight"), 3,
            "n.csv:7: weight 'x' is not a number; mend the weight" },
        { new InvalidOperationException("two\nlines"), 1, "a fault of ours (InvalidOperationException): two lines" },
        { new OutOfMemoryException(), 4, "not enough memory" },
        { new LakeException("p", "q", "r"), 6, "p: q; r" },
        { new AggregateException(new OperationCanceledException(), new InputException("n.csv", null, "bad", "mend")), 3,
            "n.csv: bad; mend" },
        { new OperationCanceledException("not by the user"), 1, "a fault of ours (OperationCanceledException)" },
    };

    [Theory]
    [MemberData(nameof(Failures))]
    public void A_failure_in_the_middle_leaves_nothing_and_one_line(Exception failure, int exit, string line)
    {
        using Place place = new();
        Directory.CreateDirectory(place.Lake);
        CliResult result = CliRun.InProcess(new FakeEngine { FailAfterLinks = failure }, place.Estimate());
        Assert.Equal(exit, result.Exit);
        Assert.Contains(line, Assert.Single(result.Messages));
        Assert.Empty(place.LakeContent());
        Assert.DoesNotContain("   at ScaleResist.", result.Error);
        foreach (bool byEnvironment in (bool[])[false, true])
        {
            CliResult traced = CliRun.InProcess(new FakeEngine { FailAfterLinks = failure },
                byEnvironment ? place.Estimate() : place.Estimate("a", "--verbose"), trace: byEnvironment);
            Assert.Equal(exit, traced.Exit);
            Assert.Contains("   at ScaleResist.", traced.Error);
        }
    }

    [Fact]
    public void An_interruption_is_exit_5_and_leaves_nothing()
    {
        using Place place = new();
        using CancellationTokenSource source = new();
        FakeEngine engine = new()
        {
            AfterBatch = token =>
            {
                source.Cancel();
                token.ThrowIfCancellationRequested();
            },
        };
        CliResult result = CliRun.InProcess(engine, place.Estimate(), source.Token);
        Assert.Equal(5, result.Exit);
        string line = Assert.Single(result.Messages);
        Assert.Contains("nothing was published; the same command starts the run again", line);
        Assert.False(Directory.Exists(place.Lake));
    }

    [Fact]
    public void A_reader_that_polls_never_sees_part_of_a_run()
    {
        using Place place = new();
        int polls = 0;
        FakeEngine engine = new()
        {
            Links = 400,
            BatchRows = 100,
            AfterBatch = _ =>
            {
                Assert.Empty(Directory.GetDirectories(place.Lake, "run=*"));
                Assert.Throws<DuckDB.NET.Data.DuckDBException>(() =>
                    DuckLake.Query($"FROM {DuckLake.Table(place.Lake, "links")}"));
                polls++;
            },
        };
        Assert.Equal(0, CliRun.InProcess(engine, place.Estimate()).Exit);
        Assert.Equal(4, polls);
        Assert.Equal(400L, DuckLake.Query($"SELECT count(*) FROM {DuckLake.Table(place.Lake, "links")}")[0][0]);
        Assert.Equal(["run=a"], Directory.GetFileSystemEntries(place.Lake).Select(Path.GetFileName));
    }

    [Fact]
    public async Task A_reader_beside_a_run_sees_all_of_it_or_nothing()
    {
        using Place place = new();
        FakeEngine engine = new() { Links = 3000, BatchRows = 100, AfterBatch = _ => Thread.Sleep(3) };
        Task<CliResult> run = Task.Run(() => CliRun.InProcess(engine, place.Estimate()));
        bool visible = false;
        while (!run.IsCompleted || !visible)
        {
            if (!Directory.Exists(place.Run("a")))
            {
                Assert.False(run.IsCompleted && (await run).Exit != 0, "the run failed");
                continue;
            }
            visible = true;
            Assert.True(File.Exists(Path.Combine(place.Run("a"), "_SUCCESS")));
            Assert.Equal(3000L, DuckLake.Query($"SELECT count(*) FROM {DuckLake.Table(place.Lake, "links")}")[0][0]);
        }
        Assert.Equal(0, (await run).Exit);
    }

    [Fact]
    public async Task Of_two_commands_with_one_run_id_exactly_one_works()
    {
        using Place place = new();
        using ManualResetEventSlim second = new();
        FakeEngine slow = new() { AfterBatch = _ => second.Wait(TimeSpan.FromSeconds(20)) };
        Task<CliResult> first = Task.Run(() => CliRun.InProcess(slow, place.Estimate()));
        while (slow.Runs == 0)
            await Task.Delay(5);
        FakeEngine idle = new();
        CliResult refused = CliRun.InProcess(idle, place.Estimate());
        second.Set();
        Assert.Equal(6, refused.Exit);
        Assert.Contains($"run 'a' is being written by process {Environment.ProcessId}", Assert.Single(refused.ErrorLines));
        Assert.Equal(0, idle.Runs);
        Assert.Equal(0, (await first).Exit);
    }

    [Fact]
    public void A_lake_that_cannot_be_made_is_exit_6_before_anything_is_computed()
    {
        using Place place = new();
        foreach (string lake in (string[])[place.Network, Path.Combine(place.Network, "lake"), "/proc/scaleresist-lake"])
        {
            FakeEngine engine = new();
            CliResult result = CliRun.InProcess(engine, ["estimate", place.Network, "--lake", lake]);
            Assert.Equal(6, result.Exit);
            string line = Assert.Single(result.ErrorLines);
            Assert.Contains(lake, line);
            Assert.Contains("; ", line);
            Assert.Equal(0, engine.Runs);
        }
    }

    [Fact]
    public void A_staging_folder_that_vanishes_is_exit_6()
    {
        using Place place = new();
        FakeEngine engine = new()
        {
            AfterBatch = _ => Directory.Delete(Path.Combine(place.Lake, "_staging", "run=a"), recursive: true),
            BatchRows = 1000,
        };
        CliResult result = CliRun.InProcess(engine, place.Estimate());
        Assert.Equal(6, result.Exit);
        Assert.Contains("_staging", Assert.Single(result.Messages));
        Assert.Empty(place.LakeContent());
    }

    [Fact]
    public void Redirected_progress_is_one_timed_line_a_phase()
    {
        using Place place = new();
        CliResult result = CliRun.InProcess(new FakeEngine(), place.Estimate());
        Assert.Equal(2, result.ErrorLines.Length);
        Assert.Matches(@"^\[ +\d+\.\d s\] reading$", result.ErrorLines[0]);
        Assert.Matches(@"^\[ +\d+\.\d s\] solving 64 probes$", result.ErrorLines[1]);
    }
}
