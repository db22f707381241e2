// Sums over the rows of a panel, one a column, in doubles: chunks of fixed length in a fixed order.
// Invariant: a sum depends on the values alone, never on threads or on the width of the machine's vectors.

using System.Runtime.CompilerServices;

namespace ScaleResist.Kernels;

/// <summary>Sixteen doubles, one for each column of a float panel (the first eight for a double panel).</summary>
[InlineArray(16)]
public struct LaneSums
{
    /// <summary>Rows whose products are added in the panel's own precision before they enter the doubles.</summary>
    public const int ChunkRows = 256;

    private double first;
}
