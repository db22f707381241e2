// The structure of a supernodal factor of a grounded Laplacian: what is stored, what it costs in work and memory, before a number is touched.
// Invariant: places number the nodes in the order of the factor, the ground last; a front's own places are one run, its rows ascend, and
// every row of a front is among its parent's own places and rows.

using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Solving;

/// <summary>
/// Fronts in post-order. Front f eliminates the places <c>First[f] .. First[f+1]-1</c> (s of them) and reaches the later places
/// <c>Rows[RowStart[f] ..]</c> (r of them), beside the ground.
/// </summary>
internal sealed class SymbolicCholesky
{
    private const int TreeBytes = 60; // a node: parents, counts, orders and what finds them
    private readonly long arcs;

    private SymbolicCholesky(Laplacian laplacian, int[] order, Supernodes supernodes, long entries)
    {
        int n = laplacian.NodeCount;
        arcs = laplacian.Neighbours.Length;
        Count = supernodes.Count;
        Entries = entries;
        First = supernodes.Start;
        Parent = supernodes.Parent;
        Nodes = new int[n];
        Places = new int[n];
        for (int place = 0; place < n - 1; place++)
            Nodes[place] = order[supernodes.Columns[place]];
        Nodes[n - 1] = order[n - 1];
        for (int place = 0; place < n; place++)
            Places[Nodes[place]] = place;
        RowStart = new long[Count + 1];
        ValueStart = new long[Count + 1];
        FirstChild = new int[Count];
        Sibling = new int[Count];
        Odd = new bool[Count];
        Array.Fill(FirstChild, -1);
        for (int f = 0; f < Count; f++)
        {
            RowStart[f + 1] = RowStart[f] + supernodes.Rows[f];
            ValueStart[f + 1] = ValueStart[f] + FrontSize.Values(Own(f), supernodes.Rows[f]);
        }
        int roots = -1;
        for (int f = Count - 1; f >= 0; f--)
        {
            ref int first = ref Parent[f] < 0 ? ref roots : ref FirstChild[Parent[f]];
            (Sibling[f], first) = (first, f);
            Odd[f] = Parent[f] >= 0 && !Odd[Parent[f]];
            Operations += FrontSize.EliminationOperations(Own(f), RowCount(f));
            InversionOperations += FrontSize.InversionOperations(Own(f), RowCount(f));
        }
        Rows = new int[RowStart[Count]];
        Relative = new int[RowStart[Count]];
        FindRows(laplacian);
        FindRelative();
        Schedule = FrontSchedule.Of(this);
    }

    /// <summary>The number of fronts.</summary>
    public int Count { get; }

    /// <summary>The node at each place, n; the last is grounded.</summary>
    public int[] Nodes { get; }

    /// <summary>The place of each node, n.</summary>
    public int[] Places { get; }

    /// <summary>First own place of each front; Count + 1.</summary>
    public int[] First { get; }

    /// <summary>Offsets into <see cref="Rows"/>; Count + 1.</summary>
    public long[] RowStart { get; }

    /// <summary>Later places, ascending by front.</summary>
    public int[] Rows { get; }

    /// <summary>Beside <see cref="Rows"/>: the number of the row in the parent's front, own places first.</summary>
    public int[] Relative { get; }

    /// <summary>The parent of each front, -1 at a root.</summary>
    public int[] Parent { get; }

    /// <summary>The first child of each front, or -1.</summary>
    public int[] FirstChild { get; }

    /// <summary>The next child of the same parent, or -1.</summary>
    public int[] Sibling { get; }

    /// <summary>Whether the front's depth in the tree is odd.</summary>
    public bool[] Odd { get; }

    /// <summary>Offsets of the fronts' values in the factor; Count + 1.</summary>
    public long[] ValueStart { get; }

    /// <summary>What runs side by side.</summary>
    public FrontSchedule Schedule { get; }

    /// <summary>Entries of the Cholesky factor of the grounded Laplacian in this order, the diagonal included: exact.</summary>
    public long Entries { get; }

    /// <summary>Doubles that the factor stores: the entries, the zeros of relaxed supernodes, and both halves of diagonal blocks.</summary>
    public long StoredEntries => ValueStart[Count];

    /// <summary>Floating-point operations of the factorisation, a multiplication and an addition counted as two.</summary>
    public long Operations { get; }

    /// <summary>Floating-point operations of the selected inversion.</summary>
    public long InversionOperations { get; }

    /// <summary>
    /// Bytes that structure, factor and selected inverse take at their peak, beside the Laplacian: exact but for the runtime's own.
    /// </summary>
    /// <param name="threads">Threads.</param>
    /// <param name="slopes">Whether the selected inverse has slopes too.</param>
    public long PeakBytes(int threads, bool slopes = false)
    {
        long n = Nodes.Length, structure = (12 * n) + (33L * Count) + (8 * RowStart[Count]);
        long factor = sizeof(double) * (StoredEntries + DenseKernels.Tile);
        long elimination = Schedule.EliminationBytes(threads), entries = (8 * n) + (8 * arcs);
        long inversion = slopes
            ? (2 * entries) + factor + Math.Max(Schedule.EliminationBytes(threads), Schedule.InversionBytes(threads, slopes))
            : entries + Schedule.InversionBytes(threads, slopes);
        long finding = TreeBytes * n; // while the tree is found and before the factor is there
        return structure + Math.Max(finding, factor + Math.Max(elimination, inversion));
    }

    /// <summary>Own places of a front.</summary>
    public int Own(int front) => First[front + 1] - First[front];

    /// <summary>Later places of a front.</summary>
    public int RowCount(int front) => (int)(RowStart[front + 1] - RowStart[front]);

    /// <summary>The structure of the factor of L without the last node of the order, O(entries of the structure).</summary>
    /// <exception cref="SolveException">The network is not connected.</exception>
    public static SymbolicCholesky Of(Laplacian laplacian, int[] order)
    {
        EliminationTree tree = EliminationTree.Of(laplacian, order);
        int ground = order.Length - 1;
        int[] parent = tree.Parent, counts = tree.ColumnCounts;
        int roots = parent.Count(p => p < 0);
        if (roots != 1)
            throw new SolveException($"a factor needs one grounded node in every component: the network has {roots} components");
        LeaveOutGround(laplacian, order, parent, counts);
        long entries = 0;
        for (int column = 0; column < ground; column++)
            entries += counts[column];
        return new SymbolicCholesky(laplacian, order, Supernodes.Of(parent, counts, tree.PostOrder[..ground]), entries);
    }

    // The ground is the root and the last row of a column wherever a descendant is linked to it.
    private static void LeaveOutGround(Laplacian laplacian, int[] order, int[] parent, int[] counts)
    {
        int ground = order.Length - 1;
        int[] position = new int[order.Length];
        for (int k = 0; k < order.Length; k++)
            position[order[k]] = k;
        bool[] met = new bool[order.Length];
        met[ground] = true;
        for (long arc = laplacian.RowStart[order[ground]]; arc < laplacian.RowStart[order[ground] + 1]; arc++)
        {
            for (int column = position[laplacian.Neighbours[arc]]; !met[column]; column = parent[column])
            {
                met[column] = true;
                counts[column]--;
            }
        }
        for (int column = 0; column < ground; column++)
        {
            if (parent[column] == ground)
                parent[column] = -1;
        }
    }

    // Rows of a front: what its nodes are linked to and what its children reach, less its own places.
    private void FindRows(Laplacian laplacian)
    {
        int[] seen = new int[Nodes.Length];
        int ground = Nodes.Length - 1;
        Array.Fill(seen, -1);
        for (int f = 0; f < Count; f++)
        {
            int end = First[f + 1];
            long write = RowStart[f];
            seen[ground] = f;
            for (int place = First[f]; place < end; place++)
            {
                int node = Nodes[place];
                for (long arc = laplacian.RowStart[node]; arc < laplacian.RowStart[node + 1]; arc++)
                {
                    int row = Places[laplacian.Neighbours[arc]];
                    if (row >= end && seen[row] != f)
                    {
                        seen[row] = f;
                        Rows[write++] = row;
                    }
                }
            }
            for (int child = FirstChild[f]; child >= 0; child = Sibling[child])
            {
                for (long k = RowStart[child]; k < RowStart[child + 1]; k++)
                {
                    int row = Rows[k];
                    if (row >= end && seen[row] != f)
                    {
                        seen[row] = f;
                        Rows[write++] = row;
                    }
                }
            }
            if (write != RowStart[f + 1])
                throw new InvalidOperationException("The rows of a front were miscounted.");
            Rows.AsSpan((int)RowStart[f], RowCount(f)).Sort();
        }
    }

    private void FindRelative()
    {
        int[] local = new int[Nodes.Length];
        for (int f = 0; f < Count; f++)
        {
            if (FirstChild[f] < 0)
                continue;
            int own = Own(f);
            for (int i = 0; i < RowCount(f); i++)
                local[Rows[RowStart[f] + i]] = own + i;
            for (int child = FirstChild[f]; child >= 0; child = Sibling[child])
            {
                for (long k = RowStart[child]; k < RowStart[child + 1]; k++)
                    Relative[k] = Rows[k] < First[f + 1] ? Rows[k] - First[f] : local[Rows[k]];
            }
        }
    }
}
