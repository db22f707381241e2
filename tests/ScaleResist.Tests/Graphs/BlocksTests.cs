// Blocks against their definition by brute force, on deep and wide extremes, and the weights that hang off them.

using ScaleResist.DataGen.Networks;
using ScaleResist.Graphs;

namespace ScaleResist.Tests.Graphs;

public class BlocksTests
{
    public static TheoryData<int> Seeds => [.. Enumerable.Range(0, 60)];

    [Theory]
    [MemberData(nameof(Seeds))]
    public void Two_links_at_a_node_share_a_block_exactly_if_their_other_ends_stay_joined_without_it(int seed)
    {
        Network network = Some(seed);
        Blocks blocks = Blocks.Find(network);
        List<(int U, int V)> links = [.. Links(network)];
        int[] expected = BlocksByRemoval(network, links);
        Assert.Equal(expected.Distinct().Count(), blocks.Count);
        for (int i = 0; i < links.Count; i++)
        {
            Assert.Equal(blocks.BlockOf(links[i].U, links[i].V), blocks.BlockOf(links[i].V, links[i].U));
            for (int j = 0; j < i; j++)
            {
                Assert.Equal(
                    expected[i] == expected[j],
                    blocks.BlockOf(links[i].U, links[i].V) == blocks.BlockOf(links[j].U, links[j].V));
            }
        }
    }

    [Theory]
    [MemberData(nameof(Seeds))]
    public void Cut_nodes_and_bridges_are_those_whose_loss_splits_a_component(int seed)
    {
        Network network = Some(seed);
        Blocks blocks = Blocks.Find(network);
        List<(int U, int V)> links = [.. Links(network)];
        int parts = Parts(network.NodeCount, links).Distinct().Count();
        int cutNodes = 0;
        for (int u = 0; u < network.NodeCount; u++)
        {
            // Without its links a node is a part by itself: one part more than a harmless loss leaves, unless it had none.
            int left = Parts(network.NodeCount, links.Where(link => link.U != u && link.V != u)).Distinct().Count();
            bool cuts = left > parts + 1;
            Assert.Equal(cuts, blocks.IsCutNode(u));
            cutNodes += cuts ? 1 : 0;
        }
        Assert.Equal(cutNodes, blocks.CutNodes);
        int bridges = 0;
        foreach ((int u, int v) in links)
        {
            bool splits = Parts(network.NodeCount, links.Where(link => link != (u, v))).Distinct().Count() > parts;
            Assert.Equal(splits, blocks.IsBridge(blocks.BlockOf(u, v)));
            Assert.Equal(splits, blocks.Bridges.Contains(network.LinkBetween(u, v)));
            bridges += splits ? 1 : 0;
        }
        Assert.Equal(bridges, blocks.Bridges.Count);
    }

    [Theory]
    [MemberData(nameof(Seeds))]
    public void Members_heads_and_counts_are_those_of_the_links(int seed)
    {
        Network network = Some(seed);
        Blocks blocks = Blocks.Find(network);
        int[] componentOf = network.ComponentOfNodes();
        ILookup<int, (int U, int V)> links = Links(network).ToLookup(link => blocks.BlockOf(link.U, link.V));
        bool[] seen = new bool[network.NodeCount];
        for (int b = 0; b < blocks.Count; b++)
        {
            int[] members = blocks.Members(b).ToArray();
            Assert.Equal(
                links[b].SelectMany(link => new[] { link.U, link.V }).Distinct().Order(), members.Append(blocks.Head(b)).Order());
            Assert.Equal(members.Order(), members);
            Assert.Equal((links[b].Count(), members.Length + 1), (blocks.LinksOf(b), blocks.NodesOf(b)));
            Assert.All(members, v => Assert.Equal((b, componentOf[v]), (blocks.BlockOf(v), blocks.ComponentOf(b))));
            (int first, int end) = blocks.OfComponent(componentOf[blocks.Head(b)]);
            Assert.InRange(b, first, end - 1);
            int parent = blocks.BlockOf(blocks.Head(b));
            Assert.True(parent > b || parent == -1);
            foreach (int v in members)
            {
                Assert.False(seen[v]);
                seen[v] = true;
            }
        }
        Assert.Equal(network.Components.Count, seen.Count(once => !once));
    }

    [Theory]
    [MemberData(nameof(Seeds))]
    public void Hanging_weights_are_what_stays_joined_to_a_node_without_its_block(int seed)
    {
        Network network = Some(seed);
        Blocks blocks = Blocks.Find(network);
        double[] w = [.. Enumerable.Range(0, network.NodeCount).Select(u => (u * 7 % 11) + 0.5)];
        HangingWeights hanging = HangingWeights.Of(blocks, w), counts = HangingWeights.Of(blocks, null);
        List<(int U, int V)> links = [.. Links(network)];
        for (int b = 0; b < blocks.Count; b++)
        {
            int[] part = Parts(network.NodeCount, links.Where(link => blocks.BlockOf(link.U, link.V) != b));
            double sum = 0;
            foreach (int u in blocks.Members(b))
            {
                Assert.Equal(Over(part, part[u], w), hanging.OfMember(u), 1e-9);
                Assert.Equal(part.Count(p => p == part[u]), counts.OfMember(u));
                sum += hanging.OfMember(u);
            }
            int head = blocks.Head(b);
            Assert.Equal(Over(part, part[head], w), hanging.OfHead(b), 1e-9);
            Assert.Equal(part.Count(p => p == part[head]), counts.OfHead(b));
            Assert.Equal(hanging.Total(blocks.ComponentOf(b)), sum + hanging.OfHead(b), 1e-9);
        }
    }

    [Fact]
    public void A_path_and_a_star_of_a_million_nodes_are_all_bridges()
    {
        Blocks path = Blocks.Find(TestNetworks.Of(Family.Path, 1_000_000));
        Assert.Equal((999_999, 999_999, 999_998), (path.Count, path.Bridges.Count, path.CutNodes));
        HangingWeights sizes = HangingWeights.Of(path, null);
        // Kf of a path: the bridges cut off 1, 2, ..., n-1 nodes; sum of s (n-s) = (n-1) n (n+1) / 6.
        double sum = 0;
        for (int b = 0; b < path.Count; b++)
            sum += sizes.OfMember(path.Members(b)[0]) * sizes.OfHead(b);
        Assert.Equal(999_999.0 * 1e6 * 1_000_001 / 6, sum, 1e6);

        Blocks star = Blocks.Find(TestNetworks.Of(Family.Star, 1_000_000));
        Assert.Equal((999_999, 1), (star.Count, star.CutNodes));
        Assert.All(star.Bridges.NodesCutOff.ToArray(), cutOff => Assert.Equal(1, cutOff));
    }

    [Fact]
    public void A_cycle_of_a_million_nodes_is_one_block()
    {
        Blocks cycle = Blocks.Find(TestNetworks.Of(Family.Cycle, 1_000_000));
        Assert.Equal((1, 0, 0, 1_000_000, 1_000_000), (cycle.Count, cycle.Bridges.Count, cycle.CutNodes, cycle.NodesOf(0), cycle.LinksOf(0)));
    }

    [Fact]
    public void Triangles_in_a_chain_and_around_a_hub_are_one_block_each()
    {
        const int triangles = 1000;
        Blocks chain = Blocks.Find(TestNetworks.Unit([.. Enumerable.Range(0, triangles).SelectMany(i => new[]
        {
            (2L * i, (2L * i) + 1), ((2L * i) + 1, (2L * i) + 2), (2L * i, (2L * i) + 2),
        })]));
        Blocks windmill = Blocks.Find(TestNetworks.Unit([.. Enumerable.Range(0, triangles).SelectMany(i => new[]
        {
            (0L, (2L * i) + 1), ((2L * i) + 1, (2L * i) + 2), (0L, (2L * i) + 2),
        })]));
        Assert.Equal((triangles, triangles - 1, 0), (chain.Count, chain.CutNodes, chain.Bridges.Count));
        Assert.Equal((triangles, 1, 0), (windmill.Count, windmill.CutNodes, windmill.Bridges.Count));
        Assert.All(Enumerable.Range(0, triangles), b => Assert.Equal((3, 3), (windmill.NodesOf(b), windmill.LinksOf(b))));
    }

    // Sparse enough for trees, cycles and larger blocks; every third one in several components.
    private static Network Some(int seed) => seed % 3 != 0
        ? TestNetworks.Random(24, 24 + (seed % 9), seed, decades: 0)
        : TestNetworks.Unit([.. Sparse(new Random(seed), 26, 24)]);

    private static HashSet<(long, long)> Sparse(Random random, int nodes, int links)
    {
        HashSet<(long, long)> list = [];
        while (list.Count < links)
        {
            long u = random.Next(nodes), v = random.Next(nodes);
            if (u != v)
                list.Add((Math.Min(u, v), Math.Max(u, v)));
        }
        return list;
    }

    private static IEnumerable<(int U, int V)> Links(Network network)
    {
        for (int u = 0; u < network.NodeCount; u++)
        {
            for (long k = network.FirstLaterArc(u); k < network.RowStart[u + 1]; k++)
                yield return (u, network.Neighbours[k]);
        }
    }

    private static int[] BlocksByRemoval(Network network, List<(int U, int V)> links)
    {
        List<(int, int)> together = [];
        for (int u = 0; u < network.NodeCount; u++)
        {
            int[] part = Parts(network.NodeCount, links.Where(link => link.U != u && link.V != u));
            int[] at = [.. Enumerable.Range(0, links.Count).Where(i => links[i].U == u || links[i].V == u)];
            int Other(int i) => links[i].U == u ? links[i].V : links[i].U;
            together.AddRange(at.SelectMany(i => at.Where(j => part[Other(i)] == part[Other(j)]).Select(j => (i, j))));
        }
        return Parts(links.Count, together);
    }

    // The least element that each is joined to.
    private static int[] Parts(int count, IEnumerable<(int, int)> joined)
    {
        int[] part = [.. Enumerable.Range(0, count)];
        List<(int, int)> pairs = [.. joined];
        for (bool changed = true; changed;)
        {
            changed = false;
            foreach ((int i, int j) in pairs)
            {
                int least = Math.Min(part[i], part[j]);
                changed |= part[i] != least || part[j] != least;
                part[i] = part[j] = least;
            }
        }
        return part;
    }

    private static double Over(int[] part, int which, double[] w) => part.Zip(w).Where(p => p.First == which).Sum(p => p.Second);
}
