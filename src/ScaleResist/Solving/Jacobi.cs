// The diagonal preconditioner: enough on social cores, where conjugate gradient needs few steps; slow on meshes and roads.

using System.Numerics;
using ScaleResist.Kernels;

namespace ScaleResist.Solving;

/// <summary>M = D^-1: each row divided by the node's strength.</summary>
/// <typeparam name="T"><see cref="float"/> or <see cref="double"/>.</typeparam>
/// <param name="strengths">The diagonal of L.</param>
/// <param name="leastEigenvalue">What a trial saw; 1 where there was none.</param>
public sealed class Jacobi<T>(double[] strengths, double leastEigenvalue = 1) : IPreconditioner<T>
    where T : unmanaged, INumber<T>
{
    /// <inheritdoc/>
    public double LeastEigenvalue => leastEigenvalue;

    /// <inheritdoc/>
    public string Name => "jacobi";

    /// <inheritdoc/>
    public LaneSums Apply(Panel<T> r, Panel<T> s, int start, int end) => PanelKernels.Scale(strengths, r, s, start, end);
}
