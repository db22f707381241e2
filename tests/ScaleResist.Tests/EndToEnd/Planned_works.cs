// The verb impact as a user starts it, on the sample's planned works: the tables as DuckDB reads them, the summary, and every refusal.
// Invariant: names and types stand here as the contract has them, not as the code does.

using ScaleResist.Cli;
using ScaleResist.Tests.Cli;
using ScaleResist.Tests.Lake;

namespace ScaleResist.Tests.EndToEnd;

/// <summary>The sample's planned works, exact and solved, and suggestions.</summary>
public sealed class WorkedCases : IDisposable
{
    private readonly Place place = new();

    public WorkedCases()
    {
        string[] common = ["--weights", "conductance", "--node-weights", Command.Sample("sites.csv")];
        Exact = Planned_works.Succeed(Command.Sample("links.csv"), Lake, ["--run-id", "exact", "--changes", Command.Sample("planned-works.csv"),
            "--pairs", Command.Sample("pairs.csv"), .. common]);
        Planned_works.Succeed(Command.Sample("links.csv"), Lake, ["--run-id", "solve", "--changes", Command.Sample("planned-works.csv"),
            "--pairs", Command.Sample("pairs.csv"), "--route", "probe", .. common]);
        Suggested = Planned_works.Succeed(Command.Sample("links.csv"), Lake, ["--run-id", "add", "--suggest", "3", .. common]);
    }

    internal string Lake => place.Lake;

    internal CliResult Exact { get; }

    internal CliResult Suggested { get; }

    public void Dispose() => place.Dispose();
}

public sealed class Planned_works(WorkedCases works) : IClassFixture<WorkedCases>
{
    [Theory]
    [InlineData("impact", 24, """
        case VARCHAR, changes BIGINT, kirchhoff_index_before DOUBLE, kirchhoff_index_after DOUBLE,
        change DOUBLE, change_se DOUBLE, change_lower DOUBLE, change_upper DOUBLE,
        components_after BIGINT, nodes_cut_off BIGINT, method VARCHAR, kirchhoff_index_before_se DOUBLE,
        node_weighted_kirchhoff_index_before DOUBLE, node_weighted_kirchhoff_index_after DOUBLE
        """)]
    [InlineData("impact_pairs", 960, """
        case VARCHAR, source VARCHAR, target VARCHAR, resistance_before DOUBLE, resistance_after DOUBLE,
        change DOUBLE, change_se DOUBLE, method VARCHAR
        """)]
    [InlineData("suggestions", 3, """
        rank BIGINT, source VARCHAR, target VARCHAR, conductance DOUBLE, cost DOUBLE, gain DOUBLE, gain_se DOUBLE,
        gain_per_cost DOUBLE, kirchhoff_index_after DOUBLE, method VARCHAR
        """)]
    public void Tables_have_the_columns_of_the_contract(string table, long rows, string columns)
    {
        string from = DuckLake.Table(works.Lake, table);
        Assert.Equal(rows, (long)DuckLake.Query($"SELECT count(*) FROM {from}")[0][0]!);
        string[] expected = [.. columns.Split(',', StringSplitOptions.TrimEntries), "run VARCHAR"];
        Assert.Equal(expected, DuckLake.Query($"DESCRIBE SELECT * FROM {from}").Select(row => $"{row[0]} {row[1]}"));
    }

    [Fact]
    public void Losing_the_only_sea_main_cuts_an_island_off_and_an_outpost_is_joined()
    {
        List<object?[]> rows = DuckLake.Query($"""
            SELECT "case", components_after, nodes_cut_off, change, method FROM {DuckLake.Table(works.Lake, "impact")} WHERE run = 'exact' ORDER BY 1
            """);
        Assert.Equal(12, rows.Count);
        Dictionary<string, object?[]> of = rows.ToDictionary(row => (string)row[0]!);
        long island = File.ReadLines(Command.Sample("sites.csv")).LongCount(line => line.StartsWith("SNO-", StringComparison.Ordinal));
        Assert.Equal((2L, island), ((long)of["W03"][1]!, (long)of["W03"][2]!));
        Assert.Equal((1L, 0L), ((long)of["W10"][1]!, (long)of["W10"][2]!));
        Assert.True((double)of["W10"][3]! > 0); // more nodes, more pairs
        foreach (string lost in (string[])["W01", "W02", "W04"])
            Assert.True((double)of[lost][3]! > 0 == ((long)of[lost][2]! == 0), lost);
        foreach (string added in (string[])["W07", "W08", "W09"])
            Assert.True((double)of[added][3]! < 0, added);
        Assert.All(rows, row => Assert.Equal("exact", row[4]));
    }

    [Fact]
    public void Both_routes_agree_where_nothing_is_cut_off_and_within_their_intervals_elsewhere()
    {
        List<object?[]> rows = DuckLake.Query($"""
            SELECT a.change, b.change, b.change_lower, b.change_upper, a.kirchhoff_index_before, a.nodes_cut_off, b.method, b."case"
            FROM {DuckLake.Table(works.Lake, "impact")} a JOIN {DuckLake.Table(works.Lake, "impact")} b USING ("case")
            WHERE a.run = 'exact' AND b.run = 'solve'
            """);
        Assert.Equal(12, rows.Count);
        int solved = 0;
        foreach (object?[] row in rows)
        {
            (double exact, double other, double before) = ((double)row[0]!, (double)row[1]!, (double)row[4]!);
            if ((string)row[6]! == "solve")
            {
                solved++;
                Assert.InRange(other - exact, -1e-8 * before, 1e-8 * before);
            }
            else
            {
                Assert.Equal("probe", row[6]);
                double half = ((double)row[3]! - (double)row[2]!) / 2; // of 95 %; four standard errors and a bit
                Assert.InRange(other - exact, -2.1 * half, 2.1 * half);
            }
        }
        Assert.InRange(solved, 6, 11);
        // Pairs are solved, not probed.
        Assert.Empty(DuckLake.Query($"""
            SELECT * FROM {DuckLake.Table(works.Lake, "impact_pairs")} a
            JOIN {DuckLake.Table(works.Lake, "impact_pairs")} b USING ("case", source, target)
            WHERE a.run = 'exact' AND b.run = 'solve' AND NOT (a.resistance_after = b.resistance_after
                OR abs(a.resistance_after - b.resistance_after) < 1e-7 * a.resistance_after)
            """));
    }

    [Fact]
    public void Pairs_that_are_separated_are_infinitely_far_apart()
    {
        Assert.NotEmpty(DuckLake.Query($"""
            SELECT * FROM {DuckLake.Table(works.Lake, "impact_pairs")}
            WHERE run = 'exact' AND "case" = 'W03' AND isfinite(resistance_before) AND resistance_after = 'inf' AND change = 'inf'
            """));
        // The outposts stay apart from the rest in most cases: infinite before and after is no change.
        Assert.Equal(0.0, DuckLake.Query($"""
            SELECT max(abs(change)) FROM {DuckLake.Table(works.Lake, "impact_pairs")} WHERE resistance_before = 'inf' AND resistance_after = 'inf'
            """)[0][0]);
    }

    [Fact]
    public void The_summary_is_short_and_cautious()
    {
        foreach (CliResult result in (CliResult[])[works.Exact, works.Suggested])
        {
            Assert.InRange(result.OutLines.Length, 8, 25);
            Assert.Contains("replaces no", result.Out);
            Assert.Contains("N-1", result.Out);
        }
        Assert.Contains("W03: cuts off", works.Exact.Out);
        Assert.Contains("the node-weighted index falls by", works.Suggested.Out);
        Assert.True(File.Exists(Path.Combine(works.Lake, "run=exact", "_SUCCESS")));
        Assert.Contains("\"verb\": \"impact\"", File.ReadAllText(Path.Combine(works.Lake, "run=exact", "run.json")));
    }

    [Fact]
    public void The_same_command_again_is_done_and_another_plan_is_refused()
    {
        using Place place = new();
        string changes = Write(place, "case,action,source,target,conductance\n1,lose,1,2,\n");
        Succeed(place.Network, place.Lake, "--run-id", "a", "--changes", changes);
        Assert.Equal([1L], DuckLake.Query($"SELECT \"case\" FROM {DuckLake.Table(place.Lake, "impact")}").Select(row => row[0]));
        Assert.Contains("already done", Succeed(place.Network, place.Lake, "--run-id", "a", "--changes", changes).Out);
        File.AppendAllText(changes, "2,lose,2,3,\n");
        Assert.Contains("other content in --changes", Command.Refused(Impact(place.Network, place.Lake, "--run-id", "a", "--changes", changes), 2));
    }

    [Fact]
    public void Cases_may_be_parquet()
    {
        using Place place = new();
        string changes = Path.Combine(place.Folder, "changes.parquet");
        DuckLake.Query($"""
            COPY (SELECT * FROM (VALUES (1, 'add', 1, 3, 2.5), (1, 'lose', 1, 2, NULL), (2, 'lose', 3, NULL, NULL))
                t("case", action, source, target, conductance)) TO '{changes}'
            """);
        Succeed(place.Network, place.Lake, "--run-id", "a", "--changes", changes);
        // The path 1-2-3: first 2 hangs on 3 and 3 on 1, resistances 1 and 0.4; then 3 is lost, and 1-2 is left.
        List<object?[]> rows = DuckLake.Query($"SELECT \"case\", kirchhoff_index_after FROM {DuckLake.Table(place.Lake, "impact")} ORDER BY 1");
        Assert.Equal((1L, 2.8), ((long)rows[0][0]!, Math.Round((double)rows[0][1]!, 12)));
        Assert.Equal((2L, 1.0), ((long)rows[1][0]!, Math.Round((double)rows[1][1]!, 12)));
        File.WriteAllBytes(changes, File.ReadAllBytes(changes)[..^40]);
        Assert.Contains("cannot be read as Parquet", Command.Refused(Impact(place.Network, place.Lake, "--run-id", "b", "--changes", changes), 3));
    }

    [Theory]
    [InlineData("case,action,source,target,conductance\n1,lose,1,3,\n", 2, "no link between '1' and '3' to lose")]
    [InlineData("case,action,source,target,conductance\n1,lose,1,2,\n\n2,add,1,9,1\n", 4, "no node '9'")]
    [InlineData("case,action,source,target,conductance\n1,add,1,3,-2\n", 2, "'-2' is not a finite positive number")]
    [InlineData("case,source,target,conductance\n1,1,2,\n", 1, "no column 'action'")]
    [InlineData("1,lose,1,2,\n", 1, "no column 'case'")]
    [InlineData("case,action,source,target,conductance\n", null, "has no data rows")]
    [InlineData("", null, "is empty")]
    public void A_bad_table_of_cases_is_refused_with_its_line_and_leaves_nothing(string text, int? line, string problem)
    {
        using Place place = new();
        string changes = Write(place, text);
        string refusal = Command.Refused(Impact(place.Network, place.Lake, "--changes", changes), 3);
        Assert.Contains(line is null ? $"{changes}: " : $"{changes}:{line}: ", refusal);
        Assert.Contains(problem, refusal);
        Assert.Empty(place.LakeContent());
    }

    [Fact]
    public void A_budget_without_costs_and_a_plan_beyond_its_memory_are_refused()
    {
        using Place place = new();
        string candidates = Write(place, "source,target,conductance\n1,3,1\n");
        Assert.Contains("no column 'cost'", Command.Refused(
            Impact(place.Network, place.Lake, "--suggest", "1", "--candidates", candidates, "--budget", "3"), 3));
        string changes = Write(place, "case,action,source,target,conductance\n1,lose,1,2,\n");
        foreach (string route in (string[])["exact", "probe", "auto"])
            Command.Refused(Impact(place.Network, place.Lake, "--changes", changes, "--memory-budget", "1MB", "--route", route), 4);
    }

    internal static CliResult Impact(string network, string lake, params string[] more) =>
        CliRun.InProcess(new LibraryEngine(), ["impact", network, "--lake", lake, .. more]);

    internal static CliResult Succeed(string network, string lake, params string[] more)
    {
        CliResult result = Impact(network, lake, more);
        Assert.True(result.Exit == 0, result.Error);
        Assert.Empty(result.Messages);
        return result;
    }

    private static string Write(Place place, string text)
    {
        string path = Path.Combine(place.Folder, "changes.csv");
        File.WriteAllText(path, text);
        return path;
    }
}
