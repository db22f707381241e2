// L and its preconditioner M as conjugate gradient meets them: in the two halves of an iteration, so that each can fuse its passes over the panels.
// Invariant: M is symmetric, and positive on vectors that sum to zero.

using System.Numerics;
using ScaleResist.Kernels;

namespace ScaleResist.Solving;

/// <summary>
/// An iteration on the rows <c>start .. end-1</c>, which are one component: <see cref="Product"/>, then <see cref="Advance"/>. Must be safe to
/// call from several threads with workspaces of their own.
/// </summary>
/// <typeparam name="T"><see cref="float"/> or <see cref="double"/>.</typeparam>
internal interface IPreconditionedLaplacian<T>
    where T : unmanaged, INumber<T>
{
    /// <summary>The least eigenvalue of M L on vectors that sum to zero, as far as it is known before a solve: an upper bound to start from.</summary>
    double LeastEigenvalue { get; }

    /// <summary>r = b, the residual of x = 0; gives |r|^2 and r'M r by column.</summary>
    void Begin(Panel<T> b, GradientWorkspace<T> workspace, int start, int end, out LaneSums squares, out LaneSums energies);

    /// <summary>r = b - L x; gives |r|^2 and r'M r by column.</summary>
    void BeginAt(Panel<T> b, Panel<T> x, GradientWorkspace<T> workspace, int start, int end, out LaneSums squares, out LaneSums energies);

    /// <summary>p = M r + beta p with one factor a column (0: whatever p held); returns p'L p by column.</summary>
    LaneSums Product(in LaneSums beta, GradientWorkspace<T> workspace, int start, int end);

    /// <summary>x += a p, r -= a L p with one factor a column; returns r'M r by column.</summary>
    LaneSums Advance(in LaneSums a, Panel<T> x, GradientWorkspace<T> workspace, int start, int end);
}
