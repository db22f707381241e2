// z = L+ b for whole panels over all components: floats first, doubles for the columns that floats cannot bring home.
// Invariant: every column returned meets the tolerance by its recomputed residual, or SolveException is thrown.

using System.Numerics;
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

    /// <summary>The largest relative error in the energy norm of a column that was kept.</summary>
    public double LargestEnergyError { get; private set; }

    internal void Add(int columns, int retried, int iterations, double residual, double energyError)
    {
        lock (gate)
        {
            Columns += columns;
            Retried += retried;
            MostIterations = Math.Max(MostIterations, iterations);
            LargestResidual = Math.Max(LargestResidual, residual);
            LargestEnergyError = Math.Max(LargestEnergyError, energyError);
        }
    }
}

/// <summary>
/// Solves Laplacian systems of one network. Prepared once; serves several threads, each with its own panels and workspace.
/// </summary>
public sealed partial class LaplacianSolver
{
    private readonly Network network;
    private readonly ComponentSolver[] solvers;

    /// <summary>Prepares all components: eliminates, tries, factorises. Near-linear in the links.</summary>
    /// <param name="network">The network.</param>
    /// <param name="solves">Right-hand sides to come, which a larger set-up must pay for.</param>
    /// <param name="seed">Of the sampled factor.</param>
    /// <param name="cancel">Ends the preparation.</param>
    public LaplacianSolver(Network network, int solves = 64, ulong seed = 1, CancellationToken cancel = default)
    {
        this.network = network;
        int several = 0;
        while (several < network.Components.Count && network.Components[several].Nodes > 1)
            several++; // single nodes come last
        solvers = new ComponentSolver[several];
        for (int c = 0; c < several; c++)
            solvers[c] = new ComponentSolver(network.Laplacian, network.Components[c], solves, seed, cancel);
    }

    /// <summary>The name of the largest component's preconditioner.</summary>
    public string Preconditioner => solvers.Length == 0 ? "none" : solvers[0].Choice.Name;

    /// <summary>Why it was chosen.</summary>
    public string Reason => solvers.Length == 0 ? "no links" : solvers[0].Choice.Reason;

    /// <summary>Nodes eliminated exactly, over all components.</summary>
    public long Eliminated => solvers.Sum(solver => (long)solver.Eliminated);

    /// <summary>Counts over all solves.</summary>
    public SolveStatistics Statistics { get; } = new();

    /// <summary>Panels for the solves of one thread.</summary>
    public SolverWorkspace<T> NewWorkspace<T>()
        where T : unmanaged, INumber<T> =>
        new(solvers.Select(solver => solver.GradientRows).DefaultIfEmpty(1).Max(), solvers.Select(solver => solver.CoreRows).DefaultIfEmpty(1).Max());

    /// <summary>
    /// z = L+ b for 16 probes, whose modes all have the same expected energy, 1: solved until the error of no mode can exceed
    /// <paramref name="modeError"/> of it, that is to a relative energy-norm error of modeError / sqrt(n-1) in each component.
    /// </summary>
    /// <param name="b">n x 16; each column sums to zero over every component.</param>
    /// <param name="z">n x 16; each column is centred in every component, and 0 at single nodes.</param>
    /// <param name="columns">How many of the 16 columns are in use.</param>
    /// <param name="modeError">The error wanted, relative to a mode's standard deviation.</param>
    /// <param name="workspace">From <see cref="NewWorkspace"/>.</param>
    /// <param name="cancel">Checked once an iteration.</param>
    /// <exception cref="SolveException">A column did not reach the tolerance, in doubles either.</exception>
    public void SolveProbes(
        Panel<float> b, Panel<float> z, int columns, double modeError, SolverWorkspace<float> workspace, CancellationToken cancel)
    {
        for (int c = 0; c < solvers.Length; c++)
            SolveInFloats(c, b, z, columns, modeError / Math.Sqrt(network.Components[c].Nodes - 1), workspace, Statistics, cancel);
        ClearSingles(z);
    }

    /// <summary>z = L+ b for 16 columns in floats, to a relative error of <paramref name="tolerance"/> in the energy norm, in every component.</summary>
    /// <param name="b">n x 16; each column sums to zero over every component.</param>
    /// <param name="z">n x 16; each column is centred in every component, and 0 at single nodes.</param>
    /// <param name="columns">How many of the 16 columns are in use.</param>
    /// <param name="tolerance">The relative error |z - L+b|_L / |L+b|_L wanted.</param>
    /// <param name="workspace">From <see cref="NewWorkspace"/>.</param>
    /// <param name="cancel">Checked once an iteration.</param>
    /// <exception cref="SolveException">A column did not reach the tolerance, in doubles either.</exception>
    public void Solve(Panel<float> b, Panel<float> z, int columns, double tolerance, SolverWorkspace<float> workspace, CancellationToken cancel) =>
        Solve(b, z, columns, tolerance, workspace, Statistics, cancel);

    /// <summary>The same, with counts of its own: for rough solves that are no part of any estimate's error.</summary>
    internal void Solve(
        Panel<float> b, Panel<float> z, int columns, double tolerance, SolverWorkspace<float> workspace, SolveStatistics statistics, CancellationToken cancel)
    {
        for (int c = 0; c < solvers.Length; c++)
            SolveInFloats(c, b, z, columns, tolerance, workspace, statistics, cancel);
        ClearSingles(z);
    }

    /// <summary>The same for 8 columns in doubles.</summary>
    /// <inheritdoc cref="Solve(Panel{float}, Panel{float}, int, double, SolverWorkspace{float}, CancellationToken)"/>
    public void Solve(Panel<double> b, Panel<double> z, int columns, double tolerance, SolverWorkspace<double> workspace, CancellationToken cancel)
    {
        for (int c = 0; c < solvers.Length; c++)
            SolveInDoubles(c, b, z, columns, tolerance, workspace, Statistics, retried: 0, cancel);
        ClearSingles(z);
    }

    private void SolveInFloats(
        int number, Panel<float> b, Panel<float> z, int columns, double tolerance, SolverWorkspace<float> workspace, SolveStatistics statistics,
        CancellationToken cancel)
    {
        solvers[number].Solve(b, z, tolerance, workspace, cancel);
        SolveReport report = workspace.Report;
        List<int> failed = [];
        for (int column = 0; column < columns; column++)
        {
            if (report.EnergyErrors[column] <= tolerance)
                statistics.Add(1, 0, report.Iterations, report.Residuals[column], report.EnergyErrors[column]);
            else
                failed.Add(column);
        }
        if (failed.Count > 0)
            SolveAgainInDoubles(number, b, z, failed, tolerance, statistics, cancel);
    }

    private void ClearSingles<T>(Panel<T> z)
        where T : unmanaged
    {
        for (int c = solvers.Length; c < network.Components.Count; c++)
            z.Row(network.Components[c].Start).Clear();
    }

    private void SolveAgainInDoubles(
        int number, Panel<float> b, Panel<float> z, List<int> failed, double tolerance, SolveStatistics statistics, CancellationToken cancel)
    {
        Component component = network.Components[number];
        using Panel<double> b2 = new(network.NodeCount), z2 = new(network.NodeCount);
        using SolverWorkspace<double> workspace = NewWorkspace<double>();
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
            SolveInDoubles(number, b2, z2, count, tolerance, workspace, statistics, count, cancel);
            for (int u = component.Start; u < component.End; u++)
            {
                for (int j = 0; j < count; j++)
                    z.Row(u)[failed[first + j]] = (float)z2.Row(u)[j];
            }
        }
    }

    private void SolveInDoubles(
        int number,
        Panel<double> b,
        Panel<double> z,
        int columns,
        double tolerance,
        SolverWorkspace<double> workspace,
        SolveStatistics statistics,
        int retried,
        CancellationToken cancel)
    {
        solvers[number].Solve(b, z, tolerance, workspace, cancel);
        SolveReport report = workspace.Report;
        for (int column = 0; column < columns; column++)
        {
            if (!(report.EnergyErrors[column] <= tolerance))
            {
                throw new SolveException(
                    $"a solve stopped at a relative error of {report.EnergyErrors[column]:0.0e+0} and a residual of {report.Residuals[column]:0.0e+0} "
                    + $"where {tolerance:0.0e+0} was wanted ({report.Reasons[column]}, {report.Iterations:N0} iterations, "
                    + $"{solvers[number].Choice.Name}, component of {network.Components[number].Nodes:N0} nodes)");
            }
            statistics.Add(1, retried > 0 ? 1 : 0, report.Iterations, report.Residuals[column], report.EnergyErrors[column]);
        }
    }
}
