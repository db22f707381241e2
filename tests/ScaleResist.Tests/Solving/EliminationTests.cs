// Exact elimination: the core keeps the resistances of the whole (star-mesh and series laws), and what can go goes.

using CsCheck;
using MathNet.Numerics.LinearAlgebra;
using ScaleResist.DataGen.Networks;
using ScaleResist.Graphs;
using ScaleResist.Solving;

namespace ScaleResist.Tests.Solving;

public class EliminationTests
{
    [Theory]
    [InlineData(Family.Grid, 144, null, 0)]
    [InlineData(Family.Road, 300, null, 2)]
    [InlineData(Family.SmallWorld, 120, 240, 1)]
    [InlineData(Family.Preferential, 100, 200, 0)]
    public void Core_keeps_the_resistances_between_its_nodes(Family family, int nodes, int? links, double decades)
    {
        Network network = TestNetworks.Of(family, nodes, links, decades: decades);
        Elimination elimination = Elimination.Of(network.Laplacian, network.Components[0]);
        Assert.True(elimination.Steps.Count > 0);
        Assert.Equal(network.NodeCount, elimination.Steps.Count + elimination.Core.Length);
        Laplacian core = elimination.BuildCore();
        Matrix<double> whole = network.DensePseudoInverse(), reduced = PseudoInverse(core);
        for (int i = 0; i < core.NodeCount; i++)
        {
            Assert.True(core.NodeCount < 5 || core.RowStart[i + 1] - core.RowStart[i] > 3);
            for (int j = i + 1; j < core.NodeCount; j++)
            {
                double expected = whole.Resistance(elimination.Core[i], elimination.Core[j]);
                Assert.Equal(expected, reduced.Resistance(i, j), 1e-9 * expected);
            }
        }
    }

    [Theory]
    [InlineData(Family.Path)]
    [InlineData(Family.Cycle)]
    [InlineData(Family.Star)]
    [InlineData(Family.Ladder)]
    public void Trees_rings_and_ladders_go_whole(Family family)
    {
        Network network = TestNetworks.Of(family, 200, decades: 1);
        Assert.Single(Elimination.Of(network.Laplacian, network.Components[0]).Core);
    }

    [Fact]
    public void A_tree_of_a_million_nodes_and_a_star_of_as_many_leaves_take_linear_time()
    {
        foreach (Family family in new[] { Family.Path, Family.Star, Family.Fringe })
        {
            Network network = TestNetworks.Of(family, 1_000_000);
            long start = System.Diagnostics.Stopwatch.GetTimestamp();
            Elimination elimination = Elimination.Of(network.Laplacian, network.Components[0]);
            Assert.True(elimination.Steps.Count > 800_000);
            Assert.InRange(System.Diagnostics.Stopwatch.GetElapsedTime(start).TotalSeconds, 0, 20); // a quadratic pass would take hours
        }
    }

    [Fact]
    public void Any_small_network_is_solved_exactly_through_its_elimination()
    {
        Gen.Int[0, 100_000].Sample(
            seed =>
            {
                Network network = TestNetworks.Random(12, 11 + (seed % 14), seed, decades: seed % 4);
                Matrix<double> exact = network.DensePseudoInverse();
                double solved = Solved.Resistance(network, 0, 11);
                Assert.Equal(exact.Resistance(0, 11), solved, 1e-9 * solved);
            },
            iter: 300, seed: "0N0XIzNsQ0O2");
    }

    internal static Matrix<double> PseudoInverse(Laplacian laplacian)
    {
        int n = laplacian.NodeCount;
        Matrix<double> dense = Matrix<double>.Build.Dense(n, n, 1.0 / n);
        for (int u = 0; u < n; u++)
        {
            dense[u, u] += laplacian.Strengths[u];
            for (long k = laplacian.RowStart[u]; k < laplacian.RowStart[u + 1]; k++)
                dense[u, laplacian.Neighbours[k]] -= laplacian.Conductance(k);
        }
        return dense.Cholesky().Solve(Matrix<double>.Build.DenseIdentity(n)).Subtract(1.0 / n);
    }
}
