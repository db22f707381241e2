// The sampled factor: exact where nothing is sampled, unbiased where it is, a good preconditioner, the same again under the same seed.

using MathNet.Numerics.LinearAlgebra;
using ScaleResist.DataGen.Networks;
using ScaleResist.Graphs;
using ScaleResist.Kernels;
using ScaleResist.Solving;

namespace ScaleResist.Tests.Solving;

public class SampledFactorTests
{
    [Theory]
    [InlineData(Family.Path)]
    [InlineData(Family.Star)]
    public void A_tree_is_factorised_exactly(Family family)
    {
        // Eliminating a leaf samples nothing, so L of the factor is L itself, up to the floats that shares are kept in.
        Network network = TestNetworks.Of(family, 60, decades: 1);
        SampledFactor factor = SampledFactor.Of(network.Laplacian, 1, 3);
        Assert.Equal(0, (Multiply(factor) - Permuted(network, factor)).Enumerate().Max(Math.Abs), 1e-4);
    }

    [Theory]
    [InlineData(1)]
    [InlineData(2)]
    [InlineData(3)]
    public void The_mean_over_seeds_approaches_the_Laplacian(int samples)
    {
        // Each elimination keeps the expectation (Kyng & Sachdeva 2016), so the whole factor's Laplacian has L for its mean. On K_5 with
        // spread conductances, 4,000 seeds: within five standard errors, entry by entry.
        Network network = TestNetworks.Of(Family.Complete, 5, decades: 1);
        const int seeds = 4000;
        Matrix<double> sum = Matrix<double>.Build.Dense(5, 5), squares = Matrix<double>.Build.Dense(5, 5);
        for (ulong seed = 0; seed < seeds; seed++)
        {
            SampledFactor factor = SampledFactor.Of(network.Laplacian, samples, seed);
            Matrix<double> product = Multiply(factor);
            Matrix<double> back = Matrix<double>.Build.Dense(5, 5, (u, v) =>
                product[Array.IndexOf(factor.Order, u), Array.IndexOf(factor.Order, v)]);
            sum += back;
            squares += back.PointwisePower(2);
        }
        Matrix<double> mean = sum / seeds;
        Matrix<double> error = ((squares / seeds) - mean.PointwisePower(2)).Map(x => Math.Sqrt(Math.Max(x, 0) / seeds));
        Matrix<double> exact = network.DenseLaplacian();
        for (int u = 0; u < 5; u++)
        {
            for (int v = 0; v < 5; v++)
                Assert.Equal(exact[u, v], mean[u, v], (5 * error[u, v]) + 1e-5);
        }
    }

    [Theory]
    [InlineData(Family.Grid, 2500, 0, 2)]
    [InlineData(Family.Road, 4000, 3, 2)]
    [InlineData(Family.Grid, 2500, 6, 2)]
    [InlineData(Family.SmallWorld, 2000, 2, 1)]
    public void It_preconditions_to_a_small_condition_number(Family family, int nodes, double decades, int samples)
    {
        Network network = TestNetworks.Of(family, nodes, decades: decades);
        Laplacian core = Elimination.Of(network.Laplacian, network.Components[0]).BuildCore();
        SampledFactor factor = SampledFactor.Of(core, samples, 1);
        int n = core.NodeCount;
        using Panel<double> b = new(n), x = new(n);
        using GradientWorkspace<double> workspace = new(n);
        SolveReport report = new();
        for (int j = 0; j < 8; j++)
        {
            b.Row(j)[j] = 1;
            b.Row(n - 1 - j)[j] = -1;
        }
        SampledElimination<double> preconditioned = new(ComponentSolver.Renumbered(core, factor.Order), factor);
        ConjugateGradient.Solve(preconditioned, b, x, workspace, 0, n, default, SolveLimits.For(1e-8, n), report, default);
        Assert.InRange(report.Iterations, 1, 80);
        Assert.All(report.EnergyErrors[..8], error => Assert.InRange(error, 0, 1e-8));
    }

    [Theory]
    [InlineData(Family.Cube, 1000, 0)]
    [InlineData(Family.Complete, 400, 1)] // nothing independent: one node at a time
    [InlineData(Family.SmallWorld, 5000, 6)]
    public void The_same_seed_gives_the_same_factor_and_every_predecessor_comes_first(Family family, int nodes, double decades)
    {
        Network network = TestNetworks.Of(family, nodes, decades: decades);
        SampledFactor one = SampledFactor.Of(network.Laplacian, 2, 5), two = SampledFactor.Of(network.Laplacian, 2, 5);
        Assert.Equal(one.Order, two.Order);
        Assert.Equal(one.ColumnShares, two.ColumnShares);
        Assert.NotEqual(one.ColumnShares, SampledFactor.Of(network.Laplacian, 2, 6).ColumnShares);
        Assert.Equal(Enumerable.Range(0, network.NodeCount), one.Order.Order());
        for (int v = 0; v < network.NodeCount; v++)
        {
            double shares = 0;
            for (long k = one.ColumnStart[v]; k < one.ColumnStart[v + 1]; k++)
            {
                Assert.True(one.Successors[k] > v);
                shares += one.ColumnShares[k];
            }
            Assert.Equal(v == network.NodeCount - 1 ? 0 : 1, shares, 1e-5);
        }
        Assert.Equal(0, one.Inverse[^1]);
    }

    [Theory]
    [InlineData(Family.Cube, 30_000, 0)]
    [InlineData(Family.Road, 30_000, 6)]
    public void The_number_of_threads_does_not_change_the_factor(Family family, int nodes, double decades)
    {
        Laplacian laplacian = TestNetworks.Of(family, nodes, decades: decades).Laplacian;
        SampledFactor one = SampledFactor.Of(laplacian, 2, 5, threads: 1), four = SampledFactor.Of(laplacian, 2, 5, threads: 4);
        Assert.Equal(one.Order, four.Order);
        Assert.Equal(one.ColumnStart, four.ColumnStart);
        Assert.Equal(one.Successors, four.Successors);
        Assert.Equal(one.ColumnShares, four.ColumnShares);
        Assert.Equal(one.Inverse, four.Inverse);
        Assert.Equal(one.RowShares, four.RowShares);
    }

    [Fact]
    public void Several_samples_an_entry_keep_the_factor_of_a_cubic_grid_sparse()
    {
        // Two samples at every star, however large, came to 30 entries a node on a cube of 10^6 nodes.
        Network network = TestNetworks.Of(Family.Cube, 64_000);
        foreach (int samples in new[] { 1, 2, 3 })
            Assert.InRange(SampledFactor.Of(network.Laplacian, samples, 1).Successors.Length, 0, 20L * network.NodeCount);
    }

    [Fact]
    public void A_hub_of_a_hundred_thousand_links_takes_near_linear_time()
    {
        EdgeListBuilder builder = new(weighted: false);
        for (long i = 1; i <= 100_000; i++)
        {
            builder.Add(0, i);
            builder.Add(i, (i % 100_000) + 1);
            builder.Add(i, ((i + 316) % 100_000) + 1);
        }
        Network network = NetworkBuilder.Build(builder.Finish(
            new InputFacts { Path = "hub", Form = "memory", Sha256 = "", Columns = ["1", "2"] }));
        long start = System.Diagnostics.Stopwatch.GetTimestamp();
        SampledFactor factor = SampledFactor.Of(network.Laplacian, 1, 1);
        Assert.InRange(System.Diagnostics.Stopwatch.GetElapsedTime(start).TotalSeconds, 0, 10);
        Assert.InRange(factor.Successors.Length, 100_000, 10 * network.LinkCount);
    }

    // L of the factor is (I - C) D (I - C)' with C holding the shares of column v in rows w > v and D the pivots.
    private static Matrix<double> Multiply(SampledFactor factor)
    {
        int n = factor.Order.Length;
        Matrix<double> lower = Matrix<double>.Build.DenseIdentity(n), pivots = Matrix<double>.Build.Dense(n, n);
        for (int v = 0; v < n; v++)
        {
            pivots[v, v] = factor.Inverse[v] > 0 ? 1 / (double)factor.Inverse[v] : 0;
            for (long k = factor.ColumnStart[v]; k < factor.ColumnStart[v + 1]; k++)
                lower[factor.Successors[k], v] = -factor.ColumnShares[k];
        }
        return lower * pivots * lower.Transpose();
    }

    private static Matrix<double> Permuted(Network network, SampledFactor factor)
    {
        Matrix<double> dense = network.DenseLaplacian();
        return Matrix<double>.Build.Dense(factor.Order.Length, factor.Order.Length, (u, v) => dense[factor.Order[u], factor.Order[v]]);
    }
}
