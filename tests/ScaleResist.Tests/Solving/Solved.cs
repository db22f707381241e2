// Resistances through the solver's double panels, for tests: R(u,v) = (e_u - e_v)' L+ (e_u - e_v).

using ScaleResist.Graphs;
using ScaleResist.Kernels;
using ScaleResist.Solving;

namespace ScaleResist.Tests.Solving;

internal static class Solved
{
    public static double Resistance(Network network, int u, int v)
    {
        using Panel<double> b = new(network.NodeCount), z = new(network.NodeCount);
        LaplacianSolver solver = new(network);
        using SolverWorkspace<double> workspace = solver.NewWorkspace<double>();
        b.Row(u)[0] = 1;
        b.Row(v)[0] = -1;
        solver.Solve(b, z, 1, 1e-10, workspace, default);
        return z.Row(u)[0] - z.Row(v)[0];
    }

    /// <summary>By labels.</summary>
    public static double ResistanceOf(Network network, long u, long v) => Resistance(network, network.Node(u), network.Node(v));

    /// <summary>Kf = n tr L+, column by column.</summary>
    public static double KirchhoffIndex(Network network)
    {
        int n = network.NodeCount, width = Panel<double>.Width;
        using Panel<double> b = new(n), z = new(n);
        LaplacianSolver solver = new(network);
        using SolverWorkspace<double> workspace = solver.NewWorkspace<double>();
        double trace = 0;
        for (int first = 0; first < n; first += width)
        {
            int count = Math.Min(width, n - first);
            for (int u = 0; u < n; u++)
            {
                for (int j = 0; j < width; j++)
                    b.Row(u)[j] = j < count ? (u == first + j ? 1.0 : 0.0) - (1.0 / n) : 0;
            }
            solver.Solve(b, z, count, 1e-10, workspace, default);
            for (int j = 0; j < count; j++)
                trace += z.Row(first + j)[j];
        }
        return n * trace;
    }
}
