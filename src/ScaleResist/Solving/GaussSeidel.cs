// Symmetric Gauss-Seidel: enough on social cores, where conjugate gradient needs few steps; slow on meshes and roads.
// In the workspace R holds rho, P holds pi and Q holds t, then s: see GaussSeidelKernels.

using System.Numerics;
using ScaleResist.Kernels;

namespace ScaleResist.Solving;

/// <summary>M = (D+Up)^-1 D (D+Lo)^-1 for L = D + Lo + Up in the order of the rows.</summary>
/// <typeparam name="T"><see cref="float"/> or <see cref="double"/>.</typeparam>
/// <param name="split">L and its triangles.</param>
/// <param name="leastEigenvalue">What a trial saw; 1 where there was none.</param>
internal sealed class GaussSeidel<T>(SplitLaplacian split, double leastEigenvalue = 1) : IPreconditionedLaplacian<T>
    where T : unmanaged, INumber<T>
{
    /// <inheritdoc/>
    public double LeastEigenvalue => leastEigenvalue;

    /// <inheritdoc/>
    public void Begin(Panel<T> b, GradientWorkspace<T> workspace, int start, int end, out LaneSums squares, out LaneSums energies) =>
        GaussSeidelKernels.Start(split, b, workspace.R, start, end, out squares, out energies);

    /// <inheritdoc/>
    public void BeginAt(
        Panel<T> b, Panel<T> x, GradientWorkspace<T> workspace, int start, int end, out LaneSums squares, out LaneSums energies)
    {
        PanelKernels.Residual(split.Laplacian, b, x, workspace.R, start, end);
        GaussSeidelKernels.Start(split, workspace.R, workspace.R, start, end, out squares, out energies);
    }

    /// <inheritdoc/>
    public LaneSums Product(in LaneSums beta, GradientWorkspace<T> workspace, int start, int end) =>
        GaussSeidelKernels.Back(split, workspace.R, workspace.P, workspace.Q, beta, start, end);

    /// <inheritdoc/>
    public LaneSums Advance(in LaneSums a, Panel<T> x, GradientWorkspace<T> workspace, int start, int end) =>
        GaussSeidelKernels.Forward(split, x, workspace.R, workspace.P, workspace.Q, a, start, end);
}
