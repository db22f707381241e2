// --want limits what is written and what is computed.

using System.Text.Json;
using ScaleResist.Tests.Cli;

namespace ScaleResist.Tests.EndToEnd;

public sealed class Wanted_tables
{
    // The sample has three components, and a probe counts once in each: 48; links have as many on the nodes, for their losses. The 16 links and pairs of
    // an audit count once, and so do the 15 blocks of 8 in which the weakest cut is found.
    [Theory]
    [InlineData("components", null, "finding bridges,writing components")]
    [InlineData("links", 112, "finding bridges,choosing a route,preparing,solving,solving an audit,writing links,writing audit")]
    [InlineData("nodes", 48, "finding bridges,choosing a route,preparing,solving,checking,writing nodes")]
    [InlineData("coordinates", 48, "finding bridges,choosing a route,preparing,solving,checking,writing coordinates")]
    [InlineData("pairs", 64, "finding bridges,choosing a route,preparing,solving,solving an audit,checking,writing pairs,writing audit")]
    [InlineData("index", 168, "finding bridges,choosing a route,preparing,solving,finding the weakest cut,checking,writing index")]
    [InlineData("index,links", 232, "finding bridges,choosing a route,preparing,solving,solving an audit,finding the weakest cut,writing links,writing index,writing audit")]
    public void Only_the_wanted_tables_are_computed_and_written(string want, int? columns, string phases)
    {
        using Place place = new();
        string[] pairs = want == "pairs" ? ["--pairs", Command.Sample("pairs.csv")] : [];
        Command.Succeed(Command.Sample("links.csv"), place.Lake,
            ["--run-id", "a", "--weights", "conductance", "--probes", "16", "--want", want, .. pairs]);
        string[] tables = [.. want.Split(','), .. want.Contains("links") || want == "pairs" ? ["audit"] : Array.Empty<string>()];
        Assert.Equal(tables.Order(), Directory.GetDirectories(place.Run("a")).Select(Path.GetFileName).Order());
        Assert.Equal(["_SUCCESS", "report.html", "run.json"], Directory.GetFiles(place.Run("a")).Select(Path.GetFileName).Order());
        Assert.Equal(["run=a"], Directory.GetFileSystemEntries(place.Lake).Select(Path.GetFileName));

        using JsonDocument json = JsonDocument.Parse(File.ReadAllBytes(Path.Combine(place.Run("a"), "run.json")));
        JsonElement record = json.RootElement;
        Assert.Equal(tables.Order(), record.GetProperty("rows").EnumerateObject().Select(table => table.Name).Order());
        Assert.Equal(["reading", "building", .. phases.Split(',')],
            record.GetProperty("phases").EnumerateArray().Select(phase => phase.GetProperty("name").GetString()));
        JsonElement solver = record.GetProperty("solver");
        Assert.Equal(columns, solver.ValueKind == JsonValueKind.Null ? null : solver.GetProperty("columns").GetInt32());
        Assert.Equal(columns is not null, record.GetProperty("foster").ValueKind == JsonValueKind.Object);
    }
}
