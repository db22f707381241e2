// What an exact run was foreseen to take, beside what it took, each run a process of its own. Its time is the least of two runs: other work on the
// machine only ever adds.

using System.Text.Json;
using ScaleResist.DataGen.Files;
using ScaleResist.DataGen.Networks;
using ScaleResist.Tests.Cli;

namespace ScaleResist.Tests.EndToEnd;

public sealed class Forecasts
{
    [Theory]
    [Trait("Category", "Slow")]
    [InlineData(Family.Grid, 100_000)]
    [InlineData(Family.Torus, 100_000)]
    [InlineData(Family.Road, 100_000)]
    [InlineData(Family.Ladder, 100_000)]
    [InlineData(Family.Fringe, 100_000)]
    [InlineData(Family.Cycle, 100_000)]
    [InlineData(Family.Cube, 64_000)]
    [InlineData(Family.Preferential, 10_000)]
    [InlineData(Family.Grid, 1_000_000)]
    [InlineData(Family.Road, 1_000_000)]
    public void Exact_runs_take_what_was_foreseen_within_a_factor_of_two(Family family, int nodes)
    {
        using Place place = new();
        string network = Path.Combine(place.Folder, "network.tsv");
        Assert.True(LinkForm.TryOf(network, out LinkForm form));
        LinkFile.Write(new FamilyPlan(family, nodes), form, network, default);
        double seconds = double.PositiveInfinity;
        foreach (string id in (string[])["a", "b"])
        {
            CliResult result = CliRun.Finish(
                CliRun.Start(fake: false, ["estimate", network, "--lake", place.Lake, "--run-id", id, "--route", "exact", "--threads", "2"]));
            Assert.True(result.Exit == 0, result.Error);
            using JsonDocument record = JsonDocument.Parse(File.ReadAllText(Path.Combine(place.Run(id), "run.json")));
            JsonElement exact = record.RootElement.GetProperty("exact");
            double bytes = record.RootElement.GetProperty("peak_resident_bytes").GetDouble();
            Assert.InRange(exact.GetProperty("forecast_bytes").GetDouble() / bytes, 0.5, 2);
            seconds = Math.Min(seconds, exact.GetProperty("seconds").GetDouble());
            if (id == "b")
                Assert.InRange(exact.GetProperty("forecast_seconds").GetDouble() / seconds, 0.5, 2);
        }
    }
}
