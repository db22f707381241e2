// The exact factor against closed forms and exact integer arithmetic: spanning trees, resistances of links, conductances over six decades.

using System.Numerics;
using ScaleResist.DataGen.Networks;
using ScaleResist.Graphs;
using ScaleResist.Solving;

namespace ScaleResist.Tests.Solving;

public class CholeskyClosedFormTests
{
    [Theory]
    [InlineData(2)]
    [InlineData(9)]
    [InlineData(40)]
    [InlineData(300)]
    public void A_complete_graph_has_n_to_the_n_minus_2_spanning_trees_and_links_of_resistance_2_over_n(int n)
    {
        // Cayley 1889
        Network network = TestNetworks.Of(Family.Complete, n);
        AssertTrees(network, CholeskyFactorTests.Shuffled(n), (n - 2) * Math.Log(n), (_, _) => 2.0 / n);
    }

    [Theory]
    [InlineData(1, 5)]
    [InlineData(7, 3)]
    [InlineData(60, 25)]
    public void A_complete_bipartite_graph_has_its_number_of_spanning_trees(int one, int other)
    {
        // m^(n-1) n^(m-1) (Fiedler & Sedlacek 1958), and by symmetry and Foster R = (m + n - 1)/(m n) on every link.
        Network network = TestNetworks.Unit(
            [.. Enumerable.Range(0, one).SelectMany(i => Enumerable.Range(one, other).Select(j => ((long)i, (long)j)))]);
        double trees = ((other - 1) * Math.Log(one)) + ((one - 1) * Math.Log(other));
        double resistance = (one + other - 1.0) / (one * other);
        AssertTrees(network, CholeskyFactorTests.Shuffled(one + other), trees, (_, _) => resistance);
    }

    [Theory]
    [InlineData(3)]
    [InlineData(20)]
    [InlineData(130)]
    public void A_square_grid_has_its_number_of_spanning_trees(int side)
    {
        // The product of the eigenvalues 4 sin^2(pi i/2a) + 4 sin^2(pi j/2a) but the first, over n (Kirchhoff 1847).
        double trees = -2 * Math.Log(side);
        for (int i = 0; i < side; i++)
        {
            for (int j = 0; j < side; j++)
            {
                double a = Math.Sin(Math.PI * i / (2 * side)), b = Math.Sin(Math.PI * j / (2 * side));
                trees += i + j == 0 ? 0 : Math.Log(4 * ((a * a) + (b * b)));
            }
        }
        Network network = TestNetworks.Of(Family.Grid, side * side);
        AssertTrees(network, DissectedGrid.Order(network, side), trees, null);
    }

    [Theory]
    [InlineData(3)]
    [InlineData(9)]
    public void A_hypercube_has_its_number_of_spanning_trees(int dimension)
    {
        // Eigenvalues 2k, binomial(d, k) times (Stanley, Algebraic Combinatorics, ch. 9); by symmetry and Foster R = (n - 1)/(n d/2).
        double n = 1 << dimension, trees = -dimension * Math.Log(2), times = 1;
        for (int k = 1; k <= dimension; k++)
        {
            times *= (dimension - k + 1.0) / k;
            trees += times * Math.Log(2 * k);
        }
        Network network = TestNetworks.Of(Family.Hypercube, (long)n);
        AssertTrees(network, CholeskyFactorTests.Shuffled((int)n), trees, (_, _) => 2 * (n - 1) / (n * dimension));
    }

    [Theory]
    [InlineData(5)]
    [InlineData(64)]
    public void Every_link_of_a_torus_has_resistance_half_of_1_minus_1_over_n(int side)
    {
        // All links are alike, and Foster's sum over them is n - 1.
        Network network = TestNetworks.Of(Family.Torus, side * side);
        double resistance = (1 - (1.0 / (side * side))) / 2;
        AssertTrees(network, DissectedGrid.Order(network, side, closed: true), null, (_, _) => resistance);
    }

    [Theory]
    [InlineData(Family.Path, 2000)]
    [InlineData(Family.Star, 500)]
    [InlineData(Family.Preferential, 700)]
    public void On_a_tree_links_have_their_own_resistance_however_far_conductances_are_spread(Family family, int nodes)
    {
        Network network = TestNetworks.Of(family, nodes, family == Family.Preferential ? nodes - 1 : null, decades: 12);
        Assert.Equal(network.NodeCount - 1, network.LinkCount);
        double trees = 0;
        for (int u = 0; u < network.NodeCount; u++)
        {
            for (long k = network.FirstLaterArc(u); k < network.RowStart[u + 1]; k++)
                trees += Math.Log(network.Conductance(k));
        }
        foreach (int[] order in (int[][])[CholeskyFactorTests.Shuffled(nodes), [.. Enumerable.Range(0, nodes)]])
        {
            using CholeskyFactor factor = CholeskyFactorTests.Factor(network, order);
            SelectedInverse inverse = factor.Invert(1, default);
            Assert.Equal(trees, factor.LogDeterminant, 1e-9);
            double[] toGround = DistancesFrom(network, order[^1]);
            for (int u = 0; u < network.NodeCount; u++)
                Assert.Equal(toGround[u], inverse.Diagonal(u), 1e-12 * toGround[u]);
        }
    }

    // Sums of 1/c along the tree's paths.
    private static double[] DistancesFrom(Network network, int root)
    {
        double[] distance = new double[network.NodeCount];
        Array.Fill(distance, -1);
        distance[root] = 0;
        Stack<int> open = new([root]);
        while (open.TryPop(out int u))
        {
            for (long k = network.RowStart[u]; k < network.RowStart[u + 1]; k++)
            {
                int v = network.Neighbours[k];
                if (distance[v] >= 0)
                    continue;
                distance[v] = distance[u] + (1 / network.Conductance(k));
                open.Push(v);
            }
        }
        return distance;
    }

    [Fact]
    public void Over_six_decades_every_entry_of_the_inverse_keeps_twelve_digits()
    {
        // Integer conductances 1 .. 10^6; M = adj / det by cofactors, exact (Bareiss 1968).
        for (int seed = 1; seed <= 12; seed++)
        {
            Random random = new(seed);
            int n = random.Next(4, 14);
            List<(long, long, double)> links = [];
            for (int v = 1; v < n; v++)
            {
                foreach (int u in Enumerable.Range(0, v).OrderBy(_ => random.Next()).Take(random.Next(1, 4)))
                    links.Add((u, v, Math.Round(Math.Pow(10, 6 * random.NextDouble()))));
            }
            Network network = TestNetworks.Of([.. links]);
            int[] order = CholeskyFactorTests.Shuffled(n, seed);
            using CholeskyFactor factor = CholeskyFactorTests.Factor(network, order);
            SelectedInverse inverse = factor.Invert(1, default);
            BigInteger determinant = Determinant(Grounded(network, [order[^1]], [order[^1]]));
            Assert.Equal(BigInteger.Log(determinant), factor.LogDeterminant, 1e-11);
            for (int u = 0; u < n; u++)
            {
                if (u == order[^1])
                    continue;
                Check(u, u, inverse.Diagonal(u));
                for (long k = network.RowStart[u]; k < network.RowStart[u + 1]; k++)
                {
                    if (network.Neighbours[k] != order[^1])
                        Check(u, network.Neighbours[k], inverse.Between(u, network.Neighbours[k]));
                }
            }

            void Check(int u, int v, double actual)
            {
                BigInteger cofactor = BigInteger.Abs(Determinant(Grounded(network, [u, order[^1]], [v, order[^1]])));
                double exact = Math.Exp(BigInteger.Log(cofactor) - BigInteger.Log(determinant));
                Assert.Equal(exact, actual, 1e-12 * exact);
            }
        }
    }

    private static BigInteger[][] Grounded(Network network, int[] rowsOut, int[] columnsOut)
    {
        int n = network.NodeCount;
        int[] columns = [.. Enumerable.Range(0, n).Except(columnsOut)];
        return
        [
            .. Enumerable.Range(0, n).Except(rowsOut).Select(u => columns.Select(v =>
            {
                long arc = network.FindArc(u, v);
                return u == v ? new BigInteger(network.Strengths[u]) : arc < 0 ? 0 : -new BigInteger(network.Conductance(arc));
            }).ToArray()),
        ];
    }

    private static BigInteger Determinant(BigInteger[][] a)
    {
        BigInteger previous = 1;
        int sign = 1, n = a.Length;
        for (int k = 0; k < n; k++)
        {
            int pivot = Array.FindIndex(a, k, row => row[k] != 0);
            if (pivot < 0)
                return 0;
            if (pivot != k)
                (a[k], a[pivot], sign) = (a[pivot], a[k], -sign);
            for (int i = k + 1; i < n; i++)
            {
                for (int j = k + 1; j < n; j++)
                    a[i][j] = ((a[i][j] * a[k][k]) - (a[i][k] * a[k][j])) / previous;
            }
            previous = a[k][k];
        }
        return sign * previous;
    }

    [Fact]
    public void A_long_path_needs_no_deep_stack_and_loses_no_digits() => AssertPath(100_000);

    [Trait("Category", "Slow")]
    [Fact]
    public void A_path_of_a_million_nodes_needs_no_deep_stack_and_loses_no_digits() => AssertPath(1_000_000);

    private static void AssertPath(int n)
    {
        Network network = TestNetworks.Of(Family.Path, n);
        int[] order = [.. Enumerable.Range(0, n).Select(i => network.Node(i))];
        using CholeskyFactor factor = CholeskyFactorTests.Factor(network, order, 2);
        SelectedInverse inverse = factor.Invert(2, default);
        Assert.Equal(0, factor.LogDeterminant, 1e-9);
        for (int i = 0; i < n; i += 9973)
            Assert.Equal(n - 1 - i, inverse.Diagonal(order[i]), 1e-12 * n);
    }

    private static void AssertTrees(Network network, int[] order, double? trees, Func<int, int, double>? resistance)
    {
        using CholeskyFactor factor = CholeskyFactorTests.Factor(network, order, 2);
        if (trees is double count)
            Assert.Equal(count, factor.LogDeterminant, 1e-11 * Math.Max(1, count));
        SelectedInverse inverse = factor.Invert(2, default);
        double foster = 0;
        for (int u = 0; u < network.NodeCount; u++)
        {
            for (long k = network.FirstLaterArc(u); k < network.RowStart[u + 1]; k++)
            {
                int v = network.Neighbours[k];
                double found = inverse.Diagonal(u) + inverse.Diagonal(v) - (2 * inverse.Between(u, v));
                foster += found;
                if (resistance is not null)
                    Assert.Equal(resistance(u, v), found, 1e-11 * found);
            }
        }
        Assert.Equal(network.NodeCount - 1, foster, 1e-11 * network.NodeCount);
    }
}
