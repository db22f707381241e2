// One component made ready for many solves: what can be eliminated exactly is, and the core gets the preconditioner that a short trial favours.
// Invariant: what is prepared depends on the component and the seed alone, never on clocks or threads, so that runs repeat to the bit.

using System.Collections.Concurrent;
using System.Numerics;
using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Solving;

/// <summary>Panels that the solves of one thread share; sized for the largest core.</summary>
/// <typeparam name="T"><see cref="float"/> or <see cref="double"/>.</typeparam>
public sealed class SolverWorkspace<T> : IDisposable
    where T : unmanaged, INumber<T>
{
    internal SolverWorkspace(int gradientRows, int coreRows)
    {
        Gradient = new GradientWorkspace<T>(gradientRows);
        CoreB = new Panel<T>(coreRows);
        CoreX = new Panel<T>(coreRows);
    }

    internal GradientWorkspace<T> Gradient { get; }

    internal Panel<T> CoreB { get; }

    internal Panel<T> CoreX { get; }

    internal SolveReport Report { get; } = new();

    /// <inheritdoc/>
    public void Dispose()
    {
        Gradient.Dispose();
        CoreB.Dispose();
        CoreX.Dispose();
    }
}

/// <summary>Solves on one component of more than one node.</summary>
internal sealed partial class ComponentSolver
{
    private readonly Laplacian laplacian;
    private readonly Component component;
    private readonly EliminationStep[] steps = [];
    private readonly int[]? coreRows; // the Laplacian's row of each row of the core; null: the component itself, in place
    private readonly Laplacian core;
    private readonly IPreconditionedLaplacian<float> single;
    private readonly IPreconditionedLaplacian<double> twice;

    public ComponentSolver(Laplacian laplacian, Component component, int solves, ulong seed, CancellationToken cancel)
    {
        this.laplacian = laplacian;
        this.component = component;
        Elimination elimination = Elimination.Of(laplacian, component);
        bool inPlace = elimination.Steps.Count == 0 && component.Start == 0;
        core = laplacian;
        if (!inPlace)
        {
            steps = [.. elimination.Steps];
            coreRows = elimination.Core;
            core = elimination.BuildCore();
        }
        int coreNodes = elimination.Core.Length;
        Choice = coreNodes == 1
            ? PreconditionerChoice.None
            : PreconditionerChoice.ByTrial(core, coreNodes, () => inPlace ? elimination.BuildCore() : core, solves, seed, cancel);
        if (Choice.Factor is not null && inPlace)
        {
            coreRows = elimination.Core;
            core = elimination.BuildCore();
        }
        if (Choice.Factor is SampledFactor factor)
        {
            coreRows = Compose(coreRows, factor.Order);
            core = Renumbered(core, factor.Order);
            single = new SampledElimination<float>(core, factor);
            twice = new SampledElimination<double>(core, factor);
        }
        else
        {
            SplitLaplacian split = SplitLaplacian.Of(core);
            single = new GaussSeidel<float>(split, Choice.LeastEigenvalue);
            twice = new GaussSeidel<double>(split, Choice.LeastEigenvalue);
        }
    }

    /// <summary>What preconditions the core, and why.</summary>
    public PreconditionerChoice Choice { get; }

    /// <summary>Nodes eliminated exactly.</summary>
    public int Eliminated => steps.Length;

    /// <summary>Rows that the three panels of an iteration need.</summary>
    public int GradientRows => coreRows is null ? component.End : core.NodeCount;

    /// <summary>Rows that the core's own right-hand sides and solutions need; 0 where the core is the component in place.</summary>
    public int CoreRows => coreRows is null ? 0 : core.NodeCount;

    /// <summary>
    /// z = L+ b on the component's rows, centred. Energy errors go to the workspace's report, and the true residuals of the whole component.
    /// </summary>
    public void Solve<T>(Panel<T> b, Panel<T> z, double tolerance, SolverWorkspace<T> workspace, CancellationToken cancel)
        where T : unmanaged, INumber<T>
    {
        (int start, int end) = (component.Start, component.End);
        IPreconditionedLaplacian<T> preconditioner = typeof(T) == typeof(float) ? (IPreconditionedLaplacian<T>)single : (IPreconditionedLaplacian<T>)twice;
        SolveLimits limits = SolveLimits.For(tolerance, GradientRows);
        SolveReport report = workspace.Report;
        if (coreRows is null)
        {
            ConjugateGradient.Solve(preconditioner, b, z, workspace.Gradient, start, end, default, limits, report, cancel);
            PanelKernels.Centre(z, start, end);
            return;
        }
        ConjugateGradient.Copy(b, z, start, end);
        LaneSums eliminated = FactorKernels.Eliminate<T>(steps, z);
        FactorKernels.Gather(z, coreRows, workspace.CoreB);
        ConjugateGradient.Solve(
            preconditioner, workspace.CoreB, workspace.CoreX, workspace.Gradient, 0, core.NodeCount, eliminated, limits, report, cancel);
        FactorKernels.Scatter(workspace.CoreX, coreRows, z);
        FactorKernels.Restore<T>(steps, z);
        PanelKernels.Centre(z, start, end);
        // In exact arithmetic the whole residual is the core's. What is more than that, rounding did on the way through the eliminated nodes.
        LaneSums size = PanelKernels.Squares(b, start, end), coreSize = PanelKernels.Squares(workspace.CoreB, 0, core.NodeCount);
        LaneSums residual = PanelKernels.Residual(laplacian, b, z, null, start, end);
        for (int lane = 0; lane < Panel<T>.Width; lane++)
        {
            double ofCore = report.Residuals[lane] * report.Residuals[lane] * coreSize[lane];
            if (residual[lane] > (4 * ofCore) + (1e-6 * size[lane]))
                report.EnergyErrors[lane] = double.PositiveInfinity;
            report.Residuals[lane] = size[lane] > 0 ? Math.Sqrt(residual[lane] / size[lane]) : 0;
        }
    }

    private static int[] Compose(int[]? rows, int[] order) => rows is null ? order : [.. order.Select(row => rows[row])];

    /// <summary>The same Laplacian with row order[i] as row i.</summary>
    internal static Laplacian Renumbered(Laplacian laplacian, int[] order)
    {
        int n = order.Length;
        int[] place = new int[n];
        long[] rowStart = new long[n + 1];
        for (int i = 0; i < n; i++)
        {
            place[order[i]] = i;
            rowStart[i + 1] = rowStart[i] + (laplacian.RowStart[order[i] + 1] - laplacian.RowStart[order[i]]);
        }
        double[] strengths = new double[n];
        int[] neighbours = GC.AllocateUninitializedArray<int>(laplacian.Neighbours.Length);
        double[]? conductances = laplacian.Conductances is null ? null : GC.AllocateUninitializedArray<double>(neighbours.Length);
        Parallel.ForEach(Partitioner.Create(0, n), range =>
        {
            for (int i = range.Item1; i < range.Item2; i++)
            {
                strengths[i] = laplacian.Strengths[order[i]];
                long write = rowStart[i];
                for (long k = laplacian.RowStart[order[i]]; k < laplacian.RowStart[order[i] + 1]; k++, write++)
                {
                    neighbours[write] = place[laplacian.Neighbours[k]];
                    if (conductances is not null)
                        conductances[write] = laplacian.Conductances![k];
                }
            }
        });
        return new Laplacian(rowStart, neighbours, conductances, strengths);
    }
}
