// The sampled factor as a preconditioner, M = (I-C)^-T D^-1 (I-C)^-1, in three passes over the panels an iteration.
// r'M r = y'D^-1 y is known after the forward sweep y = (I-C)^-1 r, so the back sweep s = (I-C)^-T D^-1 y can go on to the direction.
// In the workspace Q holds y, then s, then L p.

using System.Numerics;
using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Solving;

/// <summary>M = the inverse of a sampled factor, in the factor's own numbering from row 0. The factor is shared, also by other widths.</summary>
/// <typeparam name="T"><see cref="float"/> or <see cref="double"/>; the factor itself is in floats.</typeparam>
/// <param name="laplacian">L in the factor's numbering.</param>
/// <param name="factor">The factor.</param>
internal sealed class SampledElimination<T>(Laplacian laplacian, SampledFactor factor) : IPreconditionedLaplacian<T>
    where T : unmanaged, INumber<T>
{
    private readonly FactorHalf rows = new(factor.RowStart, factor.Predecessors, factor.RowShares);
    private readonly FactorHalf columns = new(factor.ColumnStart, factor.Successors, factor.ColumnShares);

    /// <inheritdoc/>
    public double LeastEigenvalue => 1;

    /// <inheritdoc/>
    public void Begin(Panel<T> b, GradientWorkspace<T> workspace, int start, int end, out LaneSums squares, out LaneSums energies)
    {
        ConjugateGradient.Copy(b, workspace.R, start, end);
        squares = PanelKernels.Squares(b, start, end);
        energies = FactorKernels.Forward(rows, factor.Inverse, workspace.R, workspace.Q, end);
    }

    /// <inheritdoc/>
    public void BeginAt(Panel<T> b, Panel<T> x, GradientWorkspace<T> workspace, int start, int end, out LaneSums squares, out LaneSums energies)
    {
        squares = PanelKernels.Residual(laplacian, b, x, workspace.R, start, end);
        energies = FactorKernels.Forward(rows, factor.Inverse, workspace.R, workspace.Q, end);
    }

    /// <inheritdoc/>
    public LaneSums Product(in LaneSums beta, GradientWorkspace<T> workspace, int start, int end)
    {
        FactorKernels.Back(columns, factor.Inverse, workspace.Q, workspace.P, beta, end);
        return PanelKernels.Multiply(laplacian, workspace.P, workspace.Q, start, end);
    }

    /// <inheritdoc/>
    public LaneSums Advance(in LaneSums a, Panel<T> x, GradientWorkspace<T> workspace, int start, int end) =>
        FactorKernels.StepForward(rows, factor.Inverse, x, workspace.R, workspace.P, workspace.Q, a, end);
}
