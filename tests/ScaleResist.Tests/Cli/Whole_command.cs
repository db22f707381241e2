// The command with the library behind it: real networks in, tables out, as a user of the lake meets them.

using System.IO.Compression;
using System.Text;
using ScaleResist.Cli;
using ScaleResist.Tests.Lake;

namespace ScaleResist.Tests.Cli;

public sealed class Whole_command
{
    private static CliResult Run(params string[] args) => CliRun.InProcess(new LibraryEngine(), ["estimate", .. args]);

    private static void Works(params string[] args)
    {
        CliResult result = Run(args);
        Assert.True(result.Exit == 0, result.Error);
    }

    [Fact]
    public void Links_join_their_nodes_over_two_runs()
    {
        using Place place = new();
        Works(TestData.Path("karate.tsv"), "--lake", place.Lake, "--run-id", "first");
        Works(TestData.Path("karate.tsv"), "--lake", place.Lake, "--run-id", "second", "--seed", "2");
        List<object?[]> rows = DuckLake.Query($"""
            SELECT l.run, count(*), min(v.degree), bool_and(u.component_id = l.component_id AND v.component_id = l.component_id)
            FROM {DuckLake.Table(place.Lake, "links")} l
            JOIN {DuckLake.Table(place.Lake, "nodes")} u ON u.run = l.run AND u.node = l.source
            JOIN {DuckLake.Table(place.Lake, "nodes")} v ON v.run = l.run AND v.node = l.target
            GROUP BY l.run ORDER BY l.run
            """);
        Assert.Equal(["first", "second"], rows.Select(r => (string)r[0]!));
        Assert.All(rows, r => Assert.Equal((78L, 1L, true), ((long)r[1]!, (long)r[2]!, (bool)r[3]!)));
    }

    [Fact]
    public void The_coordinates_formula_gives_the_pairs_resistances_within_their_error()
    {
        using Place place = new();
        string pairs = Path.Combine(place.Folder, "pairs.csv");
        File.WriteAllLines(pairs, ["from,to", .. Enumerable.Range(1, 33).Select(v => $"0,{v}")]);
        Works(TestData.Path("karate.tsv"), "--lake", place.Lake, "--run-id", "a", "--want", "coordinates,links", "--pairs", pairs,
            "--probes", "256");
        List<object?[]> rows = DuckLake.Query($"""
            SELECT p.resistance, p.resistance_se,
                1 / u.strength + 1 / v.strength - 2 * coalesce(l.conductance, 0) / (u.strength * v.strength)
                + list_distance(u.r, v.r) ** 2 / len(u.r)
            FROM {DuckLake.Table(place.Lake, "pairs")} p
            JOIN {DuckLake.Table(place.Lake, "coordinates")} u ON u.node = p.source
            JOIN {DuckLake.Table(place.Lake, "coordinates")} v ON v.node = p.target
            LEFT JOIN {DuckLake.Table(place.Lake, "links")} l
                ON l.source = least(p.source, p.target) AND l.target = greatest(p.source, p.target)
            """);
        Assert.Equal(33, rows.Count);
        // Pairs over bridges are exact in their table; the coordinates are not.
        rows.RemoveAll(r => (double)r[1]! == 0);
        Assert.True(rows.Count > 25);
        Assert.All(rows, r =>
            Assert.InRange((double)r[2]!, (double)r[0]! - (4 * (double)r[1]!), (double)r[0]! + (4 * (double)r[1]!)));
    }

    [Fact]
    public void Text_ids_and_pairs_come_back_as_they_came()
    {
        using Place place = new();
        string network = Path.Combine(place.Folder, "towns.csv");
        File.WriteAllText(network, "from,to,ohm\n\"Øst, by\",007,2\n007,C,4\nX,\"Y \"\"q\"\"\",1\n");
        string pairs = Path.Combine(place.Folder, "pairs.csv");
        File.WriteAllText(pairs, "from,to\nC,\"Øst, by\"\nC,X\n");
        string weights = Path.Combine(place.Folder, "weights.csv");
        File.WriteAllText(weights, "node,people\n\"Øst, by\",1\n007,0\nC,2\nX,0\n\"Y \"\"q\"\"\",5\n");
        Works(network, "--lake", place.Lake, "--run-id", "a", "--weights", "resistance", "--pairs", pairs,
            "--node-weights", weights);
        List<object?[]> rows = DuckLake.Query($"SELECT source, target, resistance FROM {DuckLake.Table(place.Lake, "pairs")}");
        Assert.Equal(["C", "Øst, by"], rows[0][..2]);
        Assert.Equal(["C", "X"], rows[1][..2]);
        // Bridges in a row: 2 + 4 ohms, exactly known; another component is infinitely far.
        Assert.Equal(double.PositiveInfinity, rows[1][2]);
        Assert.Equal([2.0, 4.0, 1.0], Column("resistance", "links", "component_id, conductance DESC").Cast<double>());
        Assert.Equal(["007", "C", "X", "Y \"q\"", "Øst, by"], Column("node", "nodes", "node"));
        Assert.DoesNotContain(null, Column("node_weighted_kirchhoff_index", "index", "component_id"));

        IEnumerable<object?> Column(string column, string table, string order) =>
            DuckLake.Query($"SELECT {column} FROM {DuckLake.Table(place.Lake, table)} ORDER BY {order}").Select(r => r[0]);
    }

    [Fact]
    public void Threads_change_no_byte_of_any_table()
    {
        using Place place = new();
        string[] lakes = [Path.Combine(place.Folder, "one"), Path.Combine(place.Folder, "two")];
        for (int i = 0; i < 2; i++)
        {
            Works(TestData.Path("netscience.tsv"), "--lake", lakes[i], "--run-id", "a", "--weights", "conductance",
                "--want", "index,components,nodes,links,coordinates", "--threads", $"{i + 1}");
        }
        string[] parts = [.. Directory.GetFiles(lakes[0], "*.parquet", SearchOption.AllDirectories)
            .Select(f => Path.GetRelativePath(lakes[0], f))];
        Assert.Equal(5, parts.Length);
        Assert.All(parts, p =>
            Assert.Equal(File.ReadAllBytes(Path.Combine(lakes[0], p)), File.ReadAllBytes(Path.Combine(lakes[1], p))));
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
        Works(network, "--lake", place.Lake, "--run-id", "a");
        Assert.Contains("already done", Run(network, "--lake", place.Lake, "--run-id", "a").Out);
        DuckLake.Query($"COPY (SELECT i AS a, i + 9 AS b FROM range(50) t(i)) TO '{network}/a.parquet'");
        CliResult other = Run(network, "--lake", place.Lake, "--run-id", "a");
        Assert.Equal(2, other.Exit);
        Assert.Contains("a network of other content", other.Error);
    }

    public static TheoryData<string, byte[]?, string[], string> BadInputs => new()
    {
        { "none.csv", null, [], "none.csv" },
        { "empty.csv", [], [], "empty.csv" },
        { "unsaid.csv", "1,2,3\n"u8.ToArray(), [], "--weights resistance" },
        { "weight.csv", "1,2,3\n2,3,-1\n"u8.ToArray(), ["--weights", "conductance"], "weight.csv:2: " },
        { "short.csv", "a,b\n1,2\n3\n"u8.ToArray(), [], "short.csv:3: " },
        { "utf8.csv", [(byte)'a', (byte)',', 0xff, (byte)'\n'], [], "utf8.csv" },
        { "loops.csv", "1,1\n2,2\n"u8.ToArray(), [], "loops.csv" },
        { "column.csv", "a,b\n1,2\n"u8.ToArray(), ["--columns", "a,c"], "'c'" },
        { "text.parquet", "1,2\n"u8.ToArray(), [], "text.parquet" },
        { "cut.csv.gz", Cut(Gzip(5000)), [], "cut.csv.gz" },
    };

    [Theory]
    [MemberData(nameof(BadInputs))]
    public void Bad_input_is_exit_3_one_line_and_nothing_in_the_lake(string name, byte[]? content, string[] options, string part)
    {
        using Place place = new();
        string network = Path.Combine(place.Folder, name);
        if (content is not null)
            File.WriteAllBytes(network, content);
        CliResult result = Run([network, "--lake", place.Lake, .. options]);
        Assert.Equal(3, result.Exit);
        string line = Assert.Single(result.Messages);
        Assert.Contains(part, line);
        Assert.Contains("; ", line);
        Assert.False(Directory.Exists(place.Lake));
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

    private static byte[] Gzip(int links)
    {
        MemoryStream packed = new();
        using (GZipStream zip = new(packed, CompressionLevel.Fastest))
            zip.Write(Encoding.ASCII.GetBytes(
                string.Concat(Enumerable.Range(0, links).Select(i => $"{i},{i * 7919 % links}\n"))));
        return packed.ToArray();
    }

    private static byte[] Cut(byte[] whole) => whole[..(whole.Length / 2)];
}
