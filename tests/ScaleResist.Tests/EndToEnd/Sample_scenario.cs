// The sample scenario under two run ids, all six tables, read by DuckDB by glob as the lake's users do.
// Invariant: names and types stand here as the contract has them, not as the code does; sums are made again from the csv.

using ScaleResist.Tests.Cli;
using ScaleResist.Tests.Lake;

namespace ScaleResist.Tests.EndToEnd;

/// <summary>Two nights of the sample: the seed is the only difference.</summary>
public sealed class TwoNights : IDisposable
{
    private readonly Place place = new();

    public TwoNights()
    {
        for (int night = 1; night <= 2; night++)
        {
            Command.Succeed(Command.Sample("links.csv"), Lake, "--run-id", $"night-{night}", "--seed", $"{night}",
                "--route", "probe", "--weights", "conductance", "--pairs", Command.Sample("pairs.csv"), "--node-weights", Command.Sample("sites.csv"),
                "--want", "index,components,nodes,links,pairs,coordinates");
        }
    }

    internal string Lake => place.Lake;

    public void Dispose() => place.Dispose();
}

public sealed class Sample_scenario(TwoNights nights) : IClassFixture<TwoNights>
{
    private const string Ends = "source VARCHAR, target VARCHAR";
    private const string Resistance =
        "resistance DOUBLE, resistance_se DOUBLE, resistance_lower DOUBLE, resistance_upper DOUBLE";

    private string Table(string name) => DuckLake.Table(nights.Lake, name);

    /// <summary>The links of a run in both directions.</summary>
    private string Arcs => $"""
        (SELECT run, source AS u, target AS v, conductance, component_id FROM {Table("links")}
         UNION ALL SELECT run, target, source, conductance, component_id FROM {Table("links")})
        """;

    /// <summary>The coordinates formula of the contract for the rows of a table with source and target.</summary>
    private string ByCoordinates(string table) => $"""
        (SELECT t.run, t.resistance, t.resistance_se, t.method, a.conductance, x.spread * sqrt(2 / x.k) AS coordinates_se,
            1 / p.strength + 1 / q.strength - 2 * coalesce(a.conductance, 0) / (p.strength * q.strength) + x.spread AS formula
         FROM {Table(table)} t
         JOIN {Table("coordinates")} p ON p.run = t.run AND p.node = t.source
         JOIN {Table("coordinates")} q ON q.run = t.run AND q.node = t.target
         JOIN {Table("components")} cp ON cp.run = t.run AND cp.node = t.source
         JOIN {Table("components")} cq ON cq.run = t.run AND cq.node = t.target
         LEFT JOIN {Arcs} a ON a.run = t.run AND a.u = t.source AND a.v = t.target,
         LATERAL (SELECT len(p.r) AS k, list_distance(p.r::DOUBLE[], q.r::DOUBLE[]) ** 2 / len(p.r) AS spread) x
         WHERE cp.component_id = cq.component_id)
        """;

    [Theory]
    [InlineData("index", 3, """
        component_id BIGINT, nodes BIGINT, links BIGINT, total_conductance DOUBLE,
        kirchhoff_index DOUBLE, kirchhoff_index_se DOUBLE, kirchhoff_index_lower DOUBLE, kirchhoff_index_upper DOUBLE,
        mean_resistance DOUBLE, degree_kirchhoff_index DOUBLE, kemeny_constant DOUBLE,
        node_weighted_kirchhoff_index DOUBLE, foster_sum DOUBLE, log_spanning_trees DOUBLE,
        algebraic_connectivity DOUBLE, method VARCHAR, probes BIGINT
        """)]
    [InlineData("components", 3154, "node VARCHAR, component_id BIGINT")]
    [InlineData("nodes", 3154, """
        node VARCHAR, component_id BIGINT, degree BIGINT, strength DOUBLE, resistance_diagonal DOUBLE,
        resistance_diagonal_se DOUBLE, total_resistance DOUBLE, closeness DOUBLE, closeness_rank BIGINT,
        rank_lower BIGINT, rank_upper BIGINT, method VARCHAR
        """)]
    [InlineData("links", 4856, $"""
        {Ends}, component_id BIGINT, conductance DOUBLE, {Resistance}, spanning_probability DOUBLE, is_bridge BOOLEAN,
        nodes_cut_off BIGINT, loss_impact DOUBLE, loss_impact_se DOUBLE, method VARCHAR
        """)]
    [InlineData("pairs", 40, $"{Ends}, {Resistance}, method VARCHAR")]
    [InlineData("coordinates", 3154, "node VARCHAR, strength DOUBLE, r FLOAT[]")]
    public void A_glob_over_both_nights_has_the_contracts_columns(string table, long rows, string columns)
    {
        IEnumerable<string> described = DuckLake.Query($"DESCRIBE SELECT * FROM {Table(table)}").Select(d => $"{d[0]} {d[1]}");
        Assert.Equal([.. columns.Replace('\n', ' ').Split(',', StringSplitOptions.TrimEntries), "run VARCHAR"], described);
        Assert.Equal([("night-1", rows), ("night-2", rows)],
            DuckLake.Query($"SELECT run, count(*) FROM {Table(table)} GROUP BY run ORDER BY run")
                .Select(r => ((string)r[0]!, (long)r[1]!)));
    }

    [Fact]
    public void Links_are_the_rows_of_the_file_after_cleaning()
    {
        List<object?[]> wrong = DuckLake.Query($"""
            WITH file AS (SELECT least(source, target) AS u, greatest(source, target) AS v, sum(conductance) AS conductance
                FROM read_csv('{Command.Sample("links.csv")}') WHERE source <> target GROUP BY ALL),
            lake AS (SELECT least(source, target) AS u, greatest(source, target) AS v, conductance
                FROM {Table("links")} WHERE run = 'night-2')
            SELECT * FROM file FULL JOIN lake USING (u, v)
            WHERE (abs(file.conductance - lake.conductance) > 1e-12 * lake.conductance) IS NOT FALSE
            """);
        Assert.Empty(wrong);
    }

    [Fact]
    public void Links_join_nodes_with_their_degrees_and_strengths()
    {
        List<object?[]> joined = DuckLake.Query($"""
            SELECT n.run, count(*), sum(a.links), bool_and(a.links = n.degree), max(abs(a.strength - n.strength) / n.strength),
                bool_and(a.least = n.component_id AND a.most = n.component_id)
            FROM {Table("nodes")} n
            JOIN (SELECT run, u, count(*) AS links, sum(conductance) AS strength,
                    min(component_id) AS least, max(component_id) AS most
                FROM {Arcs} GROUP BY run, u) a ON a.run = n.run AND a.u = n.node
            GROUP BY n.run ORDER BY n.run
            """);
        Assert.Equal(["night-1", "night-2"], joined.Select(r => (string)r[0]!));
        Assert.All(joined, r =>
        {
            Assert.Equal((3154L, 2 * 4856L), ((long)r[1]!, (long)(System.Numerics.BigInteger)r[2]!));
            Assert.True((bool)r[3]!);
            Assert.InRange((double)r[4]!, 0, 1e-12);
            Assert.True((bool)r[5]!);
        });
    }

    [Fact]
    public void The_largest_component_is_number_0_and_tables_agree_on_it()
    {
        Assert.Equal([(0L, 3133L), (1L, 12L), (2L, 9L)], DuckLake.Query($"""
            SELECT component_id, count(*) FROM {Table("components")} WHERE run = 'night-1' GROUP BY ALL ORDER BY ALL
            """).Select(r => ((long)r[0]!, (long)r[1]!)));
        Assert.Equal([(0L, 3133L, 4829L), (1L, 12L, 17L), (2L, 9L, 10L)], DuckLake.Query($"""
            SELECT component_id, nodes, links FROM {Table("index")} WHERE run = 'night-1' ORDER BY component_id
            """).Select(r => ((long)r[0]!, (long)r[1]!, (long)r[2]!)));
    }

    [Fact]
    public void Pairs_keep_their_order_and_are_infinitely_far_exactly_across_components()
    {
        List<object?[]> rows = DuckLake.Query($"""
            SELECT p.source, p.target, u.component_id <> v.component_id, isinf(p.resistance), p.resistance > 0,
                isinf(resistance_lower) AND isinf(resistance_upper), p.resistance_se, p.method
            FROM {Table("pairs")} p
            JOIN {Table("components")} u ON u.run = p.run AND u.node = p.source
            JOIN {Table("components")} v ON v.run = p.run AND v.node = p.target
            WHERE p.run = 'night-1' ORDER BY p.file_row_number
            """.Replace("hive_partitioning = true", "hive_partitioning = true, file_row_number = true"));
        Assert.Equal(File.ReadLines(Command.Sample("pairs.csv")).Skip(1), rows.Select(r => $"{r[0]},{r[1]}"));
        Assert.Equal(2, rows.Count(r => (bool)r[2]!));
        Assert.All(rows, r => Assert.Equal(((bool)r[2]!, true, (bool)r[2]!), ((bool)r[3]!, (bool)r[4]!, (bool)r[5]!)));
        Assert.All(rows.Where(r => (bool)r[2]!), r => Assert.Equal((0.0, "exact"), ((double)r[6]!, (string)r[7]!)));
    }

    [Fact]
    public void Few_pairs_are_solved_and_the_coordinates_formula_agrees_within_its_error()
    {
        List<object?[]> rows = DuckLake.Query($"""
            SELECT abs(formula - resistance) / coordinates_se, resistance_se, method FROM {ByCoordinates("pairs")} WHERE conductance IS NULL
            """);
        // Of the 40 pairs, 2 lie across components and 7 are joined by a link.
        Assert.Equal(2 * 31, rows.Count);
        Assert.All(rows, r => Assert.Equal((0.0, "solve"), ((double)r[1]!, (string)r[2]!)));
        // Long pairs share most of their way, and so their errors.
        Assert.InRange(rows.Count(r => (double)r[0]! <= 4), 60, 62);
    }

    [Fact]
    public void The_coordinates_formula_gives_the_resistance_of_links_within_both_errors()
    {
        // Bridges too: exact in their table, and a test of the formula. A few of so many may stray further.
        object?[] row = Assert.Single(DuckLake.Query($"""
            SELECT count(*), avg((abs(formula - resistance) <= 4 * (resistance_se + coordinates_se))::INT),
                avg((formula - resistance) / resistance)
            FROM {ByCoordinates("links")}
            """));
        Assert.Equal(2 * 4856L, row[0]);
        Assert.InRange((double)row[1]!, 0.99, 1);
        Assert.InRange((double)row[2]!, -0.02, 0.02);
    }

    [Fact]
    public void Two_seeds_agree_within_their_errors_and_exact_values_are_the_same()
    {
        // The two nights differ by the seed alone; a standard error that were too small would show here.
        object?[] row = Assert.Single(DuckLake.Query($"""
            SELECT count(*) FILTER (a.is_bridge), bool_and(a.resistance = b.resistance) FILTER (a.is_bridge),
                avg((abs(a.resistance - b.resistance) <= 4 * sqrt(a.resistance_se ** 2 + b.resistance_se ** 2))::INT)
                    FILTER (NOT a.is_bridge),
                bool_or(a.resistance <> b.resistance)
            FROM {Table("links")} a JOIN {Table("links")} b USING (source, target) WHERE a.run = 'night-1' AND b.run = 'night-2'
            """));
        Assert.Equal((239L, true, true), ((long)row[0]!, (bool)row[1]!, (bool)row[3]!));
        Assert.InRange((double)row[2]!, 0.99, 1);
    }

    [Fact]
    public void A_pair_that_a_link_joins_has_the_links_own_row()
    {
        using Place place = new();
        string pairs = Path.Combine(place.Folder, "linked.csv");
        File.WriteAllLines(pairs, File.ReadLines(Command.Sample("links.csv")).Where((_, i) => i % 12 == 0)
            .Select(line => string.Join(',', line.Split(',')[..2])));
        Command.Succeed(Command.Sample("links.csv"), place.Lake, "--run-id", "a", "--weights", "conductance",
            "--want", "links", "--pairs", pairs);
        object?[] row = Assert.Single(DuckLake.Query($"""
            SELECT count(*), count(DISTINCT p.method), bool_and(p.method = l.method),
                max(abs(p.resistance - l.resistance) / l.resistance),
                max(abs(p.resistance_lower - l.resistance_lower) / l.resistance),
                max(abs(p.resistance_upper - l.resistance_upper) / l.resistance)
            FROM {DuckLake.Table(place.Lake, "pairs")} p JOIN {DuckLake.Table(place.Lake, "links")} l
                ON (l.source = p.source AND l.target = p.target) OR (l.source = p.target AND l.target = p.source)
            """));
        Assert.Equal((404L, 2L, true), ((long)row[0]!, (long)row[1]!, (bool)row[2]!));
        // The sums of links are kept in floats, those of pairs in doubles.
        Assert.All(row[3..], difference => Assert.InRange((double)difference!, 0, 1e-6));
    }
}
