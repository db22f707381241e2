// Networks whose halves hang together by little, or whose conductances lie far apart: the answer holds, or the run says that it
// cannot be had. A relative residual alone does not see a weak cut: its share of the right-hand side is sqrt(lambda_2 / tr L).

using System.Globalization;
using System.Text;
using ScaleResist.Tests.Cli;
using ScaleResist.Tests.Lake;

namespace ScaleResist.Tests.EndToEnd;

public sealed class Extreme_conductances
{
    // Two complete graphs of m nodes, unit conductances, joined by one link c. Within each, R = 2/m and the index is m - 1;
    // across, R(u,a) + 1/c + R(b,v) over m^2 pairs: Kf = m^2/c + 6(m - 1).
    [Theory]
    [InlineData(100, 1)]
    [InlineData(100, 1e-2)]
    [InlineData(100, 1e-3)]
    [InlineData(100, 1e-5)]
    [InlineData(300, 1)]
    public void The_Kirchhoff_index_sees_a_weak_link_between_two_halves(int m, double c)
    {
        using Place place = new();
        File.WriteAllText(place.Network, Halves(m) + Link(0, m, c));
        Command.Succeed(place.Network, place.Lake, "--route", "probe", "--weights", "conductance", "--want", "index");
        object?[] row = Assert.Single(DuckLake.Query($"""
            SELECT kirchhoff_index, kirchhoff_index_se FROM {DuckLake.Table(place.Lake, "index")}
            """));
        double exact = (m * m / c) + (6 * (m - 1));
        Assert.InRange((double)row[0]!, exact - (4 * (double)row[1]!), exact + (4 * (double)row[1]!));
        Assert.InRange((double)row[1]!, 0, 0.3 * exact);
    }

    // Joined by two links c: each sees 1/c beside 1/c + 2 * 2/m. Both or one of them are in every spanning tree: p1 + p2 >= 1.
    [Theory]
    [InlineData(100, 1)]
    [InlineData(100, 1e-3)]
    [InlineData(300, 1)]
    public void Two_weak_links_share_the_way_between_two_halves(int m, double c)
    {
        using Place place = new();
        File.WriteAllText(place.Network, Halves(m) + Link(0, m, c) + Link(1, m + 1, c));
        File.WriteAllText(Path.Combine(place.Folder, "pairs.csv"), $"2,{m + 2}\n");
        Command.Succeed(place.Network, place.Lake, "--route", "probe", "--weights", "conductance", "--want", "links",
            "--pairs", Path.Combine(place.Folder, "pairs.csv"));
        List<object?[]> links = DuckLake.Query($"""
            SELECT resistance, resistance_se FROM {DuckLake.Table(place.Lake, "links")} WHERE source < {m} AND target >= {m}
            """);
        double exact = ((1 / c) + (4.0 / m)) / (2 + (4 * c / m));
        Assert.Equal(2, links.Count);
        Assert.All(links, r => Assert.InRange((double)r[0]!, exact - (4 * (double)r[1]!), exact + (4 * (double)r[1]!)));

        // Away from their ends, the way across is 1/m on each side, through two branches, beside what the links themselves have.
        object?[] pair = Assert.Single(DuckLake.Query($"SELECT resistance_upper FROM {DuckLake.Table(place.Lake, "pairs")}"));
        Assert.True((double)pair[0]! > 1 / (2 * c));
    }

    // The same cut between two random halves of 20,000 nodes, all conductances 1: no pair across is nearer than 1/2
    // (Nash-Williams), so that n^2/2 bounds the index from below, and p1 + p2 >= 1.
    [Fact]
    public void Two_links_between_large_random_halves_are_seen()
    {
        const int Half = 20_000;
        Random random = new(1);
        StringBuilder text = new();
        foreach (int first in (int[])[0, Half])
        {
            for (int u = 1; u < Half; u++)
            {
                for (int k = 0; k < 8; k++)
                    text.Append(Link(first + u, first + random.Next(u), 1));
            }
        }
        using Place place = new();
        File.WriteAllText(place.Network, text + Link(5, Half + 7, 1) + Link(Half / 2, Half + (Half / 3), 1));
        Command.Succeed(place.Network, place.Lake, "--route", "probe", "--weights", "conductance", "--want", "index,links");
        object?[] index = Assert.Single(DuckLake.Query($"""
            SELECT kirchhoff_index_upper FROM {DuckLake.Table(place.Lake, "index")}
            """));
        Assert.True((double)index[0]! > Half * (Half / 2.0), $"index at most {index[0]}");
        object?[] cut = Assert.Single(DuckLake.Query($"""
            SELECT count(*), sum(resistance_upper) FROM {DuckLake.Table(place.Lake, "links")}
            WHERE source < {Half} AND target >= {Half}
            """));
        Assert.Equal(2L, cut[0]);
        Assert.True((double)cut[1]! >= 1, $"p1 + p2 at most {cut[1]}");
    }

    [Theory]
    [InlineData("1,2,1\n2,3,1e17\n3,1,1\n3,4,1\n4,1,1\n")]
    [InlineData("1,2,1\n2,3,1e-17\n3,4,1\n4,1,1e-17\n")]
    [InlineData("1,2,1\n2,3,1e300\n1,3,1\n")]
    [InlineData("1,2,1e-60\n2,3,1e-60\n1,3,1e-60\n")]
    [InlineData("1,2,1e-320\n2,3,1\n")]
    [InlineData("1,2,1e308\n2,1,1e308\n2,3,1\n")]
    public void Conductances_far_apart_give_numbers_or_a_refusal(string network)
    {
        using Place place = new();
        File.WriteAllText(place.Network, network);
        CliResult result = Command.Estimate(place.Network, place.Lake, "--route", "probe", "--weights", "conductance");
        if (result.Exit != 0)
        {
            Command.Refused(result, 3);
            Assert.False(Directory.Exists(place.Lake));
            return;
        }
        Assert.All(DuckLake.Query($"SELECT kirchhoff_index, foster_sum FROM {DuckLake.Table(place.Lake, "index")}"),
            r => Assert.All(r, number => Assert.True(double.IsFinite((double)number!))));
        Assert.All(DuckLake.Query($"SELECT resistance, resistance_upper FROM {DuckLake.Table(place.Lake, "links")}"),
            r => Assert.All(r, number => Assert.True(double.IsFinite((double)number!) && (double)number! > 0)));
    }

    private static string Halves(int m)
    {
        StringBuilder text = new();
        foreach (int first in (int[])[0, m])
        {
            for (int u = 0; u < m; u++)
            {
                for (int v = 0; v < u; v++)
                    text.Append(Link(first + u, first + v, 1));
            }
        }
        return text.ToString();
    }

    private static string Link(int u, int v, double c) => string.Create(CultureInfo.InvariantCulture, $"{u},{v},{c}\n");
}
