// Planned cases against dense recomputation (DenseCases), on both routes, splits and joins included; and the laws that cases keep.

using System.Globalization;
using ScaleResist.DataGen.Networks;
using ScaleResist.Graphs;
using ScaleResist.Runs;

namespace ScaleResist.Tests.Runs;

public sealed class ImpactCaseTests
{
    [Theory]
    [InlineData(1, 0.0)]
    [InlineData(2, 2.0)]
    [InlineData(3, 4.0)]
    public void Random_cases_equal_dense_recomputation(int seed, double decades) =>
        AssertLikeDense(Several(60, seed, decades), RandomCases(Several(60, seed, decades), 30, 12, seed), Route.Exact, 1e-8);

    [Fact]
    [Trait("Category", "Slow")]
    public void A_thousand_random_cases_of_1_to_50_changes_on_300_nodes_equal_dense_recomputation()
    {
        int cutting = 0;
        for (int seed = 0; seed < 10; seed++)
        {
            Network network = Several(300, 100 + seed, seed % 4);
            cutting += AssertLikeDense(network, RandomCases(network, 100, 50, seed), Route.Exact, 1e-8);
        }
        Assert.InRange(cutting, 300, 1000); // the networks are sparse
    }

    [Theory]
    [InlineData(4, 0.0)]
    [InlineData(5, 2.0)]
    public void Solved_cases_that_cut_nothing_off_equal_dense_recomputation(int seed, double decades)
    {
        // What cuts nothing off needs no probes: the change is solved, the index before is not.
        Network network = TestNetworks.Random(80, 200, seed, decades);
        string[][] rows = RandomCases(network, 40, 6, seed);
        MemorySink exact = Run(network, rows, Route.Exact), solved = Run(network, rows, Route.Probe);
        double[] index = exact["impact"].Column<double>("kirchhoff_index_before"), change = exact["impact"].Column<double>("change");
        int compared = 0;
        for (int i = 0; i < change.Length; i++)
        {
            Assert.Equal(exact["impact"].Column<long>("components_after")[i], solved["impact"].Column<long>("components_after")[i]);
            Assert.Equal(exact["impact"].Column<long>("nodes_cut_off")[i], solved["impact"].Column<long>("nodes_cut_off")[i]);
            if (solved["impact"].Column<string>("method")[i] != "solve")
                continue;
            compared++;
            Assert.Equal(0, solved["impact"].Column<double>("change_se")[i]);
            Assert.InRange(solved["impact"].Column<double>("change")[i] - change[i], -1e-8 * index[i], 1e-8 * index[i]);
        }
        Assert.InRange(compared, 10, 40);
    }

    [Fact]
    public void Of_solved_cases_that_cut_nodes_off_the_interval_holds_the_change()
    {
        Network network = TestNetworks.Random(80, 110, 6, 1);
        string[][] rows = RandomCases(network, 60, 6, 6);
        MemorySink exact = Run(network, rows, Route.Exact), solved = Run(network, rows, Route.Probe);
        double[] change = exact["impact"].Column<double>("change");
        double[] lower = solved["impact"].Column<double>("change_lower"), upper = solved["impact"].Column<double>("change_upper");
        string[] method = solved["impact"].Column<string>("method");
        int[] probed = [.. Enumerable.Range(0, change.Length).Where(i => method[i] == "probe")];
        Assert.InRange(probed.Length, 20, 60);
        // The bound adds errors up, so that at least 95 % hold; the cases share their probes.
        Assert.InRange(probed.Count(i => lower[i] <= change[i] && change[i] <= upper[i]), (int)(0.85 * probed.Length), probed.Length);
    }

    [Fact]
    public void Adding_never_raises_the_index_and_losing_never_lowers_it()
    {
        // Rayleigh's law of monotonicity.
        foreach (int seed in (int[])[7, 8, 9])
        {
            Network network = TestNetworks.Random(70, 180, seed, 2);
            foreach (string action in (string[])["add", "lose"])
            {
                MemorySink found = Run(network, RandomCases(network, 40, 5, seed, action), Route.Exact);
                double[] change = found["impact"].Column<double>("change");
                long[] parts = found["impact"].Column<long>("components_after");
                Assert.Contains(parts, count => count == 1);
                for (int i = 0; i < change.Length; i++)
                {
                    if (parts[i] == 1)
                        Assert.True(action == "add" ? change[i] < 0 : change[i] > 0, $"{action} {change[i]}");
                }
            }
        }
    }

    [Fact]
    public void Losing_what_was_added_brings_the_index_back()
    {
        Network network = TestNetworks.Random(50, 90, 10, 2);
        (int u, int v) = Unlinked(network, 3);
        string source = network.Labels[u], target = network.Labels[v];
        MemorySink added = Run(network, [["1", "add", source, target, "2.5"]], Route.Exact);
        List<(long, long, double)> links = [(network.Labels.Integers[u], network.Labels.Integers[v], 2.5)];
        for (int a = 0; a < network.NodeCount; a++)
        {
            for (long k = network.FirstLaterArc(a); k < network.RowStart[a + 1]; k++)
                links.Add((network.Labels.Integers[a], network.Labels.Integers[network.Neighbours[k]], network.Conductance(k)));
        }
        MemorySink lost = Run(TestNetworks.Of([.. links]), [["1", "lose", source, target, ""]], Route.Exact);
        double there = added["impact"].Column<double>("change")[0], back = lost["impact"].Column<double>("change")[0];
        Assert.InRange(there + back, -1e-11 * Math.Abs(there), 1e-11 * Math.Abs(there));
        Assert.Equal(added["impact"].Column<double>("kirchhoff_index_before")[0], lost["impact"].Column<double>("kirchhoff_index_after")[0], 1e-9);
    }

    [Fact]
    public void Losing_a_star_centre_leaves_single_nodes_and_no_index()
    {
        Network network = TestNetworks.Of(Family.Star, 9);
        long hub = Enumerable.Range(0, 9).Select(u => network.Labels.Integers[u]).Single(label => network.Degree(network.Node(label)) == 8);
        MemorySink found = Run(network, [["9", "lose", $"{hub}", "", ""]], Route.Exact);
        Assert.Equal([8L], found["impact"].Column<long>("components_after"));
        Assert.Equal([7L], found["impact"].Column<long>("nodes_cut_off"));
        Assert.Equal(64, found["impact"].Column<double>("kirchhoff_index_before")[0], 1e-12); // (n-1)^2 of a star
        Assert.Equal([0.0], found["impact"].Column<double>("kirchhoff_index_after"));
    }

    [Fact]
    public void A_cycle_that_loses_a_link_becomes_a_path_and_one_that_loses_a_node_a_shorter_path()
    {
        // Kf: cycle (n^3 - n)/12, path (n^3 - n)/6 (Lukovits, Nikolic & Trinajstic 1999).
        Network network = TestNetworks.Of(Family.Cycle, 30);
        string[] label = [.. Enumerable.Range(0, 30).Select(u => network.Labels[u])];
        string neighbour = network.Labels[network.Neighbours[network.RowStart[4]]];
        MemorySink found = Run(network, [["a", "lose", label[4], neighbour, ""], ["b", "lose", label[4], "", ""]], Route.Exact);
        double[] after = found["impact"].Column<double>("kirchhoff_index_after");
        Assert.Equal(((30.0 * 30 * 30) - 30) / 6, after[0], 1e-8);
        Assert.Equal(((29.0 * 29 * 29) - 29) / 6, after[1], 1e-8);
        Assert.Equal([0L, 0L], found["impact"].Column<long>("nodes_cut_off"));
        Assert.Equal(["a", "b"], found["impact"].Column<string>("case"));
    }

    [Theory]
    [InlineData(Route.Exact)]
    [InlineData(Route.Probe)]
    public void Two_single_nodes_that_are_joined_are_one_link_apart(Route route)
    {
        Network network = TestNetworks.Unit((1, 1), (2, 2), (3, 3), (4, 5));
        MemorySink found = Run(network, [["a", "add", "1", "2", "4"], ["b", "lose", "3", "", ""]], route, pairs: [(network.Node(1), network.Node(2))]);
        Assert.Equal([0.25, 0.0], found["impact"].Column<double>("kirchhoff_index_after").Select(index => Math.Round(index, 12)));
        Assert.Equal([1L, 0L], found["impact"].Column<long>("components_after"));
        double[] after = found["impact_pairs"].Column<double>("resistance_after");
        Assert.Equal(0.25, after[0], 1e-12);
        Assert.Equal(double.PositiveInfinity, after[1]);
        Assert.Equal([double.NegativeInfinity, 0.0], found["impact_pairs"].Column<double>("change"));
    }

    [Fact]
    public void Numbers_do_not_depend_on_threads()
    {
        Network network = Several(60, 11, 2);
        foreach (Route route in (Route[])[Route.Exact, Route.Probe])
        {
            string[][] rows = RandomCases(network, 30, 12, 11);
            MemorySink one = Run(network, rows, route, threads: 1), three = Run(network, rows, route, threads: 3);
            foreach (string column in (string[])["kirchhoff_index_after", "change", "change_se"])
                Assert.Equal(one["impact"].Column<double>(column), three["impact"].Column<double>(column));
        }
    }

    [Fact]
    public void A_case_of_several_hundred_links_equals_dense_recomputation()
    {
        Network network = TestNetworks.Random(150, 700, 12, 1);
        string[][] rows = [.. RandomCases(network, 1, 400, 12, "lose", 400)];
        Assert.InRange(rows.Length, 250, 400);
        AssertLikeDense(network, rows, Route.Exact, 1e-8);
    }

    private static int AssertLikeDense(Network network, string[][] rows, Route route, double tolerance)
    {
        double[] weights = [.. Enumerable.Range(0, network.NodeCount).Select(u => network.Labels.Integers[u] % 7 * 0.5)];
        Random random = new(99);
        (int U, int V)[] pairs = [.. Enumerable.Range(0, 4).Select(_ => (random.Next(network.NodeCount), random.Next(network.NodeCount)))];
        MemorySink found = Run(network, rows, route, weights, pairs);
        DenseCases dense = new(network);
        List<PlannedCase> cases = ChangeReader.Read(new MemoryRows(rows), network);
        double[] resistances = found["impact_pairs"].Column<double>("resistance_after");
        int cutting = 0;
        for (int i = 0; i < cases.Count; i++)
        {
            DenseCases.Result expected = dense.Apply(cases[i], weights, pairs);
            double scale = Math.Max(expected.Before, expected.After), weighted = Math.Max(expected.WeightedBefore, expected.WeightedAfter);
            Near(expected.Before, "kirchhoff_index_before", scale);
            Near(expected.After, "kirchhoff_index_after", scale);
            Near(expected.After - expected.Before, "change", scale);
            foreach ((string column, double value) in new[] { ("before", expected.WeightedBefore), ("after", expected.WeightedAfter) })
            {
                double error = found["impact"].Column<double?>($"node_weighted_kirchhoff_index_{column}")[i]!.Value - value;
                Assert.InRange(error, -tolerance * weighted, tolerance * weighted);
            }
            Assert.Equal(expected.Parts, found["impact"].Column<long>("components_after")[i]);
            Assert.Equal(expected.CutOff, found["impact"].Column<long>("nodes_cut_off")[i]);
            for (int p = 0; p < pairs.Length; p++)
            {
                double resistance = resistances[(i * pairs.Length) + p], exact = expected.Pairs[p];
                Assert.Equal(double.IsInfinity(exact), double.IsInfinity(resistance));
                if (double.IsFinite(exact))
                    Assert.InRange(resistance - exact, -tolerance * exact, tolerance * exact);
            }
            cutting += expected.Parts > 1 ? 1 : 0;

            void Near(double value, string column, double size)
            {
                double error = found["impact"].Column<double>(column)[i] - value;
                Assert.True(Math.Abs(error) <= tolerance * size, $"case {cases[i].Id}: {column} is off by {error / size:0.0e+0} of {size}");
            }
        }
        return cutting;
    }

    internal static MemorySink Run(
        Network network, string[][] rows, Route route, double[]? weights = null, (int, int)[]? pairs = null, int threads = 2)
    {
        MemorySink sink = new();
        ImpactInputs inputs = new() { Cases = ChangeReader.Read(new MemoryRows(rows), network), NodeWeights = weights, Pairs = pairs };
        ImpactRun.Execute(network, new ImpactPlan { Route = route, Threads = threads }, inputs, sink, new SilentObserver(), default);
        return sink;
    }

    // Two components of such a size and half of it, and a pair of nodes, sparse enough to come apart.
    private static Network Several(int nodes, int seed, double decades)
    {
        List<(long, long, double)> links = [];
        foreach ((int size, int offset) in ((int, int)[])[(nodes * 2 / 3, 0), ((nodes / 3) - 2, nodes * 2 / 3)])
        {
            Network part = TestNetworks.Random(size, size * 5 / 4, seed + offset, decades);
            for (int u = 0; u < part.NodeCount; u++)
            {
                for (long k = part.FirstLaterArc(u); k < part.RowStart[u + 1]; k++)
                    links.Add((part.Labels.Integers[u] + offset, part.Labels.Integers[part.Neighbours[k]] + offset, part.Conductance(k)));
            }
        }
        links.Add((nodes - 2, nodes - 1, 0.5));
        return TestNetworks.Of([.. links]);
    }

    private static string[][] RandomCases(Network network, int cases, int mostChanges, int seed, string? only = null, int fewest = 1)
    {
        Random random = new(seed);
        List<string[]> rows = [];
        for (int i = 0; i < cases; i++)
        {
            HashSet<(int, int)> taken = [];
            HashSet<int> kept = [], lost = [];
            int changes = random.Next(fewest, mostChanges + 1);
            for (int k = 0; k < changes; k++)
            {
                int u = random.Next(network.NodeCount), v = random.Next(network.NodeCount), kind = random.Next(12);
                string action = only ?? (kind < 4 ? "lose" : kind < 8 ? "add" : "set");
                if (only is null && kind == 11)
                {
                    if (!kept.Contains(u) && lost.Add(u))
                        rows.Add([$"{i}", "lose", network.Labels[u], "", ""]);
                    continue;
                }
                if (action != "add")
                    v = network.Neighbours[network.RowStart[u] + random.Next(network.Degree(u))];
                if (u == v || lost.Contains(u) || lost.Contains(v) || !taken.Add((Math.Min(u, v), Math.Max(u, v))))
                    continue;
                kept.UnionWith([u, v]);
                string conductance = Math.Pow(10, 2 * (random.NextDouble() - 0.5)).ToString("R", CultureInfo.InvariantCulture);
                rows.Add([$"{i}", action, network.Labels[u], network.Labels[v], action == "lose" ? "" : conductance]);
            }
            if (rows.Count == 0 || rows[^1][0] != $"{i}")
                rows.Add([$"{i}", "add", network.Labels[0], network.Labels[1], "1"]);
        }
        return [.. rows];
    }

    private static (int U, int V) Unlinked(Network network, int u) =>
        (u, Enumerable.Range(0, network.NodeCount).Last(v => v != u && network.FindArc(u, v) < 0));
}
