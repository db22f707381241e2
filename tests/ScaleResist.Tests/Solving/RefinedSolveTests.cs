// Refined solves: the tolerance is met by the true error against a dense L+, where floats alone could not meet it.

using MathNet.Numerics.LinearAlgebra;
using ScaleResist.DataGen.Networks;
using ScaleResist.Graphs;
using ScaleResist.Kernels;
using ScaleResist.Solving;

namespace ScaleResist.Tests.Solving;

public class RefinedSolveTests
{
    [Theory]
    [InlineData(Family.Grid, 400, 0)]
    [InlineData(Family.Preferential, 500, 0)]
    [InlineData(Family.Road, 400, 2)]
    [InlineData(Family.SmallWorld, 300, 3)]
    [InlineData(Family.Cube, 343, 2)]
    [InlineData(Family.Fringe, 500, 1)]
    [InlineData(Family.Path, 50, 2)]
    public void Sixteen_columns_reach_1e_9_without_doubles(Family family, int nodes, double decades)
    {
        Network network = TestNetworks.Of(family, nodes, decades: decades);
        LaplacianSolver solver = new(network);
        Assert.InRange(WorstError(network, solver, 1e-9), 0, 1e-9);
        Assert.Equal(0, solver.Statistics.Retried);
        Assert.InRange(solver.Statistics.LargestEnergyError, 0, 1e-9);
    }

    [Fact]
    public void Weak_cuts_and_conductances_over_six_decades_are_solved_in_the_end()
    {
        List<(long, long, double)> links = [(0, 500, 1e-4), (1, 501, 1e-4)];
        for (int half = 0; half < 2; half++)
        {
            Network core = TestNetworks.Of(Family.Preferential, 200, seed: (ulong)half + 1);
            for (int u = 0; u < core.NodeCount; u++)
            {
                for (long k = core.FirstLaterArc(u); k < core.RowStart[u + 1]; k++)
                    links.Add((core.Labels.Integers[u] + (500 * half), core.Labels.Integers[core.Neighbours[k]] + (500 * half), 1));
            }
        }
        Network cut = TestNetworks.Of([.. links]);
        Assert.InRange(WorstError(cut, new LaplacianSolver(cut), 1e-6), 0, 1e-6);
        Network wide = TestNetworks.Random(200, 500, 3, decades: 6);
        Assert.InRange(WorstError(wide, new LaplacianSolver(wide), 1e-6), 0, 1e-6);
    }

    [Fact]
    public void A_tolerance_beyond_doubles_ends_with_an_error()
    {
        Network network = TestNetworks.Of(Family.Grid, 400);
        Assert.Throws<SolveException>(() => WorstError(network, new LaplacianSolver(network), 1e-20));
    }

    // Half of the columns e_u - e_v, half of them noise.
    private static double WorstError(Network network, LaplacianSolver solver, double tolerance)
    {
        int n = network.NodeCount;
        using PanelPair b = new(n), z = new(n);
        using RefinedWorkspace workspace = solver.NewRefinedWorkspace();
        Random random = new(4);
        for (int j = 0; j < 16; j++)
        {
            (int u, int v) = (random.Next(n / 2), (n / 2) + random.Next(n / 2));
            (b.At(u, j), b.At(v, j)) = (1, -1);
            for (u = 0; j % 2 == 1 && u < n; u++)
                b.At(u, j) += random.NextDouble() - 0.5;
        }
        PanelKernels.Centre(b.First, 0, n);
        PanelKernels.Centre(b.Second, 0, n);
        solver.Solve(b, z, 16, tolerance, workspace, default);
        Matrix<double> laplacian = network.DenseLaplacian(), inverse = network.DensePseudoInverse();
        double worst = 0;
        for (int j = 0; j < 16; j++)
        {
            Vector<double> right = Vector<double>.Build.Dense(n, u => b.At(u, j)), found = Vector<double>.Build.Dense(n, u => z.At(u, j));
            Vector<double> residual = right - (laplacian * found);
            worst = Math.Max(worst, Math.Sqrt(residual * (inverse * residual) / (right * (inverse * right))));
        }
        return worst;
    }
}
