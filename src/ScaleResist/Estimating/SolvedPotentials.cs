// Columns of L+ from the iterative solver, in mixed precision, where a factor is not affordable. The diagonal comes from probes.
// Invariant: every column meets its tolerance, or the run ends with an error.

using ScaleResist.Graphs;
using ScaleResist.Kernels;
using ScaleResist.Solving;

namespace ScaleResist.Estimating;

/// <summary>Solved columns; safe from several threads, each with a workspace.</summary>
internal sealed class SolvedPotentials : Potentials
{
    /// <summary>
    /// The relative error of a column in the energy norm. Sums of squares of x = L+ b are worse by at most 2 |x|_L / (|x| sqrt(lambda_2)), some
    /// hundreds on road-like networks of a million nodes.
    /// </summary>
    public const double Tolerance = 1e-10;

    private readonly LaplacianSolver solver;

    /// <summary>Uses a solver, and the diagonals that probes found.</summary>
    public SolvedPotentials(Network network, LaplacianSolver solver, Estimate[] diagonals)
        : base(network)
    {
        this.solver = solver;
        Diagonal = Array.ConvertAll(diagonals, l => l.Value);
        DiagonalErrors = Array.ConvertAll(diagonals, l => l.StandardError);
    }

    /// <inheritdoc/>
    public override ResistanceMethod Method => ResistanceMethod.Solve;

    /// <summary>Bytes that the workspace of one thread takes: four panels of floats and two pairs of doubles.</summary>
    public static long BytesPerThread(Network network) => network.NodeCount * 512L;

    /// <inheritdoc/>
    public override IDisposable NewWorkspace() => solver.NewRefinedWorkspace();

    /// <inheritdoc/>
    public override void Dispose()
    {
    }

    protected override void SolveColumns(
        PanelPair b, PanelPair x, int used, IReadOnlyCollection<int> components, IDisposable workspace, CancellationToken cancel)
    {
        foreach (int c in components)
        {
            Component range = Network.Components[c];
            if (range.Nodes == 1)
                x.Clear(range.Start, range.End);
            else
                solver.SolveRefined(c, b, x, used, Tolerance, (RefinedWorkspace)workspace, cancel);
        }
    }
}
