// Cleaning, components, order and bridges.

using CsCheck;
using ScaleResist.DataGen.Networks;
using ScaleResist.Graphs;

namespace ScaleResist.Tests.Graphs;

public class NetworkBuilderTests
{
    [Fact]
    public void Self_loops_drop_out_and_parallel_links_add_their_conductances()
    {
        Network network = TestNetworks.Of((1, 2, 1.5), (2, 1, 2), (3, 3, 9), (2, 3, 1), (1, 2, 0.5));
        Assert.Equal(new CleaningFacts(1, 2), network.Cleaning);
        Assert.Equal(2, network.LinkCount);
        Assert.Equal(4, network.Conductance(network.FindArc(network.Node(1), network.Node(2))));
        Assert.Equal([4.0, 5.0, 1.0], new long[] { 1, 2, 3 }.Select(label => network.Strengths[network.Node(label)]));
    }

    [Fact]
    public void Parallel_links_without_weights_become_conductance_two()
    {
        Network network = TestNetworks.Unit((1, 2), (2, 1), (2, 3));
        Assert.Equal(2, network.Conductance(network.FindArc(network.Node(2), network.Node(1))));
        Assert.Null(TestNetworks.Unit((1, 2), (2, 3)).Conductances);
    }

    [Fact]
    public void Components_come_largest_first_and_ties_by_smallest_id()
    {
        Network network = TestNetworks.Unit((50, 51), (9, 10), (1, 2), (2, 3), (7, 7));
        Assert.Equal([3, 2, 2, 1], network.Components.Select(component => component.Nodes));
        Assert.Equal(9, Math.Min(network.Labels.Integers[3], network.Labels.Integers[4]));
        Assert.Equal(7, network.Labels.Integers[7]);
        Assert.Equal(0, network.Strengths[7]);
    }

    [Fact]
    public void A_network_of_self_loops_alone_is_refused()
    {
        InputException error = Assert.Throws<InputException>(() => TestNetworks.Unit((1, 1), (2, 2)));
        Assert.Contains("no link is left", error.Message, StringComparison.Ordinal);
    }

    [Fact]
    public void Rows_are_sorted_symmetric_and_free_of_duplicates_for_any_links()
    {
        Gen.Select(Gen.Int[0, 30], Gen.Int[0, 30], Gen.Double[0.1, 9]).Array[1, 120].Sample(
            raw =>
            {
                (long, long, double)[] links = [.. raw.Select(link => ((long)link.Item1, (long)link.Item2, link.Item3))];
                if (links.All(link => link.Item1 == link.Item2))
                    return;
                Network network = TestNetworks.Of(links);
                Dictionary<(long, long), double> expected = links.Where(link => link.Item1 != link.Item2)
                    .GroupBy(link => (Math.Min(link.Item1, link.Item2), Math.Max(link.Item1, link.Item2)))
                    .ToDictionary(group => group.Key, group => group.Sum(link => link.Item3));
                Assert.Equal(expected.Count, network.LinkCount);
                for (int u = 0; u < network.NodeCount; u++)
                {
                    for (long k = network.RowStart[u]; k < network.RowStart[u + 1]; k++)
                    {
                        int v = network.Neighbours[k];
                        Assert.True(k == network.RowStart[u] || network.Neighbours[k - 1] < v);
                        (long a, long b) = (network.Labels.Integers[u], network.Labels.Integers[v]);
                        Assert.Equal(expected[(Math.Min(a, b), Math.Max(a, b))], network.Conductance(k), 1e-9);
                    }
                }
                Assert.Equal(links.SelectMany(link => new[] { link.Item1, link.Item2 }).Distinct().Count(), network.NodeCount);
            },
            iter: 500, seed: "0N0XIzNsQ0O2");
    }

    [Fact]
    public void Bridges_are_the_links_whose_loss_splits_a_component()
    {
        for (int seed = 0; seed < 60; seed++)
        {
            Network network = TestNetworks.Random(30, 29 + (seed % 14), seed, decades: 0);
            Bridges bridges = Bridges.Find(network);
            for (int u = 0; u < network.NodeCount; u++)
            {
                long link = network.LinkStart[u];
                for (long k = network.FirstLaterArc(u); k < network.RowStart[u + 1]; k++, link++)
                {
                    int reached = Reached(network, u, network.Neighbours[k]);
                    Assert.Equal(reached < network.NodeCount, bridges.Contains(link));
                    if (reached < network.NodeCount)
                        Assert.Equal(Math.Min(reached, 30 - reached), bridges.NodesCutOff[bridges.FirstFrom(link)]);
                }
            }
        }
    }

    [Fact]
    public void A_path_of_a_million_nodes_does_not_overflow_the_stack()
    {
        Network network = TestNetworks.Of(Family.Path, 1_000_000);
        Assert.Equal(999_999, Bridges.Find(network).Count);
    }

    [Theory]
    [InlineData("karate.tsv", 34, 78, 1)]
    [InlineData("dolphins.tsv", 62, 159, 1)]
    [InlineData("lesmis.tsv", 77, 254, 1)]
    [InlineData("netscience.tsv", 1461, 2742, 268)] // 128 further nodes of the source have no link
    [InlineData("power.tsv", 4941, 6594, 1)]
    [InlineData("as-22july06.tsv", 22963, 48436, 1)]
    public void Open_networks_have_their_counts(string file, int nodes, int links, int components)
    {
        Network network = TestNetworks.Open(file);
        Assert.Equal((nodes, links, components), (network.NodeCount, (int)network.LinkCount, network.Components.Count));
    }

    // Nodes reached from u when the link u-v is cut.
    private static int Reached(Network network, int u, int v)
    {
        HashSet<int> seen = [u];
        Stack<int> open = new([u]);
        while (open.TryPop(out int at))
        {
            for (long k = network.RowStart[at]; k < network.RowStart[at + 1]; k++)
            {
                int next = network.Neighbours[k];
                if ((at == u && next == v) || (at == v && next == u))
                    continue;
                if (seen.Add(next))
                    open.Push(next);
            }
        }
        return seen.Count;
    }
}
