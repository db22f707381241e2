// What a wrong program would get wrong: conductances taken for resistances, distances for resistances, large numbers for
// infinity, and a weight whose meaning is guessed.

using ScaleResist.Tests.Cli;
using ScaleResist.Tests.Lake;

namespace ScaleResist.Tests.EndToEnd;

public sealed class Traps
{
    private const string Conductances = "source,target,w\n10,20,1\n20,30,0.1\n30,40,1\n";
    private const string Resistances = "source,target,w\n10,20,1\n20,30,10\n30,40,1\n";
    private const string Pairs = "10,20\n10,30\n10,40\n40,40\n";

    [Theory]
    [InlineData(Conductances, "conductance")]
    [InlineData(Resistances, "resistance")]
    public void Links_of_a_path_are_exact_whichever_way_the_weight_is_given(string network, string meaning)
    {
        using Place place = new();
        Run(place, network, meaning, 1);
        Assert.Equal([(1.0, 1.0, 0.0, "bridge", 1L), (0.1, 10.0, 0.0, "bridge", 2L), (1.0, 1.0, 0.0, "bridge", 1L)],
            DuckLake.Query($"""
                SELECT conductance, resistance, resistance_se, method, nodes_cut_off
                FROM {DuckLake.Table(place.Lake, "links")} ORDER BY source
                """).Select(r => ((double)r[0]!, (double)r[1]!, (double)r[2]!, (string)r[3]!, (long)r[4]!)));
    }

    [Fact]
    public void Along_conductances_1_and_a_tenth_and_1_the_resistances_are_1_and_11_and_12()
    {
        // Further than one link is solved and enclosed.
        using Place place = new();
        Run(place, Conductances, "conductance", 1);
        List<object?[]> rows = OfPairs(place);
        Assert.Equal((1.0, 0.0, "bridge"), ((double)rows[0][0]!, (double)rows[0][1]!, (string)rows[0][4]!));
        Assert.Equal((0.0, 0.0, "exact"), ((double)rows[3][0]!, (double)rows[3][1]!, (string)rows[3][4]!));
        foreach ((object?[] row, double exact) in rows[1..3].Zip([11.0, 12.0]))
        {
            Assert.Equal((0.0, "solve"), ((double)row[1]!, (string)row[4]!));
            Assert.InRange(exact, (double)row[2]!, (double)row[3]!);
            Assert.InRange(((double)row[3]! - (double)row[2]!) / exact, 0, 1e-12);
        }
    }

    [Fact]
    public void Resistances_give_the_pairs_that_their_conductances_give()
    {
        using Place place = new(), other = new();
        Run(place, Conductances, "conductance", 3);
        Run(other, Resistances, "resistance", 3);
        Assert.Equal(OfPairs(place), OfPairs(other));
    }

    [Fact]
    public void Between_components_the_resistance_is_infinite()
    {
        using Place place = new();
        Run(place, Conductances + "50,60,1e-9\n60,70,1e-9\n70,50,1e-9\n", "conductance", 1, "10,50\n60,40\n50,60\n");
        List<object?[]> rows = OfPairs(place);
        const double Infinity = double.PositiveInfinity;
        Assert.All(rows[..2], r => Assert.Equal([Infinity, 0.0, Infinity, Infinity, "exact"], r));
        Assert.InRange((double)rows[2][0]!, 0.5e9, 1e9);
    }

    [Theory]
    [InlineData("1,2,0.5\n2,3,4\n", 1)]
    [InlineData("source,target,length\n1,2,0.5\n", 1)]
    public void A_third_column_is_refused_until_its_meaning_is_said(string network, int line)
    {
        using Place place = new();
        File.WriteAllText(place.Network, network);
        string refusal = Command.Refused(Command.Estimate(place.Network, place.Lake), 3);
        Assert.Contains($"{place.Network}:{line}: ", refusal);
        foreach (string choice in (string[])["--weights conductance", "--weights resistance", "--weights none"])
            Assert.Contains(choice, refusal);
        Assert.Empty(place.LakeContent());
        Command.Succeed(place.Network, place.Lake, "--weights", "none");
    }

    private static void Run(Place place, string network, string meaning, int seed, string pairs = Pairs, string route = "probe")
    {
        string file = Path.Combine(place.Folder, "pairs.csv");
        File.WriteAllText(file, pairs);
        File.WriteAllText(place.Network, network);
        Command.Succeed(place.Network, place.Lake, "--run-id", "a", "--weights", meaning, "--pairs", file, "--want", "links",
            "--route", route, "--seed", $"{seed}");
    }

    private static List<object?[]> OfPairs(Place place) => DuckLake.Query($"""
        SELECT resistance, resistance_se, resistance_lower, resistance_upper, method
        FROM read_parquet('{place.Run("a")}/pairs/*.parquet', file_row_number = true) ORDER BY file_row_number
        """);
}
