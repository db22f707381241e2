// Suggested additions against brute force: after every choice all candidates are tried again by dense recomputation.

using MathNet.Numerics.LinearAlgebra;
using ScaleResist.Graphs;
using ScaleResist.Runs;

namespace ScaleResist.Tests.Runs;

public sealed class SuggestionTests
{
    [Fact]
    public void Two_suggestions_on_the_states_equal_brute_force() => AssertOnOpenData("us-states.tsv", 2, Route.Exact);

    [Theory]
    [Trait("Category", "Slow")]
    [InlineData("us-states.tsv", Route.Exact)]
    [InlineData("us-states.tsv", Route.Probe)]
    [InlineData("lesmis.tsv", Route.Exact)]
    public void Ten_suggestions_on_open_data_equal_brute_force(string file, Route route) => AssertOnOpenData(file, 10, route);

    private static void AssertOnOpenData(string file, int most, Route route)
    {
        Network network = TestNetworks.Open(file, file == "lesmis.tsv" ? WeightMeaning.Conductance : WeightMeaning.None);
        MemorySink found = Run(network, new ImpactPlan { Suggest = most, Route = route }, new ImpactInputs());
        double conductance = found["suggestions"].Column<double>("conductance")[0];
        AssertLikeBruteForce(network, found, [.. Unlinked(network).Select(pair => new Candidate(pair.U, pair.V, conductance, null))], null, most, null,
            route == Route.Exact ? 1e-9 : 1e-6);
    }

    [Theory]
    [InlineData(null)]
    [InlineData(7.0)]
    public void Candidates_with_costs_and_node_weights_equal_brute_force(double? budget)
    {
        Network network = TestNetworks.Random(60, 100, 5, 2);
        Random random = new(5);
        Candidate[] candidates = [.. Unlinked(network).Where((_, i) => i % 9 == 0)
            .Select(pair => new Candidate(pair.U, pair.V, 0.1 + random.NextDouble(), 0.5 + random.NextDouble()))];
        double[] weights = [.. Enumerable.Range(0, network.NodeCount).Select(u => (double)(u % 4))];
        MemorySink found = Run(network, new ImpactPlan { Suggest = 8, Budget = budget },
            new ImpactInputs { Candidates = candidates, NodeWeights = weights });
        AssertLikeBruteForce(network, found, candidates, weights, 8, budget, 1e-9);
        if (budget is double most)
        {
            double[] costs = [.. found["suggestions"].Column<double?>("cost").Select(cost => cost!.Value)];
            Assert.InRange(costs.Sum(), 0, most);
            Assert.Equal(found["suggestions"].Column<double>("gain").Zip(costs, (gain, cost) => gain / cost),
                found["suggestions"].Column<double?>("gain_per_cost").Select(gain => gain!.Value));
        }
    }

    [Fact]
    public void Two_components_each_get_their_own_best_link()
    {
        Network network = TestNetworks.Unit((1, 2), (2, 3), (3, 4), (4, 5), (11, 12), (12, 13), (13, 14));
        Candidate[] candidates = [new(network.Node(11), network.Node(14), 1, null), new(network.Node(1), network.Node(5), 1, null)];
        MemorySink found = Run(network, new ImpactPlan { Suggest = 5 }, new ImpactInputs { Candidates = candidates });
        // Paths (n^3 - n)/6 become cycles (n^3 - n)/12 (Lukovits, Nikolic & Trinajstic 1999): 20 to 10, and 10 to 5.
        Assert.Equal([10.0, 5.0], found["suggestions"].Column<double>("gain").Select(gain => Math.Round(gain, 10)));
        Assert.Equal([10.0, 5.0], found["suggestions"].Column<double>("kirchhoff_index_after").Select(after => Math.Round(after, 10)));
    }

    [Fact]
    public void In_a_larger_component_far_nodes_are_found_and_nothing_linked_is_suggested()
    {
        Network network = TestNetworks.Random(400, 520, 3, 1);
        MemorySink found = Run(network, new ImpactPlan { Suggest = 6 }, new ImpactInputs());
        long[] source = found["suggestions"].Column<long>("source"), target = found["suggestions"].Column<long>("target");
        Assert.Equal(6, source.Length);
        for (int i = 0; i < source.Length; i++)
            Assert.Equal(-1, network.FindArc(network.Node(source[i]), network.Node(target[i])));
        // A hundred random links: none may be worth more than the first that is suggested.
        Random random = new(3);
        double conductance = found["suggestions"].Column<double>("conductance")[0];
        Candidate[] others = [.. Unlinked(network).OrderBy(_ => random.Next()).Take(100).Select(pair => new Candidate(pair.U, pair.V, conductance, null))];
        MemorySink tried = Run(network, new ImpactPlan { Suggest = 1 }, new ImpactInputs { Candidates = others });
        Assert.True(found["suggestions"].Column<double>("gain")[0] > tried["suggestions"].Column<double>("gain")[0]);
    }

    private static MemorySink Run(Network network, ImpactPlan plan, ImpactInputs inputs)
    {
        MemorySink sink = new();
        ImpactRun.Execute(network, plan, inputs, sink, new SilentObserver(), default);
        return sink;
    }

    private static IEnumerable<(int U, int V)> Unlinked(Network network)
    {
        for (int u = 0; u < network.Components[0].End; u++)
        {
            for (int v = u + 1; v < network.Components[0].End; v++)
            {
                if (network.FindArc(u, v) < 0)
                    yield return (u, v);
            }
        }
    }

    private static void AssertLikeBruteForce(
        Network network, MemorySink found, Candidate[] candidates, double[]? weights, int most, double? budget, double tolerance)
    {
        int n = network.NodeCount;
        Matrix<double> laplacian = network.DenseLaplacian();
        Matrix<double> identity = Matrix<double>.Build.DenseIdentity(n);
        Vector<double> w = Vector<double>.Build.Dense(n, u => weights?[u] ?? 1);
        double[] gains = found["suggestions"].Column<double>("gain"), after = found["suggestions"].Column<double>("kirchhoff_index_after");
        double index = Index(laplacian), left = budget ?? double.PositiveInfinity, start = index;
        bool[] taken = new bool[candidates.Length];
        for (int rank = 0; rank < most; rank++)
        {
            double[] gain = [.. candidates.Select((candidate, i) => taken[i] || candidate.Cost > left ? double.NegativeInfinity
                : index - Index(With(laplacian, candidate)))];
            double[] value = [.. gain.Select((g, i) => budget is null ? g : g / candidates[i].Cost!.Value)];
            int best = Array.IndexOf(value, value.Max());
            if (double.IsNegativeInfinity(value[best]))
            {
                Assert.Equal(rank, gains.Length);
                return;
            }
            // Where two are equally good, either will do: the one suggested is followed.
            int chosen = Array.FindIndex(candidates, candidate => network.Labels[candidate.U] == Label("source", rank)
                && network.Labels[candidate.V] == Label("target", rank));
            Assert.False(taken[chosen]);
            Assert.InRange(value[chosen], value[best] * (1 - 1e-7), value[best] * (1 + 1e-7));
            Assert.InRange(gains[rank], gain[chosen] - (tolerance * start), gain[chosen] + (tolerance * start));
            laplacian = With(laplacian, candidates[chosen]);
            index = Index(laplacian);
            if (tolerance < 1e-8) // else the index before was probed
                Assert.InRange(after[rank], index * (1 - tolerance), index * (1 + tolerance));
            taken[chosen] = true;
            left -= candidates[chosen].Cost ?? 0;
        }
        Assert.Equal(most, gains.Length);

        double Index(Matrix<double> matrix)
        {
            Matrix<double> pseudo = matrix.Add(1.0 / n).Cholesky().Solve(identity);
            return (w.Sum() * w.PointwiseMultiply(pseudo.Diagonal()).Sum()) - (w * pseudo * w);
        }

        string Label(string column, int rank) => network.Labels.AreIntegers
            ? $"{found["suggestions"].Column<long>(column)[rank]}" : found["suggestions"].Column<string>(column)[rank];

        static Matrix<double> With(Matrix<double> matrix, Candidate candidate)
        {
            Matrix<double> changed = matrix.Clone();
            (int u, int v, double c) = (candidate.U, candidate.V, candidate.Conductance);
            changed[u, u] += c;
            changed[v, v] += c;
            changed[u, v] -= c;
            changed[v, u] -= c;
            return changed;
        }
    }
}
