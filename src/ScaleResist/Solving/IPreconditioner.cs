// The place where a faster solver enters: anything that approximates L+ on a panel, symmetric and positive on vectors that sum to zero.

using System.Numerics;
using ScaleResist.Kernels;

namespace ScaleResist.Solving;

/// <summary>s = M r with M close to the inverse of the Laplacian. Must be safe to call from several threads on different panels.</summary>
/// <typeparam name="T"><see cref="float"/> or <see cref="double"/>.</typeparam>
public interface IPreconditioner<T>
    where T : unmanaged, INumber<T>
{
    /// <summary>The name that reports show.</summary>
    string Name { get; }

    /// <summary>The least eigenvalue of M L on vectors that sum to zero, as far as it is known before a solve: an upper bound to start from.</summary>
    double LeastEigenvalue { get; }

    /// <summary>Applies M to the rows <c>start .. end-1</c>, which are one component; returns r's by column.</summary>
    LaneSums Apply(Panel<T> r, Panel<T> s, int start, int end);
}
