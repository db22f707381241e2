// Algebraic connectivity and the weakest cut: closed forms, published values, both routes; and indices with weights against dense matrices.

using MathNet.Numerics.LinearAlgebra;
using ScaleResist.DataGen.Networks;
using ScaleResist.Estimating;
using ScaleResist.Graphs;
using ScaleResist.Runs;

namespace ScaleResist.Tests.Runs;

public sealed class ConnectivityTests
{
    // Fiedler, Czech. Math. J. 23:298, 1973: path 2 - 2 cos(pi/n), cycle 2 - 2 cos(2 pi/n), K_n n, star 1, hypercube 2; a k x k grid as the path of k.
    [Theory]
    [InlineData(Family.Path, 2, 2)]
    [InlineData(Family.Path, 50, 0.003946543143456882)]
    [InlineData(Family.Path, 3000, 1.09662261101704e-6)]
    [InlineData(Family.Cycle, 50, 0.01577059737104434)]
    [InlineData(Family.Complete, 20, 20)]
    [InlineData(Family.Star, 20, 1)]
    [InlineData(Family.Hypercube, 256, 2)]
    [InlineData(Family.Grid, 900, 0.010956209263453)]
    public void Families_have_their_closed_forms_on_both_routes(Family family, int nodes, double value)
    {
        foreach (Route route in new[] { Route.Exact, Route.Probe })
        {
            ConnectivityFacts found = Find(TestNetworks.Of(family, nodes), route, out double? column);
            Assert.Equal(1, column!.Value / value, route == Route.Exact ? 1e-9 : 1e-6);
            Assert.True(found.Residual <= 1e-2 * value);
        }
    }

    // KONECT publishes 0.468525 and 0.00075921; further digits as the note in tests/data gives them.
    [Theory]
    [InlineData("karate.tsv", 0.46852523)]
    [InlineData("dolphins.tsv", 0.1729733)]
    [InlineData("power.tsv", 0.00075921221)]
    [InlineData("netscience.tsv", 0.015203791)]
    public void Open_networks_have_their_published_value(string file, double value)
    {
        foreach (Route route in new[] { Route.Exact, Route.Probe })
        {
            Find(TestNetworks.Open(file), route, out double? column);
            Assert.Equal(1, column!.Value / value, 1e-6);
        }
    }

    [Fact]
    public void Two_cliques_joined_by_two_links_are_split_between_them()
    {
        List<(long, long, double)> links = [(0, 100, 0.25), (1, 101, 0.5)];
        for (int i = 0; i < 12; i++)
        {
            for (int j = 0; j < i; j++)
            {
                links.Add((i, j, 1));
                if (i < 10)
                    links.Add((100 + i, 100 + j, 1));
            }
        }
        ConnectivityFacts cut = Find(TestNetworks.Of([.. links]), Route.Exact, out _);
        Assert.Equal((10, 12, 2L, 0.75), (cut.SmallerSide, cut.LargerSide, cut.LinksCut, cut.ConductanceCut));
    }

    [Fact]
    public void The_weakest_cut_does_not_depend_on_threads()
    {
        Network network = TestNetworks.Of(Family.Road, 20_000);
        foreach (Route route in new[] { Route.Exact, Route.Probe })
            Assert.Equal(Find(network, route, out _, 1), Find(network, route, out _, 2));
    }

    // Kemeny's constant is the sum of 1/(1 - mu) over the eigenvalues mu < 1 of the transition matrix, the degree-Kirchhoff index 2 m_c times it
    // (Chen & Zhang 2007, from memory); eigenvalues by MathNet.Numerics.
    [Theory]
    [InlineData(Route.Exact, 1e-8)]
    [InlineData(Route.Probe, 0.03)]
    public void Indices_with_weights_are_those_of_dense_matrices(Route route, double tolerance)
    {
        for (int seed = 1; seed <= 5; seed++)
        {
            Network network = TestNetworks.Random(80, 160, seed, 1);
            double[] weights = [.. Enumerable.Range(0, 80).Select(i => i * seed % 7.0)];
            double[] strengths = network.Strengths;
            Matrix<double> walk = Matrix<double>.Build.Dense(80, 80, (i, j) =>
                i == j ? 0 : -network.DenseLaplacian()[i, j] / Math.Sqrt(strengths[i] * strengths[j]));
            double kemeny = walk.Evd(Symmetricity.Symmetric).EigenValues.Select(mu => mu.Real).Order().Take(79).Sum(mu => 1 / (1 - mu));
            Matrix<double> inverse = network.DensePseudoInverse();
            Vector<double> w = Vector<double>.Build.Dense(weights);
            double weighted = (w.Sum() * (w * inverse.Diagonal())) - (w * inverse * w);
            MemorySink sink = new();
            EstimateRun.Execute(
                network, new EstimatePlan { Route = route, Want = Want.Index, Probes = route == Route.Probe ? 1024 : null },
                new EstimateInputs { NodeWeights = weights }, sink, new SilentObserver(), default);
            Assert.Equal(1, sink["index"].Column<double>("kemeny_constant")[0] / kemeny, tolerance);
            Assert.Equal(1, sink["index"].Column<double>("degree_kirchhoff_index")[0] / (strengths.Sum() * kemeny), tolerance);
            Assert.Equal(1, sink["index"].Column<double?>("node_weighted_kirchhoff_index")[0]!.Value / weighted, tolerance);
        }
    }

    private static ConnectivityFacts Find(Network network, Route route, out double? column, int threads = 2)
    {
        MemorySink sink = new();
        EstimateSummary summary = EstimateRun.Execute(
            network, new EstimatePlan { Route = route, Want = Want.Index, Threads = threads }, new EstimateInputs(), sink, new SilentObserver(), default);
        column = sink["index"].Column<double?>("algebraic_connectivity")[0];
        Assert.True(column is null || column == summary.Connectivity!.Value);
        return summary.Connectivity!;
    }
}
