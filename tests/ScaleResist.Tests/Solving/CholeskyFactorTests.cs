// The exact factor against dense inverses and determinants, in any order of elimination; solves; threads; refusals.

using MathNet.Numerics.LinearAlgebra;
using ScaleResist.DataGen.Networks;
using ScaleResist.Graphs;
using ScaleResist.Kernels;
using ScaleResist.Solving;

namespace ScaleResist.Tests.Solving;

public unsafe class CholeskyFactorTests
{
    [Theory]
    [InlineData(0)]
    [InlineData(2)]
    public void Inverse_and_determinant_equal_the_dense_ones_in_any_order(double decades)
    {
        for (int seed = 1; seed <= 60; seed++)
        {
            Random random = new(seed);
            int n = random.Next(2, 140);
            Network network = TestNetworks.Random(n, Math.Min(n * (n - 1) / 2, random.Next(n - 1, 5 * n)), seed, decades);
            int[] order = [.. Enumerable.Range(0, n)];
            random.Shuffle(order);
            AssertDense(network, order, 1e-10);
        }
    }

    [Theory]
    [InlineData(Family.Grid, 400)]
    [InlineData(Family.Road, 400)]
    [InlineData(Family.Cube, 343)]
    [InlineData(Family.Preferential, 300)]
    [InlineData(Family.Complete, 150)]
    public void Inverse_and_determinant_equal_the_dense_ones_on_families(Family family, int nodes)
    {
        Network network = TestNetworks.Of(family, nodes, decades: 1);
        AssertDense(network, Shuffled(network.NodeCount), 1e-10);
        AssertDense(network, [.. Enumerable.Range(0, network.NodeCount)], 1e-10);
    }

    private static void AssertDense(Network network, int[] order, double tolerance)
    {
        int n = network.NodeCount, ground = order[^1];
        Matrix<double> grounded = network.DenseLaplacian().RemoveRow(ground).RemoveColumn(ground), dense = grounded.Inverse();
        using CholeskyFactor factor = Factor(network, order);
        SelectedInverse inverse = factor.Invert(1, default);
        double logDeterminant = grounded.Cholesky().DeterminantLn;
        Assert.Equal(logDeterminant, factor.LogDeterminant, tolerance * Math.Max(1, Math.Abs(logDeterminant)));
        for (int u = 0; u < n; u++)
        {
            Near(Dense(u, u), inverse.Diagonal(u));
            for (long k = network.RowStart[u]; k < network.RowStart[u + 1]; k++)
                Near(Dense(u, network.Neighbours[k]), inverse.Between(u, network.Neighbours[k]));
        }
        using Panel<double> b = new(n), x = new(n);
        using SubstitutionWorkspace workspace = factor.NewWorkspace(8);
        for (int j = 0; j < 8; j++)
            b.Row(order[j * n / 8])[j] = 1;
        factor.Solve(b, x, workspace);
        for (int u = 0; u < n; u++)
        {
            for (int j = 0; j < 8; j++)
                Near(Dense(u, order[j * n / 8]), x.Row(u)[j]);
        }

        double Dense(int u, int v) => u == ground || v == ground ? 0 : dense[u - (u > ground ? 1 : 0), v - (v > ground ? 1 : 0)];
        void Near(double expected, double actual) => Assert.Equal(expected, actual, tolerance * expected);
    }

    [Fact]
    public void Float_panels_and_panels_in_place_give_the_same_solutions()
    {
        Network network = TestNetworks.Of(Family.Grid, 900, decades: 2);
        int n = network.NodeCount;
        using CholeskyFactor factor = Factor(network, DissectedGrid.Order(network, 30));
        using Panel<float> bf = new(n), xf = new(n);
        using Panel<double> b = new(n), x = new(n), c = new(n), y = new(n);
        using SubstitutionWorkspace narrow = factor.NewWorkspace(8), wide = factor.NewWorkspace(16);
        Random random = new(3);
        for (int u = 0; u < n; u++)
        {
            for (int j = 0; j < 16; j++)
                (j < 8 ? b : c).Row(u)[j & 7] = bf.Row(u)[j] = (float)(random.NextDouble() - 0.5);
        }
        factor.Solve(bf, xf, wide);
        factor.Solve(b, x, narrow);
        factor.Solve(c, y, narrow);
        factor.Solve(b, b, narrow);
        for (int u = 0; u < n; u++)
        {
            Assert.Equal(x.Row(u).ToArray(), b.Row(u).ToArray());
            for (int j = 0; j < 16; j++)
                Assert.Equal((float)(j < 8 ? x : y).Row(u)[j & 7], xf.Row(u)[j]);
        }
        Assert.Throws<ArgumentException>(() => factor.Solve(bf, xf, narrow));
    }

    [Fact]
    public void Two_threads_solve_side_by_side_with_their_own_panels()
    {
        Network network = TestNetworks.Of(Family.Grid, 10_000);
        using CholeskyFactor factor = Factor(network, DissectedGrid.Order(network, 100));
        double[][] first = new double[2][], again = new double[2][];
        Parallel.For(0, 2, i => first[i] = Solve(i));
        for (int i = 0; i < 2; i++)
            again[i] = Solve(i);
        Assert.Equal(again[0], first[0]);
        Assert.Equal(again[1], first[1]);

        double[] Solve(int seed)
        {
            using Panel<double> b = new(network.NodeCount);
            using SubstitutionWorkspace workspace = factor.NewWorkspace(8);
            Random random = new(seed);
            for (int u = 0; u < network.NodeCount; u++)
                b.Row(u)[u & 7] = random.NextDouble() - 0.5;
            factor.Solve(b, b, workspace);
            return new Span<double>(b.Pointer, 8 * network.NodeCount).ToArray();
        }
    }

    [Theory]
    [InlineData(Family.Grid, 14_400)]
    [InlineData(Family.Road, 20_000)]
    [InlineData(Family.Complete, 700)]
    [InlineData(Family.SmallWorld, 1500)]
    public void One_two_and_three_threads_give_the_same_bits(Family family, int nodes)
    {
        Network network = TestNetworks.Of(family, nodes, decades: 1);
        int[] order = family == Family.Grid
            ? DissectedGrid.Order(network, 120)
            : [.. Enumerable.Range(0, network.NodeCount).OrderBy(u => network.Degree(u)).ThenBy(u => u)];
        SymbolicCholesky symbolic = SymbolicCholesky.Of(network.Laplacian, order);
        using CholeskyFactor one = CholeskyFactor.Of(symbolic, network.Laplacian, 1, default);
        SelectedInverse inverse = one.Invert(1, default);
        foreach (int threads in new[] { 2, 3 })
        {
            using CholeskyFactor more = CholeskyFactor.Of(symbolic, network.Laplacian, threads, default);
            Assert.Equal(one.LogDeterminant, more.LogDeterminant);
            int length = (int)symbolic.StoredEntries;
            Assert.True(new Span<double>(one.Values, length).SequenceEqual(new Span<double>(more.Values, length)));
            SelectedInverse again = more.Invert(threads, default);
            for (int u = 0; u < network.NodeCount; u++)
            {
                Assert.Equal(inverse.Diagonal(u), again.Diagonal(u));
                for (long k = network.FirstLaterArc(u); k < network.RowStart[u + 1]; k++)
                    Assert.Equal(inverse.Between(u, network.Neighbours[k]), again.Between(u, network.Neighbours[k]));
            }
        }
    }

    [Fact]
    public void Scalar_kernels_give_the_same_factor_and_inverse_bit_for_bit()
    {
        Network network = TestNetworks.Of(Family.Grid, 1600, decades: 3);
        int[] order = DissectedGrid.Order(network, 40);
        using CholeskyFactor vector = Factor(network, order);
        SelectedInverse inverse = vector.Invert(1, default), twin;
        PanelKernels.Scalar = true;
        CholeskyFactor scalar;
        try
        {
            scalar = Factor(network, order);
            twin = scalar.Invert(1, default);
        }
        finally
        {
            PanelKernels.Scalar = false;
        }
        using (scalar)
        {
            int length = (int)vector.Symbolic.StoredEntries;
            Assert.True(new Span<double>(vector.Values, length).SequenceEqual(new Span<double>(scalar.Values, length)));
            for (int u = 0; u < network.NodeCount; u++)
                Assert.Equal(inverse.Diagonal(u), twin.Diagonal(u));
        }
    }

    [Theory]
    [InlineData(0.0)]
    [InlineData(-1.0)]
    [InlineData(double.NaN)]
    [InlineData(double.PositiveInfinity)]
    public void A_pivot_that_is_no_positive_number_is_refused(double conductance)
    {
        // Node 0 hangs on node 1 by this one link.
        double[] conductances = [conductance, conductance, 1, 1];
        Laplacian laplacian = new([0, 1, 3, 4], [1, 0, 2, 1], conductances, [conductance, conductance + 1, 1]);
        SymbolicCholesky symbolic = SymbolicCholesky.Of(laplacian, [0, 1, 2]);
        SolveException refusal = Assert.Throws<SolveException>(() => CholeskyFactor.Of(symbolic, laplacian, 1, default));
        Assert.Contains("pivot of node 0", refusal.Message, StringComparison.Ordinal);
    }

    [Fact]
    public void A_single_node_has_one_spanning_tree_and_no_resistance()
    {
        Laplacian laplacian = new([0, 0], [], null, [0]);
        SymbolicCholesky symbolic = SymbolicCholesky.Of(laplacian, [0]);
        using CholeskyFactor factor = CholeskyFactor.Of(symbolic, laplacian, 2, default);
        Assert.Equal(0, factor.LogDeterminant);
        Assert.Equal(0, factor.Invert(2, default).Diagonal(0));
    }

    [Fact]
    public void Entries_of_nodes_without_a_link_are_not_to_be_had()
    {
        Network network = TestNetworks.Of(Family.Path, 4);
        using CholeskyFactor factor = Factor(network, [0, 1, 2, 3]);
        SelectedInverse inverse = factor.Invert(1, default);
        Assert.Throws<ArgumentException>(() => inverse.Between(network.Node(0), network.Node(2)));
    }

    [Fact]
    public void A_cancelled_factorisation_stops()
    {
        Network network = TestNetworks.Of(Family.Grid, 2500);
        SymbolicCholesky symbolic = SymbolicCholesky.Of(network.Laplacian, DissectedGrid.Order(network, 50));
        using CancellationTokenSource cancel = new();
        cancel.Cancel();
        Assert.ThrowsAny<OperationCanceledException>(() => CholeskyFactor.Of(symbolic, network.Laplacian, 2, cancel.Token));
        using CholeskyFactor factor = CholeskyFactor.Of(symbolic, network.Laplacian, 2, default);
        Assert.ThrowsAny<OperationCanceledException>(() => factor.Invert(2, cancel.Token));
    }

    internal static CholeskyFactor Factor(Network network, int[] order, int threads = 1) =>
        CholeskyFactor.Of(SymbolicCholesky.Of(network.Laplacian, order), network.Laplacian, threads, default);

    internal static int[] Shuffled(int n, int seed = 1)
    {
        int[] order = [.. Enumerable.Range(0, n)];
        new Random(seed).Shuffle(order);
        return order;
    }
}
