// An arc in eight bytes, and a link that elimination adds.
// Invariant: the other end stands in the upper half, so arcs sort by their ends.

namespace ScaleResist.Solving;

/// <summary>An arc to a node with a weight, in floats: the factor's shares are floats too.</summary>
/// <param name="Bits">The other end above, the bits of the weight below.</param>
internal readonly record struct Arc(ulong Bits)
{
    /// <summary>An arc to a node.</summary>
    public Arc(int to, float weight)
        : this(((ulong)(uint)to << 32) | BitConverter.SingleToUInt32Bits(weight))
    {
    }

    /// <summary>The other end.</summary>
    public int To => (int)(Bits >> 32);

    /// <summary>A conductance, or a share.</summary>
    public float Weight => BitConverter.UInt32BitsToSingle((uint)Bits);

    /// <summary>Whether both lead to the same node.</summary>
    public bool IsParallelTo(Arc other) => (Bits ^ other.Bits) >> 32 == 0;

    /// <summary>Parallel arcs made one.</summary>
    public Arc MergedWith(Arc other) => new(To, Weight + other.Weight);
}

/// <summary>A link to add; weight 0: none.</summary>
internal readonly record struct SampledLink(int A, int B, float Weight);
