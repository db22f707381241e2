// Orders: permutations on every kind of network, no fill where none is needed, little on meshes, given up where there is no hope.

using CsCheck;
using ScaleResist.DataGen.Networks;
using ScaleResist.Graphs;
using ScaleResist.Solving;

namespace ScaleResist.Tests.Solving;

public class FillReducingOrderTests
{
    public static TheoryData<Family> Families => [.. Enum.GetValues<Family>()];

    [Theory]
    [MemberData(nameof(Families))]
    public void Every_family_gets_a_permutation_that_threads_do_not_change(Family family)
    {
        Network network = TestNetworks.Of(family, family == Family.Complete ? 500 : 5_000);
        int[] order = FillReducingOrder.Of(network.Laplacian, 1, default);
        Assert.Equal(Enumerable.Range(0, network.NodeCount), order.Order());
        Assert.Equal(order, FillReducingOrder.Of(network.Laplacian, 2, default));
    }

    [Theory]
    [InlineData("karate.tsv", 250)]
    [InlineData("lesmis.tsv", 450)]
    [InlineData("power.tsv", 17_500)]
    [InlineData("netscience.tsv", 4_700)] // many components
    [InlineData("as-22july06.tsv", 125_000)]
    public void Open_networks_fill_little(string file, long most)
    {
        Network network = TestNetworks.Open(file);
        EliminationTree tree = EliminationTree.Of(network.Laplacian, FillReducingOrder.Of(network.Laplacian, 2, default));
        Assert.InRange(tree.Entries, network.NodeCount + network.LinkCount, most);
        Assert.Equal(network.Components.Count, tree.Parent.Count(p => p < 0));
    }

    [Fact]
    public void Random_networks_get_permutations_whose_costs_are_known_exactly()
    {
        Gen.Int[0, 100_000].Sample(
            seed =>
            {
                int n = 2 + (seed % 90);
                Network network = TestNetworks.Random(n, Math.Min(n * (n - 1) / 2, n - 1 + (seed % (3 * n))), seed, decades: 0);
                int[] order = FillReducingOrder.Of(network.Laplacian, 1, default);
                Assert.Equal(Enumerable.Range(0, n), order.Order());
                OrderGraph graph = PatternOf(network);
                order = MinimumDegree.Order(graph, n, OrderLimits.None, out ColumnCosts costs, default)!;
                EliminationTree tree = EliminationTree.Of(network.Laplacian, order);
                Assert.Equal(tree.Entries, costs.Entries);
                Assert.Equal(tree.Operations, costs.Operations);
                SmallDegrees small = SmallDegrees.Of(network.Laplacian);
                int[] core = MinimumDegree.Order(small.Core, small.Core.Count, OrderLimits.None, out costs, default)!;
                tree = EliminationTree.Of(network.Laplacian, [.. small.Order, .. core.Select(i => small.CoreNodes[i])]);
                Assert.Equal(tree.Entries, costs.Entries + small.Costs.Entries);
            },
            iter: 2000, seed: "0N0XIzNsQ0O2");
    }

    [Theory]
    [InlineData(Family.Path)]
    [InlineData(Family.Star)]
    [InlineData(Family.Complete)]
    public void Trees_and_complete_networks_do_not_fill(Family family)
    {
        Network network = TestNetworks.Of(family, 600);
        Assert.Equal(network.NodeCount + network.LinkCount, EntriesOf(network));
        int[] order = MinimumDegree.Order(PatternOf(network), 600, OrderLimits.None, out _, default)!;
        Assert.Equal(network.NodeCount + network.LinkCount, EliminationTree.Of(network.Laplacian, order).Entries);
    }

    [Fact]
    public void A_random_tree_of_a_million_nodes_does_not_fill()
    {
        Network network = TestNetworks.Random(1_000_000, 999_999, 5, decades: 0);
        Assert.Equal((2 * 1_000_000) - 1, EntriesOf(network));
    }

    [Theory]
    [InlineData(2, 0)]
    [InlineData(3, 0.002)]
    [InlineData(7, 0.06)] // its hubs go last
    public void Chordal_networks_fill_next_to_nothing(int k, double share)
    {
        // A k-tree: every further node joins a random clique of k. Its nodes of least degree are simplicial (Rose, Discrete Math. 7:317, 1974).
        Random random = new(k);
        List<long[]> cliques = [[.. Enumerable.Range(0, k).Select(i => (long)i)]];
        List<(long, long)> links = [.. cliques[0].SelectMany(u => cliques[0].Where(v => u < v).Select(v => (u, v)))];
        for (long v = k; v < 3_000; v++)
        {
            long[] clique = cliques[random.Next(cliques.Count)];
            links.AddRange(clique.Select(u => (u, v)));
            for (int i = 0; i < k; i++)
                cliques.Add([.. clique.Where((_, at) => at != i), v]);
        }
        Network network = TestNetworks.Unit([.. links]);
        long least = network.NodeCount + network.LinkCount;
        int[] order = MinimumDegree.Order(PatternOf(network), network.NodeCount, OrderLimits.None, out _, default)!;
        Assert.InRange(EliminationTree.Of(network.Laplacian, order).Entries, least, 1.002 * least);
        Assert.InRange(EntriesOf(network), least, (1 + share) * least);
    }

    [Fact]
    public void A_wheel_of_a_hundred_thousand_spokes_is_ordered_around_its_hub_in_linear_time()
    {
        const int spokes = 100_000;
        Network network = TestNetworks.Unit([.. Enumerable.Range(1, spokes).SelectMany(
            i => new[] { (0L, (long)i), (i, (long)(i % spokes) + 1) })]);
        long start = System.Diagnostics.Stopwatch.GetTimestamp();
        // Each rim node but the last three finds two rim nodes and the hub.
        Assert.Equal((4L * (spokes - 3)) + 4 + 3 + 2 + 1, EntriesOf(network));
        Assert.InRange(System.Diagnostics.Stopwatch.GetElapsedTime(start).TotalSeconds, 0, 10); // reading the hub at each spoke: 10^10 entries
    }

    [Fact]
    public void Many_chains_between_two_hubs_are_eliminated_in_linear_time()
    {
        const int chains = 100_000;
        Network network = TestNetworks.Unit([.. Enumerable.Range(2, chains).SelectMany(i => new[] { (0L, (long)i), (i, 1L) })]);
        Assert.Equal((3L * chains) + 2 + 1, EntriesOf(network));
    }

    [Theory]
    [InlineData(64, 18)]
    [InlineData(128, 24)]
    [InlineData(256, 32)]
    public void Square_grids_fill_little(int side, double entriesANode)
    {
        Network network = TestNetworks.Of(Family.Grid, side * side);
        Assert.InRange(EntriesOf(network), 0, entriesANode * network.NodeCount);
    }

    [Fact]
    [Trait("Category", "Slow")]
    public void A_million_nodes_fill_little()
    {
        Network road = TestNetworks.Of(Family.Road, 1_000_000);
        Assert.InRange(EntriesOf(road), 0, 10.5 * road.NodeCount);
        Network grid = TestNetworks.Of(Family.Grid, 1_000_000);
        int[] order = FillReducingOrder.Of(grid.Laplacian, 2, default);
        Assert.InRange(EliminationTree.Of(grid.Laplacian, order).Entries, 0, 39 * grid.NodeCount);
        Assert.Equal(order, FillReducingOrder.Of(grid.Laplacian, 1, default)); // by nested dissection
    }

    [Theory]
    [InlineData(Family.Grid, 10_000)]
    [InlineData(Family.Road, 10_000)]
    [InlineData(Family.SmallWorld, 3_000)]
    public void The_limit_on_entries_holds_to_the_entry(Family family, int nodes)
    {
        Network network = TestNetworks.Of(family, nodes);
        int[] order = FillReducingOrder.Of(network.Laplacian, 2, default);
        EliminationTree tree = EliminationTree.Of(network.Laplacian, order);
        Assert.Equal(order, FillReducingOrder.Of(network.Laplacian, new OrderLimits(tree.Entries, tree.Operations), 2, default));
        Assert.Null(FillReducingOrder.Of(network.Laplacian, new OrderLimits(tree.Entries - 1, double.MaxValue), 2, default));
        Assert.Null(FillReducingOrder.Of(network.Laplacian, new OrderLimits(long.MaxValue, tree.Operations - 1), 2, default));
    }

    [Theory]
    [InlineData(Family.Preferential, 100_000)]
    [InlineData(Family.PowerLaw, 30_000)]
    [InlineData(Family.Cube, 64_000)]
    [InlineData(Family.Hypercube, 32_768)]
    public void Hopeless_networks_are_given_up(Family family, int nodes)
    {
        Network network = TestNetworks.Of(family, nodes);
        Assert.Null(FillReducingOrder.Of(network.Laplacian, new OrderLimits(4_000_000, double.PositiveInfinity), 2, default));
    }

    [Fact]
    public void A_cancelled_order_stops()
    {
        Network network = TestNetworks.Of(Family.Grid, 10_000);
        Assert.Throws<OperationCanceledException>(() => FillReducingOrder.Of(network.Laplacian, 2, new CancellationToken(true)));
        OrderGraph graph = PatternOf(network);
        byte[] part = Bisection.Of(graph, default);
        Assert.Throws<OperationCanceledException>(() => NestedDissection.Order(graph, part, 2, new CancellationToken(true)));
    }

    internal static OrderGraph PatternOf(Network network) => new([.. network.RowStart.Select(k => (int)k)], network.Neighbours);

    private static long EntriesOf(Network network) =>
        EliminationTree.Of(network.Laplacian, FillReducingOrder.Of(network.Laplacian, 2, default)).Entries;
}
