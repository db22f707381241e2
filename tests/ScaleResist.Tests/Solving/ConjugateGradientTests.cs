// Lockstep conjugate gradient: tolerance met by the recomputed residual, reasons by column, columns that do not disturb each other.

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
        Assert.InRange(solver.Statistics.LargestResidual, 0, 1e-8);
        LaneSums check = PanelKernels.Residual(network.Laplacian, b, x, 0, network.NodeCount);
        LaneSums size = PanelKernels.Residual(network.Laplacian, b, new Panel<double>(network.NodeCount), 0, network.NodeCount);
        for (int j = 0; j < 8; j++)
            Assert.True(check[j] <= 1e-16 * size[j]);
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
            network.Laplacian, new Jacobi<float>(network.Strengths), b, x, workspace, 0, network.NodeCount, SolveLimits.For(1e-5, 12), report, default);
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
            network.Laplacian, new Jacobi<double>(network.Strengths), b, x, workspace, 0, network.NodeCount, new SolveLimits(1e-8, 20), report, default);
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
            Assert.Equal(alone.Row(u)[6], x.Row(u)[6]);
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
        Assert.InRange(solver.Statistics.LargestResidual, 0, 1e-9);
        LaneSums residual = PanelKernels.Residual(network.Laplacian, b, z, 0, network.NodeCount);
        LaneSums size = PanelKernels.Residual(network.Laplacian, b, new Panel<float>(network.NodeCount), 0, network.NodeCount);
        for (int j = 0; j < 16; j++)
            Assert.True(residual[j] <= 1e-10 * size[j]); // rounded back to floats
    }

    [Fact]
    public void A_tolerance_that_nothing_reaches_ends_in_an_error_that_says_so()
    {
        Network network = TestNetworks.Of(Family.Path, 200, decades: 12);
        LaplacianSolver solver = new(network);
        using SolverWorkspace<double> workspace = solver.NewWorkspace<double>();
        using Panel<double> b = RightHandSides<double>(network), x = new(network.NodeCount);
        SolveException error = Assert.Throws<SolveException>(
            () => solver.Solve(b, x, 8, 1e-17, workspace, default));
        Assert.Contains("relative residual", error.Message, StringComparison.Ordinal);
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
