// The route without error bars as a user meets it: chosen by itself where it fits, refused with figures where it does not, foretold by `survey`.

using System.Text.Json;
using ScaleResist.Tests.Cli;
using ScaleResist.Tests.Lake;

namespace ScaleResist.Tests.EndToEnd;

public sealed class Exact_route
{
    [Fact]
    public void The_sample_is_exact_unless_probes_are_asked_for()
    {
        using Place place = new();
        string[] common = ["--weights", "conductance", "--pairs", Command.Sample("pairs.csv"), "--node-weights", Command.Sample("sites.csv")];
        Command.Succeed(Command.Sample("links.csv"), place.Lake, ["--run-id", "exact", .. common]);
        Command.Succeed(Command.Sample("links.csv"), place.Lake, ["--run-id", "probed", "--probes", "64", .. common]);
        foreach (string table in (string[])["links", "nodes", "pairs", "index"])
        {
            List<object?[]> methods = DuckLake.Query($"SELECT DISTINCT method FROM '{place.Run("exact")}/{table}/*.parquet' ORDER BY 1");
            Assert.All(methods, r => Assert.Contains((string)r[0]!, (string[])["bridge", "exact"]));
        }
        Assert.Equal(0.0, DuckLake.Query($"""
            SELECT (SELECT max(resistance_se) FROM '{place.Run("exact")}/links/*.parquet')
                + (SELECT max(resistance_se) FROM '{place.Run("exact")}/pairs/*.parquet')
                + (SELECT max(resistance_diagonal_se) FROM '{place.Run("exact")}/nodes/*.parquet')
                + (SELECT max(kirchhoff_index_se) FROM '{place.Run("exact")}/index/*.parquet')
            """)[0][0]);
        // Foster 1949: spanning probabilities sum to nodes less components.
        Assert.Equal(3154.0 - 3, (double)DuckLake.Query($"SELECT sum(spanning_probability) FROM '{place.Run("exact")}/links/*.parquet'")[0][0]!, 1e-6);
        // The probes' intervals hold the exact values: 95 % of the links that are probed, with room for those of one cut that stray together.
        object?[] held = DuckLake.Query($"""
            SELECT avg((e.resistance BETWEEN p.resistance_lower AND p.resistance_upper)::INT), count(*)
            FROM '{place.Run("exact")}/links/*.parquet' e JOIN '{place.Run("probed")}/links/*.parquet' p USING (source, target)
            WHERE p.method = 'probe'
            """)[0];
        Assert.InRange((double)held[0]!, 0.9, 0.99);
        Assert.True((long)held[1]! > 2000);
        using JsonDocument json = JsonDocument.Parse(File.ReadAllBytes(Path.Combine(place.Run("exact"), "run.json")));
        JsonElement exact = json.RootElement.GetProperty("exact");
        Assert.Equal(0, exact.GetProperty("probed_blocks").GetInt32());
        Assert.True(exact.GetProperty("forecast_seconds").GetDouble() > 0 && exact.GetProperty("seconds").GetDouble() > 0);
    }

    [Theory]
    [InlineData("--memory-budget", "1MB")]
    [InlineData("--time-budget", "0.0001s")]
    public void A_budget_that_is_too_small_is_refused_with_exit_4_and_leaves_nothing(string option, string value)
    {
        using Place place = new();
        string line = Command.Refused(
            Command.Estimate(Command.Sample("links.csv"), place.Lake, "--weights", "conductance", "--route", "exact", option, value), 4);
        Assert.Contains("the exact route would take", line);
        Assert.Contains("GB", line);
        Assert.Empty(place.LakeContent());
    }

    [Fact]
    public void A_survey_says_what_is_there_and_what_it_would_take_and_writes_nothing()
    {
        using Place place = new();
        CliResult result = CliRun.InProcess(new ScaleResist.Cli.LibraryEngine(), ["survey", Command.Sample("links.csv"), "--weights", "conductance"]);
        Assert.Equal(0, result.Exit);
        Assert.Contains("3,154 nodes, 4,856 links", result.Out);
        foreach (string entry in (string[])["network", "cleaning", "components", "degrees", "blocks", "exact", "probe", "route"])
            Assert.Single(result.OutLines, line => line.StartsWith(entry + " ", StringComparison.Ordinal));
        Assert.Contains("--route auto is exact", result.Out);
        Assert.Empty(place.LakeContent());
    }
}
