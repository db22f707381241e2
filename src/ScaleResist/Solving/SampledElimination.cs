// The sampled factor as a preconditioner: one sweep forward, one back, on the whole panel.

using System.Numerics;
using ScaleResist.Kernels;

namespace ScaleResist.Solving;

/// <summary>M = the inverse of a sampled factor, in the factor's own numbering from row 0. The factor is shared, also by other widths.</summary>
/// <typeparam name="T"><see cref="float"/> or <see cref="double"/>; the factor itself is in floats.</typeparam>
internal sealed class SampledElimination<T>(SampledFactor factor) : IPreconditioner<T>
    where T : unmanaged, INumber<T>
{
    private readonly FactorHalf rows = new(factor.RowStart, factor.Predecessors, factor.RowShares);
    private readonly FactorHalf columns = new(factor.ColumnStart, factor.Successors, factor.ColumnShares);

    /// <inheritdoc/>
    public double LeastEigenvalue => 1;

    /// <inheritdoc/>
    public string Name => "sampled elimination";

    /// <inheritdoc/>
    public LaneSums Apply(Panel<T> r, Panel<T> s, int start, int end)
    {
        FactorKernels.Forward(rows, r, s, end);
        return FactorKernels.Back(columns, factor.Inverse, r, s, end);
    }
}
