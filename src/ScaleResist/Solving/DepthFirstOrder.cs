// An order of a factor's nodes in which the sweeps' rows lie near what they gather: depth-first over predecessors, from the last node eliminated.
// Invariant: every node comes after all of its predecessors, so it is an order of elimination of the same factor.

namespace ScaleResist.Solving;

/// <summary>Post-order over predecessors.</summary>
internal static class DepthFirstOrder
{
    /// <summary>O(nodes + arcs).</summary>
    /// <param name="columns">All columns of a factor.</param>
    /// <returns>The nodes in order, the place of each node, and an array of one entry an arc that nobody needs any more.</returns>
    public static (int[] Order, int[] Place, int[] Scratch) Of(FactorColumns columns)
    {
        int n = columns.Count;
        (long[] start, int[] predecessors) = Predecessors(columns);
        int[] order = new int[n], stack = new int[n], place = new int[n]; // place: 0 not seen, -1 on the stack, else one more than the place
        long[] next = start.AsSpan(0, n).ToArray();
        int written = 0;
        for (int last = n - 1; last >= 0; last--)
        {
            if (place[columns.Order[last]] != 0)
                continue;
            int depth = 0;
            Push(columns.Order[last]);
            while (depth > 0)
            {
                int v = stack[depth - 1];
                if (next[v] < start[v + 1])
                {
                    int u = predecessors[next[v]++];
                    if (place[u] == 0)
                        Push(u);
                    continue;
                }
                depth--;
                order[written++] = v;
                place[v] = written;
            }

            void Push(int node)
            {
                place[node] = -1;
                stack[depth++] = node;
            }
        }
        for (int v = 0; v < n; v++)
            place[v]--;
        return (order, place, predecessors);
    }

    // By node, in the order of elimination.
    private static (long[] Start, int[] Nodes) Predecessors(FactorColumns columns)
    {
        int n = columns.Count;
        long[] at = new long[n + 1]; // where a node's predecessors end, then where they start
        for (int k = 0; k < n; k++)
        {
            foreach (Arc arc in columns.Column(k))
                at[arc.To]++;
        }
        for (int v = 1; v <= n; v++)
            at[v] += at[v - 1];
        int[] nodes = GC.AllocateUninitializedArray<int>(checked((int)columns.ArcCount));
        for (int k = n - 1; k >= 0; k--)
        {
            foreach (Arc arc in columns.Column(k))
                nodes[--at[arc.To]] = columns.Order[k];
        }
        return (at, nodes);
    }
}
