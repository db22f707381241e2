// Every search, every eccentricity and every sum against Floyd and Warshall's algorithm, on networks small enough for it.

using ScaleResist.DataGen.Networks;
using ScaleResist.Distances;
using ScaleResist.Graphs;

namespace ScaleResist.Tests.Distances;

public class DistanceTests
{
    [Fact]
    public void Random_networks_agree_with_all_pairs() => Compare(0, 300);

    [Fact]
    [Trait("Category", "Slow")]
    public void Two_thousand_random_networks_agree_with_all_pairs() => Compare(0, 2000);

    private static void Compare(int first, int count)
    {
        for (int seed = first; seed < first + count; seed++)
        {
            DistanceCosts costs = CostlyNetworks.Random(seed);
            double[,] all = CostlyNetworks.AllDistances(costs);
            CompareSearches(costs, all);
            CompareEccentricities(costs, all);
            CompareSums(costs, all, seed);
        }
    }

    private static void Equal(DistanceCosts costs, double expected, double actual)
    {
        if (costs.AreWhole || double.IsInfinity(expected))
            Assert.Equal(expected, actual);
        else
            Assert.True(Math.Abs(expected - actual) <= 1e-10 * (1 + Math.Abs(expected)), $"{actual}, not {expected}");
    }

    private static void CompareSearches(DistanceCosts costs, double[,] all)
    {
        int n = costs.Network.NodeCount;
        List<DistanceSearch> searches = [DistanceSearch.For(costs)];
        if (costs.NodeWeights is not null || costs.Network.Lengths is not null)
            searches.Add(new HeapSearch(costs));
        if (costs.AreWhole && costs.LargestStep <= DistanceCosts.LargestBucketStep)
            searches.Add(new BucketSearch(costs));
        foreach (DistanceSearch search in searches)
        {
            for (int u = 0; u < n; u++)
            {
                Component component = search.Search(u);
                for (int v = component.Start; v < component.End; v++)
                    Equal(costs, all[u, v], search.Distances[v]);
            }
        }
        // Two targets for many sources, and the other way about.
        foreach (bool turned in (bool[])[false, true])
        {
            (int, int)[] pairs = [.. Enumerable.Range(0, 2 * n).Select(i => turned ? (i / 2, i % 2 * (n - 1)) : (i % 2 * (n - 1), i / 2))];
            double[] found = PairDistances.Of(costs, pairs, 2, null, default);
            Assert.All(pairs, (p, i) => Equal(costs, all[p.Item1, p.Item2], found[i]));
        }
    }

    private static void CompareEccentricities(DistanceCosts costs, double[,] all)
    {
        int n = costs.Network.NodeCount;
        Eccentricities found = Eccentricities.Of(costs, 2, null, default);
        (double Value, int Farthest)[] direct = Eccentricities.OfSources(costs, [.. Enumerable.Range(0, n)], 2, default);
        for (int u = 0; u < n; u++)
        {
            double expected = Enumerable.Range(0, n).Select(v => all[u, v]).Where(double.IsFinite).Max();
            Equal(costs, expected, found.Values[u]);
            Equal(costs, expected, all[u, found.Farthest[u]]);
            Equal(costs, expected, direct[u].Value);
            Equal(costs, expected, all[u, direct[u].Farthest]);
        }
    }

    private static void CompareSums(DistanceCosts costs, double[,] all, int seed)
    {
        Random random = new(seed);
        foreach (Component component in costs.Network.Components)
        {
            int[] nodes = [.. Enumerable.Range(component.Start, component.Nodes)];
            int[] sources = [.. nodes.Where(_ => random.Next(3) == 0).DefaultIfEmpty(nodes[^1])];
            foreach (bool profile in (bool[])[false, true])
            {
                RouteSumPlan plan = new() { Profile = profile, Threads = 2 };
                Check(RouteSums.Of(costs, component, plan, default), nodes);
                Check(RouteSums.FromSources(costs, component, sources, plan, default), sources);
            }

            void Check(RouteSum sum, int[] from)
            {
                double wiener = 0, weighted = 0, pairs = 0;
                foreach (int u in nodes)
                {
                    foreach (int v in nodes.Where(v => v > u && (from.Contains(u) || from.Contains(v))))
                    {
                        double mean = (all[u, v] + all[v, u]) / 2;
                        wiener += mean;
                        weighted += costs.Weight(u) * costs.Weight(v) * mean;
                        pairs++;
                    }
                }
                Equal(costs, wiener, sum.WienerIndex);
                Assert.Equal(weighted, sum.Weighted, 1e-9 * (1 + weighted));
                Assert.Equal((0.0, sum.WienerIndex, sum.WienerIndex, pairs), (sum.StandardError, sum.Lower, sum.Upper, sum.Pairs));
                foreach (ProfileStep step in sum.Profile)
                {
                    double within = from.Sum(u => nodes.Count(v => v != u && all[u, v] <= step.Distance * (1 + 1e-12)));
                    Assert.Equal(within / from.Length / (nodes.Length - 1), step.Share, 1e-12);
                    Assert.Equal(0, step.Error);
                }
                if (sum.Profile.Count > 0)
                    Assert.Equal(1, sum.Profile[^1].Share, 1e-12);
            }
        }
    }

    [Fact]
    public void Both_directions_differ_by_the_weights_of_the_ends()
    {
        DistanceCosts costs = new(TestNetworks.Unit((0, 1), (1, 2)), null);
        Network network = costs.Network;
        double[] weights = new double[3];
        (weights[network.Node(0)], weights[network.Node(1)], weights[network.Node(2)]) = (5, 2, 0.5);
        costs = new DistanceCosts(network, weights);
        // The end counts and the start does not: 2 + 0.5 one way, 2 + 5 the other.
        Assert.Equal([2.5, 7], PairDistances.Of(costs, [(network.Node(0), network.Node(2)), (network.Node(2), network.Node(0))], 1, null, default));
    }

    [Fact]
    public void Of_parallel_links_the_shortest_counts_and_lengths_alone_cost_nothing_at_nodes()
    {
        Network network = CostlyNetworks.Of(true, (0, 1, 3), (1, 0, 2), (1, 2, 0), (0, 1, 7), (2, 2, 1));
        (int, int)[] pairs = [(network.Node(0), network.Node(2)), (network.Node(1), network.Node(0))];
        Assert.Equal([2.0, 2.0], PairDistances.Of(new DistanceCosts(network), pairs, 1, null, default));
        Assert.Null(network.Conductances);
        Assert.Equal(new CleaningFacts(1, 2), network.Cleaning);
    }

    [Theory]
    [InlineData(Family.Road, 900)]
    [InlineData(Family.Preferential, 900)]
    [InlineData(Family.SmallWorld, 400)]
    public void Five_hundred_and_twelve_searches_at_once_agree_with_one_at_a_time(Family family, int nodes)
    {
        DistanceCosts costs = new(TestNetworks.Of(family, nodes, family == Family.Preferential ? 4 * nodes : null));
        Component component = costs.Network.Components[0];
        int[] sources = [.. Enumerable.Range(0, component.Nodes).Where(u => u * 7 % 5 != 0).Take(HopBatch.Lanes)];
        using HopBatch batch = new(costs.Network);
        batch.Search([sources[0]], component, count: true); // leaves nothing behind
        batch.Search(sources, component, count: true);
        int[] last = new int[component.Nodes];
        HopSearch search = new(costs);
        for (int lane = 0; lane < sources.Length; lane++)
        {
            search.Search(sources[lane]);
            int[] levels = [.. search.Distances[..component.Nodes].Select(d => (int)d)];
            Assert.Equal(levels.Max(), batch.Reach[lane]);
            Assert.Equal(levels.Max(), levels[batch.FarthestOf[lane]]);
            Assert.All(batch.Counts, (counts, level) => Assert.Equal(levels.Count(d => d == level), counts[lane]));
            for (int u = 0; u < last.Length; u++)
                last[u] = Math.Max(last[u], levels[u]);
        }
        Assert.Equal(last, batch.LastLevel);
    }

    [Fact]
    public void Eccentricities_by_batches_agree_with_a_search_from_every_node()
    {
        DistanceCosts costs = new(TestNetworks.Of(Family.Preferential, 6000, 48_000));
        Eccentricities found = Eccentricities.Of(costs, 2, null, default);
        Assert.True(found.Searches > 200, $"{found.Searches} searches: too few to have come to batches");
        (double Value, int Farthest)[] direct = Eccentricities.OfSources(costs, [.. Enumerable.Range(0, 6000)], 2, default);
        Assert.Equal(direct.Select(d => d.Value), found.Values);
        Assert.All(Enumerable.Range(0, 60), i =>
        {
            int u = i * 100;
            double farthest = PairDistances.Of(costs, [(u, found.Farthest[u])], 1, null, default)[0];
            Assert.Equal(found.Values[u], farthest);
        });
    }
}
