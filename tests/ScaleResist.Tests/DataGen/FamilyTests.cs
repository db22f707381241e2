// The families against their closed forms and their definitions.

using ScaleResist.DataGen.Networks;

namespace ScaleResist.Tests.DataGen;

public class FamilyTests
{
    [Theory]
    [InlineData(Family.Path, 17, 17, 16)]
    [InlineData(Family.Cycle, 17, 17, 17)]
    [InlineData(Family.Star, 17, 17, 16)]
    [InlineData(Family.Complete, 17, 17, 136)]
    [InlineData(Family.Grid, 110, 100, 180)]
    [InlineData(Family.Grid, 99, 81, 144)]
    [InlineData(Family.Torus, 110, 100, 200)]
    [InlineData(Family.Torus, 9, 9, 18)]
    [InlineData(Family.Cube, 64, 64, 144)]
    [InlineData(Family.Cube, 63, 27, 54)]
    [InlineData(Family.Hypercube, 17, 16, 32)]
    [InlineData(Family.Hypercube, 1000, 1024, 5120)]
    [InlineData(Family.Ladder, 17, 16, 22)]
    [InlineData(Family.Road, 1000, 1000, 1300)]
    [InlineData(Family.Preferential, 1000, 1000, 5000)]
    [InlineData(Family.SmallWorld, 1000, 1000, 3000)]
    [InlineData(Family.PowerLaw, 1000, 1024, 8192)]
    [InlineData(Family.Fringe, 1000, 1000, 1400)]
    public void Node_and_link_counts_follow_the_closed_form(Family family, long asked, long nodes, long links)
    {
        CollectedNetwork network = CollectedNetwork.Of(family, asked);
        Assert.Equal(nodes, network.Nodes);
        Assert.Equal(links, network.Links.Count);
    }

    [Theory]
    [InlineData(Family.Path)]
    [InlineData(Family.Cycle)]
    [InlineData(Family.Star)]
    [InlineData(Family.Complete)]
    [InlineData(Family.Grid)]
    [InlineData(Family.Torus)]
    [InlineData(Family.Cube)]
    [InlineData(Family.Hypercube)]
    [InlineData(Family.Ladder)]
    [InlineData(Family.Road)]
    [InlineData(Family.Preferential)]
    [InlineData(Family.SmallWorld)]
    [InlineData(Family.Fringe)]
    public void Networks_are_simple_and_connected_at_every_size(Family family)
    {
        int largest = family == Family.Complete ? 60 : 400;
        for (long nodes = 2; nodes <= largest; nodes++)
        {
            FamilyPlan plan = new(family, nodes, Seed: (ulong)nodes);
            if (!plan.TrySize(out _, out string? problem))
            {
                Assert.Contains("--nodes", problem);
                Assert.True(nodes < 110, $"{nodes} nodes were refused.");
                continue;
            }
            CollectedNetwork network = CollectedNetwork.Of(family, nodes, seed: (ulong)nodes);
            Assert.Equal(0, network.SelfLoops());
            Assert.Equal(0, network.ParallelLinks());
            Assert.Equal(1, network.Components());
            Assert.All(network.Links, link => Assert.InRange(Math.Max(link.Source, link.Target), 0, network.Nodes - 1));
        }
    }

    [Theory]
    [InlineData(Family.Cycle, 50, 2)]
    [InlineData(Family.Complete, 50, 49)]
    [InlineData(Family.Torus, 50, 4)]
    [InlineData(Family.Hypercube, 64, 6)]
    public void Regular_families_have_one_degree(Family family, long nodes, int degree) =>
        Assert.All(CollectedNetwork.Of(family, nodes).Degrees(), found => Assert.Equal(degree, found));

    [Theory]
    [InlineData(Family.Path, 50, new[] { 0, 2, 48 })]
    [InlineData(Family.Star, 5, new[] { 0, 4, 0, 0, 1 })]
    [InlineData(Family.Grid, 100, new[] { 0, 0, 4, 32, 64 })]
    [InlineData(Family.Cube, 125, new[] { 0, 0, 0, 8, 36, 54, 27 })]
    [InlineData(Family.Ladder, 50, new[] { 0, 0, 4, 46 })]
    public void Lattices_have_the_degrees_of_corners_edges_and_inside(Family family, long nodes, int[] nodesOfDegree)
    {
        int[] degrees = CollectedNetwork.Of(family, nodes).Degrees();
        Assert.Equal(nodesOfDegree, Enumerable.Range(0, nodesOfDegree.Length).Select(d => degrees.Count(found => found == d)));
    }

    [Theory]
    [InlineData(1_000)]
    [InlineData(50_000)]
    public void Roads_are_sparse_with_most_nodes_on_chains(long nodes)
    {
        CollectedNetwork network = CollectedNetwork.Of(Family.Road, nodes, seed: 3);
        int[] degrees = network.Degrees();
        Assert.InRange(2.0 * network.Links.Count / network.Nodes, 2.5, 2.7);
        Assert.True(network.Links.Count <= (3 * network.Nodes) - 6);
        Assert.True(degrees.Count(d => d == 2) > 0.55 * nodes);
        Assert.True(degrees.Max() <= 4);
    }

    [Fact]
    public void Road_numbers_are_mostly_but_not_always_near_along_a_link()
    {
        CollectedNetwork network = CollectedNetwork.Of(Family.Road, 50_000);
        int near = network.Links.Count(link => Math.Abs(link.Source - link.Target) < 200);
        Assert.InRange((double)near / network.Links.Count, 0.9, 0.999);
    }

    [Fact]
    public void Roads_have_long_chains()
    {
        // Along a chain node numbers follow one another, and its inner nodes have degree 2.
        CollectedNetwork network = CollectedNetwork.Of(Family.Road, 50_000);
        int[] degrees = network.Degrees();
        int longest = 0;
        int current = 0;
        foreach ((long source, long target) in network.Links)
        {
            current = target == source + 1 && degrees[source] == 2 && degrees[target] == 2 ? current + 1 : 0;
            longest = Math.Max(longest, current);
        }
        Assert.True(longest >= 12, $"The longest chain has {longest} links.");
    }

    [Fact]
    public void Preferential_attachment_meets_the_links_asked_for_and_grows_hubs()
    {
        CollectedNetwork network = CollectedNetwork.Of(Family.Preferential, 20_000, 50_000);
        int[] degrees = network.Degrees();
        Assert.Equal(50_000, network.Links.Count);
        Assert.True(degrees.Min() >= 2);
        // The degree distribution falls with the third power, so the largest degree is of order k sqrt(n): 350.
        Assert.InRange(degrees.Max(), 100, 2_000);
        Assert.True(degrees.Take(100).Average() > 10 * degrees.Average());
    }

    [Fact]
    public void Preferential_attachment_of_one_link_a_node_is_a_tree()
    {
        CollectedNetwork network = CollectedNetwork.Of(Family.Preferential, 500, 499);
        Assert.Equal(1, network.Components());
    }

    [Fact]
    public void Small_world_rewires_one_link_in_twenty()
    {
        CollectedNetwork network = CollectedNetwork.Of(Family.SmallWorld, 20_000, 80_000);
        int far = network.Links.Count(link => Gap(link, 20_000) > 4);
        // 80,000 trials of probability 0.05: standard deviation 62.
        Assert.InRange(far, 4_000 - 310, 4_000 + 310);
        Assert.Equal(8.0, network.Degrees().Average());
        Assert.Equal(1, network.Components());
        Assert.Equal(0, network.ParallelLinks());
    }

    [Fact]
    public void Power_law_has_a_heavy_tail_and_no_self_loops()
    {
        CollectedNetwork network = CollectedNetwork.Of(Family.PowerLaw, 1 << 16, 500_000);
        int[] degrees = network.Degrees();
        Array.Sort(degrees);
        Assert.Equal(0, network.SelfLoops());
        Assert.Equal(500_000, network.Links.Count);
        // A network of 2^16 nodes with links placed evenly would have no degree above 40.
        Assert.True(degrees[^1] > 1_000, $"The largest degree is {degrees[^1]}.");
        double topShare = degrees.TakeLast(655).Sum() / 1_000_000.0;
        Assert.True(topShare > 0.15, $"One node in a hundred has {topShare:P1} of the link ends.");
    }

    [Fact]
    public void Power_law_fills_the_quadrants_with_their_probabilities()
    {
        CollectedNetwork network = CollectedNetwork.Of(Family.PowerLaw, 1 << 16, 200_000);
        const long half = 1 << 15;
        double Share(bool lower, bool right) =>
            network.Links.Count(link => link.Source >= half == lower && link.Target >= half == right) / 200_000.0;
        // Four standard deviations of 200,000 trials are at most 0.0045; conditioning on source != target moves less than 0.002.
        Assert.Equal(0.57, Share(false, false), 0.006);
        Assert.Equal(0.19, Share(false, true), 0.006);
        Assert.Equal(0.19, Share(true, false), 0.006);
        Assert.Equal(0.05, Share(true, true), 0.006);
    }

    [Fact]
    public void Fringe_keeps_most_nodes_in_trees()
    {
        CollectedNetwork network = CollectedNetwork.Of(Family.Fringe, 10_000);
        // Peel nodes of degree 1 until none is left: what remains is the core.
        int[] degrees = network.Degrees();
        List<long>[] neighbours = new List<long>[10_000];
        for (int v = 0; v < neighbours.Length; v++)
            neighbours[v] = [];
        foreach ((long source, long target) in network.Links)
        {
            neighbours[source].Add(target);
            neighbours[target].Add(source);
        }
        Stack<long> leaves = new(Enumerable.Range(0, 10_000).Where(v => degrees[v] == 1).Select(v => (long)v));
        int peeled = 0;
        while (leaves.TryPop(out long leaf))
        {
            peeled++;
            foreach (long neighbour in neighbours[leaf])
            {
                if (--degrees[neighbour] == 1)
                    leaves.Push(neighbour);
            }
        }
        Assert.Equal(9_000, peeled);
    }

    [Theory]
    [InlineData(Family.Preferential, 100, 98)]
    [InlineData(Family.Preferential, 100, 4951)]
    [InlineData(Family.SmallWorld, 100, 49)]
    [InlineData(Family.SmallWorld, 100, 5000)]
    [InlineData(Family.Fringe, 1000, 998)]
    [InlineData(Family.Grid, 100, 180)]
    [InlineData(Family.Road, 100, 130)]
    [InlineData(Family.PowerLaw, 100, 0)]
    public void Links_that_the_family_cannot_have_are_refused(Family family, long nodes, long links)
    {
        FamilyPlan plan = new(family, nodes, links);
        Assert.False(plan.TrySize(out _, out string? problem));
        Assert.Contains("--links", problem);
        Assert.Throws<ArgumentException>(() => NetworkGenerator.Generate(plan, CollectedNetwork.Of(Family.Path, 2)));
    }

    [Theory]
    [InlineData(Family.Preferential, 100, 99)]
    [InlineData(Family.Preferential, 100, 4950)]
    [InlineData(Family.SmallWorld, 100, 4900)]
    [InlineData(Family.Fringe, 1000, 999)]
    public void The_fewest_and_the_most_links_allowed_are_generated(Family family, long nodes, long links)
    {
        CollectedNetwork network = CollectedNetwork.Of(family, nodes, links);
        Assert.Equal(links, network.Links.Count);
        Assert.Equal(1, network.Components());
        Assert.Equal(0, network.ParallelLinks());
    }

    [Theory]
    [InlineData(Family.Road)]
    [InlineData(Family.Preferential)]
    [InlineData(Family.PowerLaw)]
    [InlineData(Family.SmallWorld)]
    [InlineData(Family.Fringe)]
    public void The_seed_decides_the_network(Family family)
    {
        List<(long, long)> first = CollectedNetwork.Of(family, 1_000, seed: 5).Links;
        Assert.Equal(first, CollectedNetwork.Of(family, 1_000, seed: 5).Links);
        Assert.NotEqual(first, CollectedNetwork.Of(family, 1_000, seed: 6).Links);
    }

    private static long Gap((long Source, long Target) link, long nodes)
    {
        long gap = Math.Abs(link.Source - link.Target);
        return Math.Min(gap, nodes - gap);
    }
}
