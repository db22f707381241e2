// Separators separate and are balanced and small; dissection is a permutation that threads do not change.

using CsCheck;
using ScaleResist.DataGen.Networks;
using ScaleResist.Graphs;
using ScaleResist.Solving;

namespace ScaleResist.Tests.Solving;

public class NestedDissectionTests
{
    [Theory]
    [InlineData(Family.Grid, 10_000, 130)] // 100 is the least, along the middle
    [InlineData(Family.Torus, 10_000, 260)] // 200
    [InlineData(Family.Cube, 8_000, 520)] // 400
    [InlineData(Family.Road, 10_000, 50)]
    [InlineData(Family.Path, 10_000, 3)]
    [InlineData(Family.Ladder, 10_000, 6)]
    [InlineData(Family.SmallWorld, 3_000, 600)]
    [InlineData(Family.Star, 3_000, 1)]
    public void Separators_are_small_and_balanced(Family family, int nodes, int most)
    {
        Network network = TestNetworks.Of(family, nodes);
        byte[] part = Bisection.Of(FillReducingOrderTests.PatternOf(network), default);
        AssertSeparates(network, part);
        Assert.InRange(part.Count(p => p == Separator.Between), 1, most);
        Assert.InRange(Math.Max(part.Count(p => p == 0), part.Count(p => p == 1)), 0, (0.6 * nodes) + 1);
    }

    [Fact]
    public void Random_networks_are_separated_and_dissected()
    {
        Gen.Int[0, 100_000].Sample(
            seed =>
            {
                int n = 200 + (seed % 3_000);
                Network network = TestNetworks.Random(n, n + (seed % n), seed, decades: 0);
                OrderGraph graph = FillReducingOrderTests.PatternOf(network);
                byte[] part = Bisection.Of(graph, default);
                AssertSeparates(network, part);
                int[] order = NestedDissection.Order(graph, part, 1, default);
                Assert.Equal(Enumerable.Range(0, n), order.Order());
            },
            iter: 30, seed: "0N0XIzNsQ0O2");
    }

    [Theory]
    [InlineData(Family.Grid, 40_000, 26)]
    [InlineData(Family.Torus, 40_000, 33)]
    [InlineData(Family.Road, 40_000, 8)]
    [InlineData(Family.Cube, 8_000, 135)]
    [InlineData(Family.Complete, 1_500, 751)]
    [InlineData(Family.Star, 40_000, 2)]
    public void Dissection_fills_little_and_threads_do_not_change_it(Family family, int nodes, double entriesANode)
    {
        Network network = TestNetworks.Of(family, nodes);
        OrderGraph graph = FillReducingOrderTests.PatternOf(network);
        byte[] part = Bisection.Of(graph, default);
        int[] order = NestedDissection.Order(graph, part, 2, default);
        Assert.Equal(order, NestedDissection.Order(graph, part, 1, default));
        Assert.InRange(EliminationTree.Of(network.Laplacian, order).Entries, 0, entriesANode * network.NodeCount);
    }

    private static void AssertSeparates(Network network, byte[] part)
    {
        for (int u = 0; u < network.NodeCount; u++)
        {
            for (long k = network.RowStart[u]; k < network.RowStart[u + 1]; k++)
                Assert.False(part[u] + part[network.Neighbours[k]] == 1, "A link joins the two sides.");
        }
    }
}
