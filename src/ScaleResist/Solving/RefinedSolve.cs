// The refined solve as LaplacianSolver offers it: 16 columns to tolerances below what floats can hold, doubles as the last resort.
// Invariant: every column returned meets the tolerance by its residual in doubles, or SolveException is thrown.

using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Solving;

/// <summary>Panels that the refined solves of one thread share; sized for the largest core.</summary>
public sealed class RefinedWorkspace : IDisposable
{
    internal RefinedWorkspace(int gradientRows, int coreRows)
    {
        Gradient = new GradientWorkspace<float>(gradientRows);
        Steps = new Panel<float>(gradientRows);
        CoreB = new PanelPair(coreRows);
        CoreX = new PanelPair(coreRows);
    }

    internal GradientWorkspace<float> Gradient { get; }

    internal Panel<float> Steps { get; }

    internal PanelPair CoreB { get; }

    internal PanelPair CoreX { get; }

    internal SolveReport Report { get; } = new();

    /// <inheritdoc/>
    public void Dispose()
    {
        Gradient.Dispose();
        Steps.Dispose();
        CoreB.Dispose();
        CoreX.Dispose();
    }
}

public sealed partial class LaplacianSolver
{
    /// <summary>Panels for the refined solves of one thread.</summary>
    public RefinedWorkspace NewRefinedWorkspace() =>
        new(solvers.Select(solver => solver.GradientRows).DefaultIfEmpty(1).Max(), solvers.Select(solver => solver.CoreRows).DefaultIfEmpty(1).Max());

    /// <summary>
    /// z = L+ b for 16 columns in doubles, solved in floats and corrected in doubles, to a relative error of <paramref name="tolerance"/> in the
    /// energy norm, in every component. Cheaper a column than eight columns in doubles.
    /// </summary>
    /// <param name="b">n x 16; each column sums to zero over every component.</param>
    /// <param name="z">n x 16; each column is centred in every component, and 0 at single nodes.</param>
    /// <param name="columns">How many of the 16 columns are in use.</param>
    /// <param name="tolerance">The relative error |z - L+b|_L / |L+b|_L wanted.</param>
    /// <param name="workspace">From <see cref="NewRefinedWorkspace"/>.</param>
    /// <param name="cancel">Checked once an iteration.</param>
    /// <exception cref="SolveException">A column did not reach the tolerance, in doubles either.</exception>
    public void Solve(PanelPair b, PanelPair z, int columns, double tolerance, RefinedWorkspace workspace, CancellationToken cancel)
    {
        for (int c = 0; c < solvers.Length; c++)
            SolveRefined(c, b, z, columns, tolerance, workspace, cancel);
        ClearSingles(z.First);
        ClearSingles(z.Second);
    }

    // One component of more than one node. Leaves a column that doubles fall short on as it is where the caller has a certificate of its own.
    internal void SolveRefined(
        int number, PanelPair b, PanelPair z, int columns, double tolerance, RefinedWorkspace workspace, CancellationToken cancel,
        bool certified = false)
    {
        solvers[number].Solve(b, z, tolerance, workspace, cancel);
        SolveReport report = workspace.Report;
        List<int> failed = [];
        for (int column = 0; column < columns; column++)
        {
            if (report.EnergyErrors[column] <= tolerance)
                Statistics.Add(1, 0, report.Iterations, report.Residuals[column], report.EnergyErrors[column]);
            else
                failed.Add(column);
        }
        if (failed.Count == 0)
            return;
        using Panel<double> b2 = new(network.NodeCount), z2 = new(network.NodeCount);
        using SolverWorkspace<double> doubles = NewWorkspace<double>();
        Component component = network.Components[number];
        foreach (int[] some in failed.Chunk(Panel<double>.Width))
        {
            for (int u = component.Start; u < component.End; u++)
            {
                b2.Row(u).Clear();
                for (int j = 0; j < some.Length; j++)
                    b2.Row(u)[j] = b.At(u, some[j]);
            }
            if (certified)
                solvers[number].Solve(b2, z2, tolerance, doubles, cancel);
            else
                SolveInDoubles(number, b2, z2, some.Length, tolerance, doubles, Statistics, some.Length, cancel);
            for (int u = component.Start; u < component.End; u++)
            {
                for (int j = 0; j < some.Length; j++)
                    z.At(u, some[j]) = z2.Row(u)[j];
            }
        }
    }
}

internal sealed partial class ComponentSolver
{
    /// <summary>z = L+ b on the component's rows, centred, in mixed precision; reports as the other solves do.</summary>
    public void Solve(PanelPair b, PanelPair z, double tolerance, RefinedWorkspace workspace, CancellationToken cancel)
    {
        (int start, int end) = (component.Start, component.End);
        SolveLimits limits = SolveLimits.For(tolerance, GradientRows);
        if (coreRows is null)
        {
            new RefinedGradient(core, single, b, z, workspace, start, end, default, limits).Solve(cancel);
            for (int half = 0; half < 2; half++)
                PanelKernels.Centre(z[half], start, end);
            return;
        }
        LaneSums eliminated = default;
        for (int half = 0; half < 2; half++)
        {
            ConjugateGradient.Copy(b[half], z[half], start, end);
            Put(FactorKernels.Eliminate<double>(steps, z[half]), half, ref eliminated);
            FactorKernels.Gather(z[half], coreRows, workspace.CoreB[half]);
        }
        new RefinedGradient(core, single, workspace.CoreB, workspace.CoreX, workspace, 0, core.NodeCount, eliminated, limits).Solve(cancel);
        LaneSums size = default, coreSize = default, residual = default;
        for (int half = 0; half < 2; half++)
        {
            FactorKernels.Scatter(workspace.CoreX[half], coreRows, z[half]);
            FactorKernels.Restore<double>(steps, z[half]);
            PanelKernels.Centre(z[half], start, end);
            Put(PanelKernels.Squares(b[half], start, end), half, ref size);
            Put(PanelKernels.Squares(workspace.CoreB[half], 0, core.NodeCount), half, ref coreSize);
            Put(PanelKernels.Residual(laplacian, b[half], z[half], null, start, end), half, ref residual);
        }
        // As in floats: what is more than the core's residual, rounding did on the way through the eliminated nodes.
        SolveReport report = workspace.Report;
        for (int lane = 0; lane < PanelPair.Width; lane++)
        {
            double ofCore = report.Residuals[lane] * report.Residuals[lane] * coreSize[lane];
            if (residual[lane] > (4 * ofCore) + (1e-12 * size[lane]))
                report.EnergyErrors[lane] = double.PositiveInfinity;
            report.Residuals[lane] = size[lane] > 0 ? Math.Sqrt(residual[lane] / size[lane]) : 0;
        }

        static void Put(in LaneSums from, int half, ref LaneSums to)
        {
            for (int lane = 0; lane < PanelPair.Half; lane++)
                to[(half * PanelPair.Half) + lane] = from[lane];
        }
    }
}
