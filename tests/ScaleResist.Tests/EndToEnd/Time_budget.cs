// A time budget from the command line: the run ends in time, with as many probes as fitted, and says what ended them.

using System.Diagnostics;
using System.Text.Json;
using ScaleResist.DataGen.Networks;
using ScaleResist.Tests.Cli;

namespace ScaleResist.Tests.EndToEnd;

public sealed class Time_budget
{
    [Theory]
    [Trait("Category", "Slow")]
    [InlineData("probes", 32, 32, "--probes", "32")] // a probe of links has its like on the nodes, for losses
    [InlineData("time", 64, 4095)]
    [InlineData("time", 64, 4095, "--target-error", "0.0001")]
    public void A_hundred_thousand_links_end_in_five_seconds(string stoppedBy, int least, int most, params string[] more)
    {
        using Place place = new();
        string network = Path.Combine(place.Folder, "grid.tsv");
        using (StreamWriter writer = new(network))
            NetworkGenerator.Generate(new FamilyPlan(Family.Grid, 50_000, null, 1, 0), new Lines(writer));
        long begin = Stopwatch.GetTimestamp();
        CliResult result = Command.Succeed(network, place.Lake, ["--run-id", "a", "--route", "probe", "--time-budget", "5s", .. more]);
        Assert.InRange(Stopwatch.GetElapsedTime(begin).TotalSeconds, 0, 6.5); // 5.5, and the noise of a shared machine
        using JsonDocument json = JsonDocument.Parse(File.ReadAllBytes(Path.Combine(place.Run("a"), "run.json")));
        JsonElement probing = json.RootElement.GetProperty("probing");
        Assert.Equal(stoppedBy, probing.GetProperty("stopped_by").GetString());
        Assert.InRange(probing.GetProperty("probes").GetInt32(), least, most);
        Assert.Contains($"stopped by {stoppedBy}", result.Out);
    }

    [Fact]
    public void Exit_4_where_not_even_one_panel_fits()
    {
        using Place place = new();
        string line = Command.Refused(Command.Estimate(Command.Sample("links.csv"), place.Lake, "--weights", "conductance", "--route", "probe",
            "--time-budget", "0.001s"), 4);
        Assert.Contains("--time-budget", line);
    }

    [Fact]
    public void A_target_is_in_the_record_and_in_the_plan_that_a_second_call_is_compared_with()
    {
        using Place place = new();
        string[] command = ["--run-id", "a", "--weights", "conductance", "--route", "probe", "--want", "links", "--target-error"];
        CliResult result = Command.Succeed(Command.Sample("links.csv"), place.Lake, [.. command, "0.03"]);
        Assert.Contains("stopped by target", result.Out);
        using JsonDocument json = JsonDocument.Parse(File.ReadAllBytes(Path.Combine(place.Run("a"), "run.json")));
        Assert.Equal(0.03, json.RootElement.GetProperty("plan").GetProperty("target_error").GetDouble());
        Assert.InRange(json.RootElement.GetProperty("probing").GetProperty("relative_standard_error").GetDouble(), 0, 0.03);
        Assert.InRange(json.RootElement.GetProperty("audit").GetProperty("share_held").GetDouble(), 0.5, 1);
        Assert.Contains("already done", Command.Succeed(Command.Sample("links.csv"), place.Lake, [.. command, "0.03"]).Out);
        Assert.Contains("--target-error 0.03, not 0.02", Command.Refused(Command.Estimate(Command.Sample("links.csv"), place.Lake, [.. command, "0.02"]), 2));
    }

    [Fact]
    public void Error_bars_that_an_audit_refutes_are_the_last_line_of_the_summary()
    {
        using Place place = new();
        CliResult sound = CliRun.InProcess(new FakeEngine { Audit = FakeEngine.AuditOf(15, null) }, place.Estimate("a"));
        CliResult broken = CliRun.InProcess(new FakeEngine { Audit = FakeEngine.AuditOf(6, "3 of 8 lie within") }, place.Estimate("b"));
        Assert.Equal((0, 0), (sound.Exit, broken.Exit));
        Assert.DoesNotContain("warning", sound.Out);
        Assert.StartsWith("warning    3 of 8 lie within; do not trust", broken.Out.TrimEnd().Split('\n')[^1]);
        Assert.Contains("15 of 16 intervals held", sound.Out);
    }

    private sealed class Lines(StreamWriter writer) : ILinkSink
    {
        public void Link(long source, long target, double conductance) => writer.WriteLine($"{source}\t{target}");
    }
}
