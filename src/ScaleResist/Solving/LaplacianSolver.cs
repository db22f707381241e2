// z = L+ b for whole panels over all components: floats first, doubles for the columns that floats cannot bring home.
// Invariant: every column returned meets the tolerance by its recomputed residual, or SolveException is thrown.

using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Solving;

/// <summary>What a solver has done so far; safe to add to from several threads.</summary>
public sealed class SolveStatistics
{
    private readonly Lock gate = new();

    /// <summary>Columns solved, over all components of more than one node.</summary>
    public long Columns { get; private set; }

    /// <summary>Columns solved again in doubles.</summary>
    public long Retried { get; private set; }

    /// <summary>The most iterations of a panel.</summary>
    public int MostIterations { get; private set; }

    /// <summary>The largest true relative residual of a column that was kept.</summary>
    public double LargestResidual { get; private set; }

    internal void Add(int columns, int retried, int iterations, double residual)
    {
        lock (gate)
        {
            Columns += columns;
            Retried += retried;
            MostIterations = Math.Max(MostIterations, iterations);
            LargestResidual = Math.Max(LargestResidual, residual);
        }
    }
}

/// <summary>Solves Laplacian systems of one network. One instance may serve several threads, each with its own panels and workspace.</summary>
public sealed class LaplacianSolver
{
    private readonly Network network;
    private readonly Jacobi<float> single;
    private readonly Jacobi<double> twice;

    /// <summary>A solver for the network.</summary>
    public LaplacianSolver(Network network)
    {
        this.network = network;
        single = new Jacobi<float>(network.Strengths);
        twice = new Jacobi<double>(network.Strengths);
    }

    /// <summary>The name of the preconditioner in use.</summary>
    public string Preconditioner => single.Name;

    /// <summary>Counts over all solves.</summary>
    public SolveStatistics Statistics { get; } = new();

    /// <summary>z = L+ b for 16 columns in floats, to a relative residual of <paramref name="tolerance"/> in every component.</summary>
    /// <param name="b">n x 16; each column sums to zero over every component.</param>
    /// <param name="z">n x 16; each column is centred in every component, and 0 at single nodes.</param>
    /// <param name="columns">How many of the 16 columns are in use.</param>
    /// <param name="tolerance">The relative residual wanted; floats reach about 1e-5.</param>
    /// <param name="workspace">Panels of n rows.</param>
    /// <param name="cancel">Checked once an iteration.</param>
    /// <exception cref="SolveException">A column did not reach the tolerance, in doubles either.</exception>
    public void Solve(Panel<float> b, Panel<float> z, int columns, double tolerance, GradientWorkspace<float> workspace, CancellationToken cancel)
    {
        SolveReport report = new();
        foreach (Component component in network.Components)
        {
            if (component.Nodes == 1)
            {
                z.Row(component.Start).Clear();
                continue;
            }
            ConjugateGradient.Solve(network.Laplacian, single, b, z, workspace, component, SolveLimits.For(tolerance, component.Nodes), report, cancel);
            List<int> failed = [];
            double residual = 0;
            for (int column = 0; column < columns; column++)
            {
                if (report.Residuals[column] <= tolerance)
                    residual = Math.Max(residual, report.Residuals[column]);
                else
                    failed.Add(column);
            }
            Statistics.Add(columns - failed.Count, 0, report.Iterations, residual);
            if (failed.Count > 0)
                SolveAgainInDoubles(b, z, failed, tolerance, component, cancel);
        }
    }

    /// <summary>x = L+ b for 8 columns in doubles, to a relative residual of <paramref name="tolerance"/> in every component.</summary>
    /// <inheritdoc cref="Solve(Panel{float}, Panel{float}, int, double, GradientWorkspace{float}, CancellationToken)"/>
    public void Solve(Panel<double> b, Panel<double> z, int columns, double tolerance, GradientWorkspace<double> workspace, CancellationToken cancel)
    {
        foreach (Component component in network.Components)
        {
            if (component.Nodes == 1)
                z.Row(component.Start).Clear();
            else
                SolveComponent(b, z, columns, tolerance, component, workspace, retried: 0, cancel);
        }
    }

    private void SolveAgainInDoubles(
        Panel<float> b, Panel<float> z, List<int> failed, double tolerance, Component component, CancellationToken cancel)
    {
        using Panel<double> b2 = new(network.NodeCount), z2 = new(network.NodeCount);
        using GradientWorkspace<double> workspace = new(network.NodeCount);
        int width = Panel<double>.Width;
        for (int first = 0; first < failed.Count; first += width)
        {
            int count = Math.Min(width, failed.Count - first);
            for (int u = component.Start; u < component.End; u++)
            {
                Span<double> to = b2.Row(u);
                to.Clear();
                for (int j = 0; j < count; j++)
                    to[j] = b.Row(u)[failed[first + j]];
            }
            PanelKernels.Centre(b2, component.Start, component.End);
            SolveComponent(b2, z2, count, tolerance, component, workspace, count, cancel);
            for (int u = component.Start; u < component.End; u++)
            {
                for (int j = 0; j < count; j++)
                    z.Row(u)[failed[first + j]] = (float)z2.Row(u)[j];
            }
        }
    }

    private void SolveComponent(
        Panel<double> b,
        Panel<double> z,
        int columns,
        double tolerance,
        Component component,
        GradientWorkspace<double> workspace,
        int retried,
        CancellationToken cancel)
    {
        SolveReport report = new();
        ConjugateGradient.Solve(network.Laplacian, twice, b, z, workspace, component, SolveLimits.For(tolerance, component.Nodes), report, cancel);
        double residual = 0;
        for (int column = 0; column < columns; column++)
        {
            residual = Math.Max(residual, report.Residuals[column]);
            if (report.Residuals[column] <= tolerance)
                continue;
            throw new SolveException(
                $"a solve stopped at relative residual {report.Residuals[column]:0.0e+0} where {tolerance:0.0e+0} was wanted "
                + $"({report.Reasons[column]}, {report.Iterations:N0} iterations, component of {component.Nodes:N0} nodes); "
                + "this network needs a stronger preconditioner than this version has");
        }
        Statistics.Add(columns, retried, report.Iterations, residual);
    }
}
