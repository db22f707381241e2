// The verb `distances` on the sample scenario, its tables as DuckDB reads them, and what it refuses.

using ScaleResist.Cli;
using ScaleResist.Tests.Cli;
using ScaleResist.Tests.Lake;

namespace ScaleResist.Tests.EndToEnd;

public sealed class Distances_command
{
    private static CliResult Run(string network, string lake, params string[] more) =>
        CliRun.InProcess(new LibraryEngine(), ["distances", network, "--lake", lake, .. more]);

    private static CliResult Succeed(string network, string lake, params string[] more)
    {
        CliResult result = Run(network, lake, more);
        Assert.True(result.Exit == 0, result.Error);
        Assert.Empty(result.Messages);
        return result;
    }

    [Fact]
    public void Tables_have_the_contracts_columns_and_join()
    {
        using Place place = new();
        string network = Command.Sample("links.csv"), pairs = Command.Sample("pairs.csv");
        Command.Succeed(network, place.Lake, "--run-id", "base", "--weights", "conductance", "--pairs", pairs, "--want", "pairs");
        string[] command =
        [
            "--run-id", "d", "--node-weights", Command.Sample("sites.csv"), "--pairs", pairs, "--beside", "base",
            "--want", "eccentricity,summary,profile",
        ];
        CliResult result = Succeed(network, place.Lake, command);
        Assert.Contains("weights of the nodes entered", result.Out);
        Assert.Contains("already done", Succeed(network, place.Lake, command).Out);
        Assert.Contains("other content in --node-weights",
            Command.Refused(Run(network, place.Lake, "--run-id", "d", "--pairs", pairs, "--beside", "base", "--want", "eccentricity,summary,profile"), 2));

        Columns("distance_pairs", "source VARCHAR, target VARCHAR, distance DOUBLE, resistance DOUBLE, ratio DOUBLE");
        Columns("eccentricity", "node VARCHAR, component_id BIGINT, eccentricity DOUBLE, farthest VARCHAR");
        Columns("distance_summary", """
            component_id BIGINT, nodes BIGINT, diameter DOUBLE, radius DOUBLE, centre VARCHAR, periphery_source VARCHAR,
            periphery_target VARCHAR, wiener_index DOUBLE, wiener_index_se DOUBLE, wiener_index_lower DOUBLE,
            wiener_index_upper DOUBLE, node_weighted_wiener_index DOUBLE, mean_distance DOUBLE, sources BIGINT
            """);
        Columns("distance_profile",
            "component_id BIGINT, distance DOUBLE, pairs_within DOUBLE, share_within DOUBLE, share_se DOUBLE");

        // The resistances are the base run's, and the two pairs between components are infinitely far apart.
        Assert.Equal((40L, 40L, 2L, 38L), DuckLake.Query($"""
            SELECT count(*), count(*) FILTER (d.resistance = b.resistance), count(*) FILTER (isinf(d.distance) AND d.ratio IS NULL),
                count(*) FILTER (d.ratio = b.resistance / d.distance)
            FROM {Table("distance_pairs")} d JOIN {Table("pairs")} b USING (source, target)
            """).Select(r => ((long)r[0]!, (long)r[1]!, (long)r[2]!, (long)r[3]!)).Single());
        Assert.Empty(DuckLake.Query($"""
            SELECT * FROM {Table("distance_summary")} s
            JOIN (SELECT component_id, count(*) AS nodes, max(eccentricity) AS diameter, min(eccentricity) AS radius,
                min(node) FILTER (eccentricity = least) AS centre
                FROM (SELECT *, min(eccentricity) OVER (PARTITION BY component_id) AS least FROM {Table("eccentricity")}) GROUP BY component_id) e
            USING (component_id)
            WHERE s.nodes <> e.nodes OR s.diameter <> e.diameter OR s.radius <> e.radius OR s.centre <> e.centre
            """));
        Assert.Equal([3133L, 12L, 9L], DuckLake.Query($"SELECT nodes FROM {Table("distance_summary")} ORDER BY component_id").Select(r => (long)r[0]!));
        // The last step holds all pairs.
        Assert.Equal([1.0, 1.0, 1.0],
            DuckLake.Query($"SELECT max(share_within) FROM {Table("distance_profile")} GROUP BY component_id").Select(r => (double)r[0]!));

        string Table(string name) => DuckLake.Table(place.Lake, name);

        void Columns(string table, string columns) => Assert.Equal(
            [.. columns.Replace('\n', ' ').Split(',', StringSplitOptions.TrimEntries), "run VARCHAR"],
            DuckLake.Query($"DESCRIBE SELECT * FROM {Table(table)}").Select(d => $"{d[0]} {d[1]}"));
    }

    [Fact]
    public void On_a_tree_distance_and_resistance_are_one()
    {
        using Place place = new();
        string pairs = Path.Combine(place.Folder, "pairs.csv");
        File.WriteAllText(place.Network, "from,to\n1,2\n2,3\n2,4\n4,5\n");
        File.WriteAllText(pairs, "a,b\n1,5\n3,4\n5,5\n");
        Command.Succeed(place.Network, place.Lake, "--run-id", "r", "--pairs", pairs);
        Succeed(place.Network, place.Lake, "--run-id", "d", "--pairs", pairs, "--beside", "r", "--want", "pairs");
        Assert.Equal([3.0, 1.0, 2.0, 1.0, 0.0, null], DuckLake.Query($"SELECT distance, ratio FROM {DuckLake.Table(place.Lake, "distance_pairs")}")
            .SelectMany(r => r));
    }

    [Fact]
    public void Lengths_add_and_sources_limit_the_rows()
    {
        using Place place = new();
        string sources = Path.Combine(place.Folder, "sources.csv");
        File.WriteAllText(place.Network, "from,to,km\n1,2,1.5\n2,3,2\n3,1,9\n");
        File.WriteAllText(sources, "site\n3\n");
        Succeed(place.Network, place.Lake, "--run-id", "d", "--lengths", "--sources", sources);
        Assert.Equal([3L, 0L, 3.5, 1L], DuckLake.Query($"SELECT * EXCLUDE (run) FROM {DuckLake.Table(place.Lake, "eccentricity")}").Single());
        // The two pairs that touch the source: 2 and 3.5.
        Assert.Equal([5.5, 2.75], DuckLake.Query($"SELECT wiener_index, mean_distance FROM {DuckLake.Table(place.Lake, "distance_summary")}").Single());
    }

    [Theory]
    [InlineData("1,2,-1\n", new[] { "--lengths" }, "grid.csv:1: the length -1")]
    [InlineData("1,2,NaN\n", new[] { "--lengths" }, "grid.csv:1: the length NaN")]
    [InlineData("1,2\n", new[] { "--lengths" }, "grid.csv:1: ")]
    [InlineData("1,2\n", new[] { "--node-weights", "negative.csv" }, "negative.csv:2: the weight -3")]
    [InlineData("1,2\n", new[] { "--node-weights", "short.csv" }, "short.csv: 1 nodes of the network have no weight")]
    [InlineData("1,2\n", new[] { "--node-weights", "huge.csv" }, "huge.csv: the weights add up to more than")]
    [InlineData("1,2\n", new[] { "--sources", "short.csv", "--pairs", "none.csv" }, "none.csv: no such file")]
    [InlineData("1,2\n", new[] { "--pairs", "pairs.csv", "--beside", "none" }, "no finished run is there")]
    public void Bad_input_is_refused_in_one_line(string links, string[] options, string part)
    {
        using Place place = new();
        File.WriteAllText(place.Network, links);
        File.WriteAllText(Path.Combine(place.Folder, "negative.csv"), "1,1\n2,-3\n");
        File.WriteAllText(Path.Combine(place.Folder, "short.csv"), "1,1\n");
        File.WriteAllText(Path.Combine(place.Folder, "huge.csv"), "1,1e300\n2,1\n");
        File.WriteAllText(Path.Combine(place.Folder, "pairs.csv"), "1,2\n");
        string[] named = [.. options.Select(o => o.EndsWith(".csv", StringComparison.Ordinal) ? Path.Combine(place.Folder, o) : o)];
        Assert.Contains(part, Command.Refused(Run(place.Network, place.Lake, named), 3));
        Assert.DoesNotContain(place.LakeContent(), entry => entry.StartsWith("run=", StringComparison.Ordinal));
    }
}
