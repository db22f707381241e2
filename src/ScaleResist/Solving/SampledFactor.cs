// A sparse approximate Cholesky factor of a Laplacian: nodes are eliminated in order of degree, and of the clique that each leaves behind only a
// few links are kept, drawn so that the kept Laplacian has the right expectation (Kyng & Sachdeva 2016; Gao, Kyng & Spielman 2023).
//
// Eliminating v with merged neighbours sorted by weight w_1 <= ... <= w_k, d = sum w: for each i < k and each of S samples one j > i is drawn with
// probability w_j / W_i, W_i = sum over j > i of w_j, and joined to i by w_i W_i / (d S): in expectation w_i w_j / d, the clique's link.
// Invariant: shares of a column sum to 1 but for the last, whose pivot is 0; every predecessor of a node has a smaller number.
//
// The order is then renumbered depth-first over predecessors: a valid order of the same factor in which rows lie near what they gather.

using ScaleResist.Graphs;

namespace ScaleResist.Solving;

/// <summary>
/// L ~ (I - C') D (I - C) in its own numbering: forward y_v = r_v + sum over predecessors u of share(u,v) y_u,
/// back x_v = y_v / d_v + sum over successors w of share(v,w) x_w. The last node is grounded.
/// </summary>
internal sealed class SampledFactor
{
    private SampledFactor(int[] order, float[] inverse)
    {
        Order = order;
        Inverse = inverse;
    }

    /// <summary>The Laplacian's node at each place of the factor.</summary>
    public int[] Order { get; }

    /// <summary>Offsets by column: successors of a place.</summary>
    public long[] ColumnStart { get; private set; } = [];

    /// <summary>Later places that a place leads to.</summary>
    public int[] Successors { get; private set; } = [];

    /// <summary>w / d beside <see cref="Successors"/>.</summary>
    public float[] ColumnShares { get; private set; } = [];

    /// <summary>Offsets by row: predecessors of a place.</summary>
    public long[] RowStart { get; private set; } = [];

    /// <summary>Earlier places that lead to a place.</summary>
    public int[] Predecessors { get; private set; } = [];

    /// <summary>w / d beside <see cref="Predecessors"/>.</summary>
    public float[] RowShares { get; private set; } = [];

    /// <summary>1 / d by place; 0 at the last.</summary>
    public float[] Inverse { get; }

    /// <summary>Factorises a connected Laplacian.</summary>
    /// <param name="laplacian">L.</param>
    /// <param name="samples">S, 1 to 3 as a rule: more make a better and larger factor.</param>
    /// <param name="seed">Of the draws.</param>
    public static SampledFactor Of(Laplacian laplacian, int samples, ulong seed)
    {
        long t0 = System.Diagnostics.Stopwatch.GetTimestamp();
        FactorColumns columns = new(laplacian.NodeCount);
        ParallelOptions threads = new();
        RemainingGraph graph = new(laplacian, threads);
        IndependentRounds.Run(graph, columns, samples, seed, threads);
        long t1 = System.Diagnostics.Stopwatch.GetTimestamp();
        int rest = graph.Count;
        DegreeElimination.Run(graph, columns, samples, seed);
        long t2 = System.Diagnostics.Stopwatch.GetTimestamp();
        SampledFactor f = Finish(columns);
        long t3 = System.Diagnostics.Stopwatch.GetTimestamp();
        if (Environment.GetEnvironmentVariable("VERBOSE") is not null)
        Console.WriteLine($"   {IndependentRounds.T4} rounds {(t1-t0)/1e6:0} (select {IndependentRounds.T1/1e6:0} eliminate {IndependentRounds.T2/1e6:0} replace {IndependentRounds.T3/1e6:0}) rest {rest} {(t2-t1)/1e6:0} finish {(t3-t2)/1e6:0} ms");
        IndependentRounds.T1 = IndependentRounds.T2 = IndependentRounds.T3 = IndependentRounds.T4 = 0;
        return f;
    }

    private static SampledFactor Finish(FactorColumns columns)
    {
        int n = columns.Count;
        long t0 = System.Diagnostics.Stopwatch.GetTimestamp();
        // predecessors by node
        long[] rowStart = new long[n + 1];
        int[] columnOf = new int[n];
        long entries = columns.Start[n];
        for (int p = 0; p < n; p++)
        {
            foreach (Arc arc in columns.Column(p))
                rowStart[arc.To]++;
        }
        long end = 0;
        for (int v = 0; v < n; v++)
            rowStart[v] = end += rowStart[v];
        rowStart[n] = end;
        int[] predecessors = GC.AllocateUninitializedArray<int>((int)entries);
        for (int p = n - 1; p >= 0; p--)
        {
            int v = columns.Order[p];
            columnOf[v] = p;
            foreach (Arc arc in columns.Column(p))
                predecessors[--rowStart[arc.To]] = v;
        }
        long t1 = System.Diagnostics.Stopwatch.GetTimestamp();
        int[] order = DepthFirst(columns.Order, rowStart, predecessors, out int[] place);
        long t2 = System.Diagnostics.Stopwatch.GetTimestamp();
        SampledFactor factor = new(order, new float[n]);
        long[] start1 = new long[n + 1], start2 = new long[n + 1];
        for (int i = 0; i < n; i++)
        {
            int v = order[i], p = columnOf[v];
            start1[i + 1] = start1[i] + rowStart[v + 1] - rowStart[v];
            start2[i + 1] = start2[i] + columns.Start[p + 1] - columns.Start[p];
            factor.Inverse[i] = columns.Inverse[p];
        }
        factor.RowStart = start1;
        factor.ColumnStart = start2;
        factor.Successors = predecessors;
        factor.ColumnShares = GC.AllocateUninitializedArray<float>((int)entries);
        Parallel.For(0, (n + 2047) / 2048, chunk =>
        {
            for (int i = chunk * 2048; i < Math.Min(n, chunk * 2048 + 2048); i++)
                Move(columns.Column(columnOf[order[i]]), factor.Successors, factor.ColumnShares, (int)start2[i], place);
        });
        long t3 = System.Diagnostics.Stopwatch.GetTimestamp();
        factor.Predecessors = GC.AllocateUninitializedArray<int>((int)entries);
        factor.RowShares = GC.AllocateUninitializedArray<float>((int)entries);
        for (int i = n - 1; i >= 0; i--)
        {
            for (long k = start2[i]; k < start2[i + 1]; k++)
            {
                long to = --start1[factor.Successors[k] + 1];
                factor.Predecessors[to] = i;
                factor.RowShares[to] = factor.ColumnShares[k];
            }
        }
        start1.AsSpan(1).CopyTo(start1);
        start1[n] = entries;
        long t4 = System.Diagnostics.Stopwatch.GetTimestamp();
        if (Environment.GetEnvironmentVariable("VERBOSE") is not null)
            Console.WriteLine($"   transpose {(t1-t0)/1e6:0} depth first {(t2-t1)/1e6:0} move {(t3-t2)/1e6:0} rows {(t4-t3)/1e6:0}");
        return factor;
    }

    private static void Move(ReadOnlySpan<Arc> column, int[] toIndex, float[] toValue, int to, int[] place)
    {
        int count = column.Length;
        for (int i = 0; i < count; i++)
        {
            int x = place[column[i].To], j = to + i;
            float w = column[i].Conductance;
            if (count <= 24)
            {
                for (; j > to && toIndex[j - 1] > x; j--)
                {
                    toIndex[j] = toIndex[j - 1];
                    toValue[j] = toValue[j - 1];
                }
            }
            toIndex[j] = x;
            toValue[j] = w;
        }
        if (count > 24)
            Array.Sort(toIndex, toValue, to, count);
    }

    // From the last node backwards: each node after all of its predecessors.
    private static int[] DepthFirst(int[] eliminated, long[] rowStart, int[] predecessors, out int[] place)
    {
        int n = eliminated.Length;
        int[] order = new int[n], stack = new int[n];
        long[] cursor = rowStart.AsSpan(0, n).ToArray();
        place = new int[n]; // 0: not seen
        int written = 0;
        for (int root = n - 1; root >= 0; root--)
        {
            if (place[eliminated[root]] != 0)
                continue;
            int depth = 0;
            stack[depth++] = eliminated[root];
            place[eliminated[root]] = -1;
            while (depth > 0)
            {
                int at = stack[depth - 1];
                if (cursor[at] < rowStart[at + 1])
                {
                    int u = predecessors[cursor[at]++];
                    if (place[u] == 0)
                    {
                        place[u] = -1;
                        stack[depth++] = u;
                    }
                    continue;
                }
                depth--;
                order[written++] = at;
                place[at] = written;
            }
        }
        for (int v = 0; v < n; v++)
            place[v]--;
        return order;
    }
}
