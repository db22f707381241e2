// The columns of a factor in the order of elimination, as they come into being.
// Invariant: a column's successors are nodes that are eliminated later.

using System.Runtime.InteropServices;

namespace ScaleResist.Solving;

/// <summary>Columns by place in the order of elimination; their arcs lead to nodes of the Laplacian and carry shares w / d.</summary>
/// <param name="nodes">The number of columns to come.</param>
internal sealed class FactorColumns(int nodes)
{
    private const int BlockEntries = 1 << 20;
    private readonly List<Arc[]> blocks = []; // growing never copies

    private readonly int[] blockOf = new int[nodes];
    private readonly int[] offset = new int[nodes];

    /// <summary>Columns so far.</summary>
    public int Count { get; private set; }

    /// <summary>The node eliminated at each place.</summary>
    public int[] Order { get; } = new int[nodes];

    /// <summary>Offsets by place.</summary>
    public long[] Start { get; } = new long[nodes + 1];

    /// <summary>1 / d by place, 0 for the last.</summary>
    public float[] Inverse { get; } = new float[nodes];

    public Span<Arc> Column(int place) => blocks[blockOf[place]].AsSpan(offset[place], (int)(Start[place + 1] - Start[place]));
    private int used = BlockEntries;

    /// <summary>Opens a column for a node; returns its place.</summary>
    public int Open(int node, int length)
    {
        if (blocks.Count == 0 || used + length > blocks[^1].Length)
        {
            blocks.Add(GC.AllocateUninitializedArray<Arc>(Math.Max(length, BlockEntries)));
            used = 0;
        }
        Order[Count] = node;
        blockOf[Count] = blocks.Count - 1;
        offset[Count] = used;
        used += length;
        Start[Count + 1] = Start[Count] + length;
        return Count++;
    }

    /// <summary>Makes room for the columns that were opened.</summary>
    public void MakeRoom()
    {
    }
}
