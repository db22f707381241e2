// The command as a user starts it, with labels, parts and pairs of the user's own: they come back, and are known again.

using ScaleResist.Tests.Cli;
using ScaleResist.Tests.Lake;

namespace ScaleResist.Tests.EndToEnd;

public sealed class Whole_command
{
    [Fact]
    public void Text_ids_and_pairs_come_back_as_they_came()
    {
        using Place place = new();
        File.WriteAllText(place.Network, "from,to,ohm\n\"Øst, by\",007,2\n007,C,4\nX,\"Y \"\"q\"\"\",1\n");
        string pairs = Path.Combine(place.Folder, "pairs.csv");
        File.WriteAllText(pairs, "from,to\nC,\"Øst, by\"\nC,X\n");
        string weights = Path.Combine(place.Folder, "weights.csv");
        File.WriteAllText(weights, "node,people\n\"Øst, by\",1\n007,0\nC,2\nX,0\n\"Y \"\"q\"\"\",5\n");
        Command.Succeed(place.Network, place.Lake, "--run-id", "a", "--weights", "resistance", "--pairs", pairs,
            "--node-weights", weights);
        List<object?[]> rows = DuckLake.Query($"SELECT source, target, resistance FROM {DuckLake.Table(place.Lake, "pairs")}");
        Assert.Equal(["C", "Øst, by"], rows[0][..2]);
        Assert.Equal(["C", "X", double.PositiveInfinity], rows[1]);
        // Bridges in a row, of known resistance: 2 and 4, and 1 in the other component.
        Assert.Equal([2.0, 4.0, 1.0], Column("resistance", "links", "component_id, conductance DESC").Cast<double>());
        Assert.Equal(["007", "C", "X", "Y \"q\"", "Øst, by"], Column("node", "nodes", "node"));
        Assert.DoesNotContain(null, Column("node_weighted_kirchhoff_index", "index", "component_id"));

        IEnumerable<object?> Column(string column, string table, string order) =>
            DuckLake.Query($"SELECT {column} FROM {DuckLake.Table(place.Lake, table)} ORDER BY {order}").Select(r => r[0]);
    }

    [Fact]
    public void A_folder_of_parquet_parts_is_known_again()
    {
        using Place place = new();
        string network = Path.Combine(place.Folder, "parts");
        Directory.CreateDirectory(network);
        DuckLake.Query($"COPY (SELECT i AS a, i + 1 AS b FROM range(50) t(i)) TO '{network}/b.parquet'");
        DuckLake.Query($"COPY (SELECT i AS a, i + 7 AS b FROM range(50) t(i)) TO '{network}/a.parquet'");
        File.WriteAllText(Path.Combine(network, "_unfinished.parquet"), "x");
        Command.Succeed(network, place.Lake, "--run-id", "a");
        Assert.Contains("already done", Command.Succeed(network, place.Lake, "--run-id", "a").Out);
        DuckLake.Query($"COPY (SELECT i AS a, i + 9 AS b FROM range(50) t(i)) TO '{network}/a.parquet'");
        string refusal = Command.Refused(Command.Estimate(network, place.Lake, "--run-id", "a"), 2);
        Assert.Contains("a network of other content", refusal);
    }

    [Fact]
    public void The_true_program_ends_well_and_tells_where_the_tables_are()
    {
        using Place place = new();
        CliResult result = CliRun.Finish(CliRun.Start(fake: false,
            ["estimate", TestData.Path("power.tsv"), "--lake", place.Lake, "--run-id", "a"]));
        Assert.True(result.Exit == 0, result.Error);
        Assert.Contains("4,941 nodes, 6,594 links", result.Out);
        Assert.Contains(place.Run("a"), result.Out);
        Assert.True(File.Exists(Path.Combine(place.Run("a"), "_SUCCESS")));
    }
}
