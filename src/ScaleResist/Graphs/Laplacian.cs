// The weighted Laplacian L = D - A in compressed rows: what kernels and solvers work on, be it a network's or a reduced core's.
// Invariant: rows are symmetric, without self-loops or duplicates; Strengths[u] is the sum of the conductances of row u.

namespace ScaleResist.Graphs;

/// <summary>L of n nodes. Row u's neighbours are <c>Neighbours[RowStart[u] .. RowStart[u+1]-1]</c>.</summary>
/// <param name="rowStart">n + 1 offsets.</param>
/// <param name="neighbours">One entry an arc.</param>
/// <param name="conductances">Beside the neighbours, or null where all are 1.</param>
/// <param name="strengths">n values d_u = L_uu.</param>
public sealed class Laplacian(long[] rowStart, int[] neighbours, double[]? conductances, double[] strengths)
{
    /// <summary>n + 1 offsets into <see cref="Neighbours"/>.</summary>
    public long[] RowStart { get; } = rowStart;

    /// <summary>Neighbours, row by row.</summary>
    public int[] Neighbours { get; } = neighbours;

    /// <summary>Conductances beside <see cref="Neighbours"/>, or null where all are 1.</summary>
    public double[]? Conductances { get; } = conductances;

    /// <summary>The diagonal.</summary>
    public double[] Strengths { get; } = strengths;

    /// <summary>n.</summary>
    public int NodeCount => Strengths.Length;

    /// <summary>The conductance of an arc.</summary>
    public double Conductance(long arc) => Conductances is null ? 1 : Conductances[arc];
}
