// Lockstep conjugate gradient: tolerance met by the recomputed residual, reasons by column, columns that do not disturb each other.

using MathNet.Numerics.LinearAlgebra;
using ScaleResist.DataGen.Networks;
using ScaleResist.Graphs;
using ScaleResist.Kernels;
using ScaleResist.Solving;

namespace ScaleResist.Tests.Solving;

public class ConjugateGradientTests
{
    [Theory]
    [InlineData(Family.Grid, 400, 0)]
    [InlineData(Family.Preferential, 500, 0)]
    [InlineData(Family.Road, 400, 2)]
    [InlineData(Family.SmallWorld, 300, 6)]
    [InlineData(Family.Fringe, 500, 1)]
    public void Doubles_reach_1e_8_on_every_column(Family family, int nodes, double decades)
    {
        Network network = TestNetworks.Of(family, nodes, decades: decades);
        using Panel<double> b = RightHandSides<double>(network), x = new(network.NodeCount);
        LaplacianSolver solver = new(network);
        using SolverWorkspace<double> workspace = solver.NewWorkspace<double>();
        solver.Solve(b, x, 8, 1e-8, workspace, default);
        Assert.InRange(solver.Statistics.LargestEnergyError, 0, 1e-8);
        for (int j = 0; j < 8; j++)
            Assert.InRange(TrueEnergyError(network, b, x, j), 0, 1e-8);
    }

    [Theory]
    [InlineData(Family.Preferential, 600)]
    [InlineData(Family.SmallWorld, 600)]
    [InlineData(Family.Grid, 625)]
    [InlineData(Family.Road, 600)]
    public void Energy_error_that_is_claimed_bounds_the_true_one(Family family, int nodes)
    {
        Network network = TestNetworks.Of(family, nodes, decades: 1);
        LaplacianSolver solver = new(network);
        using SolverWorkspace<double> workspace = solver.NewWorkspace<double>();
        using Panel<double> b = RightHandSides<double>(network), x = new(network.NodeCount);
        foreach (double tolerance in new[] { 1e-2, 1e-3, 1e-5 })
        {
            solver.Solve(b, x, 8, tolerance, workspace, default);
            for (int j = 0; j < 8; j++)
                Assert.InRange(TrueEnergyError(network, b, x, j), 0, tolerance);
        }
    }

    [Theory]
    // Two halves that hang together by two links: the mode across holds next to nothing of b, and still must be right.
    [InlineData(1.0)]
    [InlineData(1e-2)]
    [InlineData(1e-4)]
    public void Mode_across_a_weak_cut_is_solved_for(double weak)
    {
        List<(long, long, double)> links = [(0, 500, weak), (1, 501, weak)];
        for (int half = 0; half < 2; half++)
        {
            Network core = TestNetworks.Of(Family.Preferential, 400, seed: (ulong)half + 1);
            for (int u = 0; u < core.NodeCount; u++)
            {
                for (long k = core.FirstLaterArc(u); k < core.RowStart[u + 1]; k++)
                    links.Add((core.Labels.Integers[u] + (500 * half), core.Labels.Integers[core.Neighbours[k]] + (500 * half), 1));
            }
        }
        Network network = TestNetworks.Of([.. links]);
        LaplacianSolver solver = new(network);
        using SolverWorkspace<float> workspace = solver.NewWorkspace<float>();
        using Panel<float> b = new(network.NodeCount), z = new(network.NodeCount);
        b.Row(network.Node(0))[0] = b.Row(network.Node(7))[0] = 100;
        b.Row(network.Node(13))[0] = -200;
        b.Row(network.Node(0))[0] += 0.1f;
        b.Row(network.Node(500))[0] = -0.1f;
        Matrix<double> exact = network.DensePseudoInverse();
        double across = 0;
        for (int u = 0; u < network.NodeCount; u++)
            across += b.Row(u)[0] * (exact[network.Node(0), u] - exact[network.Node(500), u]);
        solver.Solve(b, z, 1, 1e-4, workspace, default);
        double energy = 0;
        for (int u = 0; u < network.NodeCount; u++)
            energy += b.Row(u)[0] * z.Row(u)[0];
        // Cauchy-Schwarz: |error across| <= |error|_L sqrt(R).
        double bound = 1e-4 * Math.Sqrt(energy * exact.Resistance(network.Node(0), network.Node(500)));
        Assert.Equal(across, z.Row(network.Node(0))[0] - z.Row(network.Node(500))[0], bound + (1e-5 * Math.Abs(across)));
    }

    [Fact]
    public void Zero_right_hand_side_stops_at_once_and_leaves_zero()
    {
        Network network = TestNetworks.Of(Family.Cycle, 12);
        using Panel<float> b = new(12), x = new(12);
        b.Row(3)[5] = 1;
        b.Row(7)[5] = -1;
        using GradientWorkspace<float> workspace = new(12);
        SolveReport report = new();
        ConjugateGradient.Solve(
            new GaussSeidel<float>(SplitLaplacian.Of(network.Laplacian)), b, x, workspace, 0, 12, default,
            SolveLimits.For(1e-5, 12), report, default);
        for (int j = 0; j < 16; j++)
        {
            Assert.Equal(j == 5 ? StopReason.Converged : StopReason.ZeroRightHandSide, report.Reasons[j]);
            Assert.Equal(j != 5, x.Row(3)[j] == 0);
        }
    }

    [Fact]
    public void Iteration_limit_is_reported_and_never_taken_for_an_answer()
    {
        Network network = TestNetworks.Of(Family.Path, 500);
        using Panel<double> b = RightHandSides<double>(network), x = new(500);
        using GradientWorkspace<double> workspace = new(500);
        SolveReport report = new();
        ConjugateGradient.Solve(
            new GaussSeidel<double>(SplitLaplacian.Of(network.Laplacian)), b, x, workspace, 0, 500, default,
            new SolveLimits(1e-8, 20), report, default);
        Assert.Equal(20, report.Iterations);
        Assert.All(report.Reasons[..8], reason => Assert.Equal(StopReason.IterationLimit, reason));
        Assert.All(report.Residuals[..8], residual => Assert.True(residual > 1e-8));
    }

    [Fact]
    public void Columns_solve_as_they_would_alone()
    {
        Network network = TestNetworks.Of(Family.Road, 600, decades: 1);
        using Panel<double> all = RightHandSides<double>(network), x = new(network.NodeCount);
        LaplacianSolver solver = new(network);
        using SolverWorkspace<double> workspace = solver.NewWorkspace<double>();
        solver.Solve(all, x, 8, 1e-9, workspace, default);
        using Panel<double> one = new(network.NodeCount), alone = new(network.NodeCount);
        for (int u = 0; u < network.NodeCount; u++)
            one.Row(u)[6] = all.Row(u)[6];
        solver.Solve(one, alone, 8, 1e-9, workspace, default);
        for (int u = 0; u < network.NodeCount; u++)
            Assert.Equal(alone.Row(u)[6], x.Row(u)[6], 1e-7); // to the tolerance: what all columns learn of L, each uses
    }

    [Fact]
    public void Floats_that_cannot_reach_the_tolerance_are_solved_again_in_doubles()
    {
        Network network = TestNetworks.Of(Family.Grid, 900, decades: 2);
        using Panel<float> b = RightHandSides<float>(network), z = new(network.NodeCount);
        LaplacianSolver solver = new(network);
        using SolverWorkspace<float> workspace = solver.NewWorkspace<float>();
        solver.Solve(b, z, 16, 1e-9, workspace, default);
        Assert.Equal(16, solver.Statistics.Retried);
        Assert.InRange(solver.Statistics.LargestEnergyError, 0, 1e-9);
    }

    [Fact]
    public void A_tolerance_that_nothing_reaches_ends_in_an_error_that_says_so()
    {
        Network network = TestNetworks.Of(Family.Grid, 400, decades: 6);
        LaplacianSolver solver = new(network);
        using SolverWorkspace<double> workspace = solver.NewWorkspace<double>();
        using Panel<double> b = RightHandSides<double>(network), x = new(network.NodeCount);
        SolveException error = Assert.Throws<SolveException>(
            () => solver.Solve(b, x, 8, 1e-17, workspace, default));
        Assert.Contains("relative error", error.Message, StringComparison.Ordinal);
        Assert.DoesNotContain('\n', error.Message);
    }

    [Fact]
    public void Every_component_meets_the_tolerance_by_itself()
    {
        // A large core that converges in a few steps beside a path that does not.
        List<(long, long, double)> links = [];
        for (long i = 0; i < 300; i++)
        {
            for (long j = i + 1; j < 300; j += 1 + (i % 3))
                links.Add((i, j, 1));
        }
        for (long i = 1000; i < 1100; i++)
            links.Add((i, i + 1, 1));
        Network network = TestNetworks.Of([.. links]);
        LaplacianSolver solver = new(network);
        using SolverWorkspace<float> workspace = solver.NewWorkspace<float>();
        using Panel<float> b = new(network.NodeCount), z = new(network.NodeCount);
        b.Row(network.Node(0))[0] = 100;
        b.Row(network.Node(1))[0] = -100;
        b.Row(network.Node(1000))[0] = 1e-3f;
        b.Row(network.Node(1100))[0] = -1e-3f;
        solver.Solve(b, z, 1, 1e-4, workspace, default);
        Assert.Equal(0.1, z.Row(network.Node(1000))[0] - z.Row(network.Node(1100))[0], 1e-4);
    }

    // |x - x*|_L / |x*|_L against a dense L+ (MathNet.Numerics).
    private static double TrueEnergyError(Network network, Panel<double> b, Panel<double> x, int column)
    {
        int n = network.NodeCount;
        Vector<double> exact = network.DensePseudoInverse() * Vector<double>.Build.Dense(n, u => b.Row(u)[column]);
        Vector<double> error = Vector<double>.Build.Dense(n, u => x.Row(u)[column]) - exact;
        Matrix<double> laplacian = network.DenseLaplacian();
        return Math.Sqrt(error * (laplacian * error) / (exact * (laplacian * exact)));
    }

    private static Panel<T> RightHandSides<T>(Network network)
        where T : unmanaged, System.Numerics.INumber<T>
    {
        Panel<T> b = new(network.NodeCount);
        Random random = new(5);
        for (int u = 0; u < network.NodeCount; u++)
        {
            for (int j = 0; j < Panel<T>.Width; j++)
                b.Row(u)[j] = T.CreateTruncating(random.NextDouble() - 0.5);
        }
        foreach (Component component in network.Components)
            PanelKernels.Centre(b, component.Start, component.End);
        return b;
    }
}
