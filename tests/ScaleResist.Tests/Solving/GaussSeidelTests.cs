// Gauss-Seidel's two sweeps against dense matrices (MathNet.Numerics), what the preconditioner is good for, and how it is chosen.

using MathNet.Numerics.LinearAlgebra;
using ScaleResist.DataGen.Networks;
using ScaleResist.Graphs;
using ScaleResist.Kernels;
using ScaleResist.Solving;

namespace ScaleResist.Tests.Solving;

public class GaussSeidelTests
{
    [Theory]
    [InlineData(Family.Grid, 49, 0)]
    [InlineData(Family.Preferential, 90, 2)]
    [InlineData(Family.SmallWorld, 80, 1)]
    public void An_iteration_is_the_textbook_one_with_the_dense_preconditioner(Family family, int nodes, double decades)
    {
        Network network = TestNetworks.Of(family, nodes, decades: decades);
        int n = network.NodeCount;
        Matrix<double> l = network.DenseLaplacian();
        Matrix<double> lower = l.LowerTriangle(), d = Matrix<double>.Build.DiagonalOfDiagonalVector(l.Diagonal());
        Matrix<double> m = (lower * d.Inverse() * lower.Transpose()).Inverse(); // M = ((D+Lo) D^-1 (D+Up))^-1
        using Panel<double> b = new(n), x = new(n);
        using GradientWorkspace<double> workspace = new(n);
        Vector<double> r = Vector<double>.Build.Dense(n, u => Math.Sin(u + 1.0));
        r -= r.Average();
        for (int u = 0; u < n; u++)
            b.Row(u)[3] = r[u];
        GaussSeidel<double> seidel = new(SplitLaplacian.Of(network.Laplacian));
        seidel.Begin(b, workspace, 0, n, out LaneSums squares, out LaneSums energies);
        Vector<double> p = m * r, solution = Vector<double>.Build.Dense(n);
        double rs = r * p, beta = 0;
        Assert.Equal(r * r, squares[3], 1e-10);
        for (int iteration = 0; iteration < 5; iteration++)
        {
            Assert.Equal(1, energies[3] / rs, 1e-9);
            LaneSums factors = default;
            factors[3] = beta;
            double product = p * (l * p);
            Assert.Equal(1, seidel.Product(factors, workspace, 0, n)[3] / product, 1e-9);
            double a = rs / product;
            solution += a * p;
            r -= a * (l * p);
            factors[3] = a;
            energies = seidel.Advance(factors, x, workspace, 0, n);
            for (int u = 0; u < n; u++)
                Assert.Equal(solution[u], x.Row(u)[3], 1e-9);
            Vector<double> s = m * r;
            beta = r * s / rs;
            rs = r * s;
            p = s + (beta * p);
        }
        seidel.BeginAt(b, x, workspace, 0, n, out squares, out energies);
        Assert.Equal(1, squares[3] / (r * r), 1e-6);
        Assert.Equal(1, energies[3] / rs, 1e-6);
    }

    [Theory]
    [InlineData(Family.Grid, 40_000, "sampled elimination")]
    [InlineData(Family.Preferential, 20_000, "gauss-seidel")]
    [InlineData(Family.PowerLaw, 20_000, "gauss-seidel")]
    public void A_trial_tells_meshes_from_social_networks(Family family, int nodes, string expected) =>
        Assert.StartsWith(expected, new LaplacianSolver(TestNetworks.Of(family, nodes)).Preconditioner, StringComparison.Ordinal);

    [Fact]
    public void Least_eigenvalue_from_the_trial_is_that_of_the_preconditioned_laplacian()
    {
        Network network = TestNetworks.Of(Family.Preferential, 300);
        Matrix<double> l = network.DenseLaplacian();
        Matrix<double> half = Matrix<double>.Build.DiagonalOfDiagonalVector(l.Diagonal().PointwiseSqrt()) * l.LowerTriangle().Inverse();
        double expected = (half * l * half.Transpose()).Evd(Symmetricity.Symmetric).EigenValues.Select(value => value.Real).Order().ElementAt(1);
        PreconditionerChoice choice = PreconditionerChoice.ByTrial(network.Laplacian, network.NodeCount, () => network.Laplacian, 64, 1, default);
        Assert.Equal("gauss-seidel", choice.Name);
        Assert.InRange(choice.LeastEigenvalue, 0.99 * expected, 1.3 * expected);
    }

    [Fact]
    public void The_leading_ball_is_a_connected_laplacian_of_the_nearest_nodes()
    {
        Network network = TestNetworks.Of(Family.Grid, 900, decades: 1);
        Laplacian ball = LeadingBall.Of(network.Laplacian, 100);
        Assert.Equal(100, ball.NodeCount);
        int components = 0;
        bool[] seen = new bool[100];
        for (int root = 0; root < 100; root++)
        {
            if (seen[root])
                continue;
            components++;
            Stack<int> open = new([root]);
            while (open.TryPop(out int u))
            {
                seen[u] = true;
                double strength = 0;
                for (long k = ball.RowStart[u]; k < ball.RowStart[u + 1]; k++)
                {
                    Assert.True(k == ball.RowStart[u] || ball.Neighbours[k - 1] < ball.Neighbours[k]);
                    strength += ball.Conductance(k);
                    if (!seen[ball.Neighbours[k]])
                        open.Push(ball.Neighbours[k]);
                }
                Assert.Equal(strength, ball.Strengths[u], 1e-12);
            }
        }
        Assert.Equal(1, components);
        Assert.Equal(network.Neighbours.Length, LeadingBall.Of(network.Laplacian, 5000).Neighbours.Length);
    }
}
