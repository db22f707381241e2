// Wiener index, diameter and mean distance against published values and closed forms, and sampled sums against exact ones.

using MathNet.Numerics.LinearAlgebra;
using ScaleResist.DataGen.Networks;
using ScaleResist.Distances;
using ScaleResist.Graphs;

namespace ScaleResist.Tests.Distances;

public class PublishedDistanceTests
{
    // data/README.md: computed with numpy and scipy from all pairs of the largest component. The searches are ours, and may only fall.
    [Theory]
    [InlineData("karate.tsv", 1351, 5, 17)]
    [InlineData("dolphins.tsv", 6348, 8, 11)]
    [InlineData("lesmis.tsv", 7728, 5, 5)]
    [InlineData("netscience.tsv", 432785, 17, null)]
    [InlineData("power.tsv", 231749146, 46, 51)]
    [InlineData("us-states.tsv", 4896, 11, 14)]
    public void Open_networks_have_the_published_Wiener_index_and_diameter(string file, double wiener, double diameter, int? searches)
    {
        DistanceCosts costs = new(TestNetworks.Open(file));
        Component largest = costs.Network.Components[0];
        RouteSum sum = RouteSums.Of(costs, largest, new RouteSumPlan(), default);
        Assert.Equal(wiener, sum.WienerIndex);
        Assert.Equal(largest.Nodes * (largest.Nodes - 1.0) / 2, sum.Pairs);
        Eccentricities found = Eccentricities.Of(costs, 1, null, default);
        Assert.Equal(diameter, found.Values[..largest.Nodes].Max());
        Assert.True(found.Searches <= (searches ?? int.MaxValue), $"{found.Searches} searches");
    }

    // Path (n^3 - n)/6 and star (n-1)^2 (Wiener 1947; Gutman 1994), cycle n^3/8 or n(n^2-1)/8, grid of a x b nodes ab(a+b)(ab-1)/6, hypercube d 4^(d-1).
    [Theory]
    [InlineData(Family.Path, 101, 171_700, 100, 50)]
    [InlineData(Family.Star, 50, 2401, 2, 1)]
    [InlineData(Family.Cycle, 40, 8000, 20, 20)]
    [InlineData(Family.Cycle, 41, 8610, 20, 20)]
    [InlineData(Family.Grid, 400, 1_064_000, 38, 20)]
    [InlineData(Family.Hypercube, 1024, 2_621_440, 10, 10)]
    public void Families_have_their_closed_forms(Family family, int nodes, double wiener, double diameter, double radius)
    {
        DistanceCosts costs = new(TestNetworks.Of(family, nodes));
        Component component = costs.Network.Components[0];
        foreach (bool profile in (bool[])[false, true])
            Assert.Equal(wiener, RouteSums.Of(costs, component, new RouteSumPlan { Profile = profile }, default).WienerIndex);
        Eccentricities found = Eccentricities.Of(costs, 1, null, default);
        Assert.Equal((diameter, radius), (found.Values.Max(), found.Values.Min()));
    }

    // Wiener index and Kirchhoff index are the same on trees, and only there (Klein & Randic, J. Math. Chem. 12:81, 1993).
    [Fact]
    public void On_trees_the_Wiener_index_is_the_Kirchhoff_index()
    {
        for (int seed = 1; seed <= 20; seed++)
        {
            Network tree = TestNetworks.Random(20 + seed, 19 + seed, seed, decades: 0);
            Matrix<double> inverse = tree.DensePseudoInverse();
            double wiener = RouteSums.Of(new DistanceCosts(tree), tree.Components[0], new RouteSumPlan(), default).WienerIndex;
            Assert.Equal(tree.NodeCount * inverse.Trace(), wiener, 1e-8 * wiener);
        }
    }

    [Fact]
    public void A_profile_of_a_path_counts_its_pairs()
    {
        DistanceCosts costs = new(TestNetworks.Of(Family.Path, 11));
        RouteSum sum = RouteSums.Of(costs, costs.Network.Components[0], new RouteSumPlan { Profile = true }, default);
        // Of 55 pairs 11 - k are k apart.
        Assert.Equal(Enumerable.Range(1, 10).Select(k => (double)k), sum.Profile.Select(step => step.Distance));
        Assert.All(sum.Profile, (step, i) => Assert.Equal(Enumerable.Range(1, i + 1).Sum(k => 11 - k) / 55.0, step.Share, 1e-14));
    }

    [Fact]
    public void Sampled_intervals_cover_the_exact_index_in_95_of_100_runs_or_nearly() => Cover(Family.Road, 3000, 40, 1);

    [Theory]
    [Trait("Category", "Slow")]
    [InlineData(Family.Road, 20_000)]
    [InlineData(Family.Preferential, 20_000)]
    [InlineData(Family.Grid, 10_000)]
    public void Sampled_intervals_cover_over_100_seeds(Family family, int nodes) => Cover(family, nodes, 100, 1000);

    // Fewer than 89 of 100 (or 33 of 40) would happen once in 200 samples of intervals of 95 %.
    private static void Cover(Family family, int nodes, int seeds, ulong first)
    {
        Network network = TestNetworks.Of(family, nodes, family == Family.Preferential ? 8 * nodes : null);
        Random random = new(3);
        double[] weights = [.. Enumerable.Range(0, network.NodeCount).Select(_ => (double)random.Next(1, 20))];
        DistanceCosts costs = new(network, family == Family.Road ? weights : null);
        Component component = network.Components[0];
        RouteSum exact = RouteSums.Of(costs, component, new RouteSumPlan { Threads = 2, Profile = true }, default);
        int covered = 0, profiles = 0, steps = 0;
        double square = 0, weighted = 0, claimed = 0;
        for (int i = 0; i < seeds; i++)
        {
            RouteSumPlan plan = new() { AffordableWork = 0, Seed = first + (ulong)i, Threads = 2, Profile = true };
            RouteSum sum = RouteSums.Of(costs, component, plan, default);
            Assert.True(sum.StandardError > 0 && sum.Sources < network.NodeCount / 2);
            covered += exact.WienerIndex >= sum.Lower && exact.WienerIndex <= sum.Upper ? 1 : 0;
            square += Math.Pow((sum.WienerIndex / exact.WienerIndex) - 1, 2);
            weighted += Math.Pow((sum.Weighted / exact.Weighted) - 1, 2);
            claimed += Math.Pow(sum.StandardError / exact.WienerIndex, 2);
            ProfileStep middle = sum.Profile[sum.Profile.Count / 2];
            ProfileStep truth = exact.Profile.First(s => Math.Abs(s.Distance - middle.Distance) < 1e-9);
            profiles += Math.Abs(middle.Share - truth.Share) <= 2 * middle.Error ? 1 : 0;
            steps++;
        }
        Assert.InRange(covered, seeds == 100 ? 89 : 33, seeds);
        Assert.InRange(profiles, 0.85 * steps, steps);
        Assert.InRange(Math.Sqrt(square / seeds), 0, 0.01);
        Assert.InRange(Math.Sqrt(weighted / seeds), 0, 0.02);
        Assert.InRange(Math.Sqrt(square / claimed), 0.7, 1.4);
    }
}
