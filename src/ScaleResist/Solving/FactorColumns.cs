// The columns of a factor in the order of elimination, as they come into being: blocks of arcs, so that growing never copies.
// Invariant: a column's arcs lead to nodes that are eliminated later.

namespace ScaleResist.Solving;

/// <summary>Columns by place in the order of elimination; their arcs lead to the Laplacian's nodes and carry shares w / d.</summary>
/// <param name="nodes">The number of columns to come.</param>
internal sealed class FactorColumns(int nodes)
{
    private const int BlockArcs = 1 << 20;
    private readonly List<Arc[]> blocks = [];
    private readonly (int Block, int Offset, int Length)[] at = new (int, int, int)[nodes];
    private int used;

    /// <summary>Columns so far.</summary>
    public int Count { get; private set; }

    /// <summary>Arcs of all columns.</summary>
    public long ArcCount { get; private set; }

    /// <summary>The node eliminated at each place.</summary>
    public int[] Order { get; } = new int[nodes];

    /// <summary>1 / d by place, 0 for the last.</summary>
    public float[] Inverse { get; } = new float[nodes];

    /// <summary>Opens a column of a node, to be filled in; returns its place.</summary>
    public int Open(int node, int length)
    {
        if (blocks.Count == 0 || used + length > blocks[^1].Length)
        {
            blocks.Add(GC.AllocateUninitializedArray<Arc>(Math.Max(length, BlockArcs)));
            used = 0;
        }
        Order[Count] = node;
        at[Count] = (blocks.Count - 1, used, length);
        used += length;
        ArcCount += length;
        return Count++;
    }

    /// <summary>The arcs of a column.</summary>
    public Span<Arc> Column(int place)
    {
        (int block, int offset, int length) = at[place];
        return blocks[block].AsSpan(offset, length);
    }

    /// <summary>The number of arcs of a column.</summary>
    public int Length(int place) => at[place].Length;
}
