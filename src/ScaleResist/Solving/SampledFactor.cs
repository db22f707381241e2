// A sparse approximate Cholesky factor of a Laplacian: nodes are eliminated, the least degrees first, and of the clique that each leaves behind only a
// few links are kept, drawn so that the kept Laplacian has the right expectation (Kyng & Sachdeva 2016; Gao, Kyng & Spielman 2023; see StarSample).
// Invariant: shares of a column sum to 1 but for the last, whose pivot is 0; every predecessor of a node has a smaller number.

using ScaleResist.Graphs;

namespace ScaleResist.Solving;

/// <summary>
/// L ~ (I - C') D (I - C) in its own numbering: forward y_v = r_v + sum over predecessors u of share(u,v) y_u,
/// back x_v = y_v / d_v + sum over successors w of share(v,w) x_w. The last node is grounded.
/// </summary>
internal sealed class SampledFactor
{
    private const int Chunk = 2048; // columns

    private SampledFactor(FactorColumns columns, ParallelOptions threads)
    {
        int n = columns.Count;
        (Order, int[] place, int[] scratch) = DepthFirstOrder.Of(columns);
        int[] columnOf = new int[n];
        for (int k = 0; k < n; k++)
            columnOf[place[columns.Order[k]]] = k;
        Inverse = new float[n];
        ColumnStart = new long[n + 1];
        for (int v = 0; v < n; v++)
        {
            Inverse[v] = columns.Inverse[columnOf[v]];
            ColumnStart[v + 1] = ColumnStart[v] + columns.Length(columnOf[v]);
        }
        Successors = scratch;
        ColumnShares = GC.AllocateUninitializedArray<float>(scratch.Length);
        Parallel.For(0, (n + Chunk - 1) / Chunk, threads, chunk =>
        {
            for (int v = chunk * Chunk; v < Math.Min(n, (chunk + 1) * Chunk); v++)
                FillColumn(v, columns.Column(columnOf[v]), place);
        });
        (RowStart, Predecessors, RowShares) = Transpose(ColumnStart, Successors, ColumnShares);
    }

    /// <summary>The Laplacian's node at each place of the factor.</summary>
    public int[] Order { get; }

    /// <summary>Offsets by column: successors of a place.</summary>
    public long[] ColumnStart { get; }

    /// <summary>Later places that a place leads to, ascending.</summary>
    public int[] Successors { get; }

    /// <summary>w / d beside <see cref="Successors"/>.</summary>
    public float[] ColumnShares { get; }

    /// <summary>Offsets by row: predecessors of a place.</summary>
    public long[] RowStart { get; }

    /// <summary>Earlier places that lead to a place, ascending.</summary>
    public int[] Predecessors { get; }

    /// <summary>w / d beside <see cref="Predecessors"/>.</summary>
    public float[] RowShares { get; }

    /// <summary>1 / d by place; 0 at the last.</summary>
    public float[] Inverse { get; }

    /// <summary>Factorises a connected Laplacian.</summary>
    /// <param name="laplacian">L.</param>
    /// <param name="samples">S, 1 to 3 as a rule: more make a better and larger factor. Stars of many neighbours get one all the same.</param>
    /// <param name="seed">Of the draws.</param>
    /// <param name="threads">How many may share the work, -1 for all: the factor is the same.</param>
    public static SampledFactor Of(Laplacian laplacian, int samples, ulong seed, int threads = -1)
    {
        ParallelOptions options = new() { MaxDegreeOfParallelism = threads };
        FactorColumns columns = new(laplacian.NodeCount);
        RemainingGraph graph = new(laplacian, options);
        IndependentRounds.Run(graph, columns, samples, seed, options);
        DegreeElimination.Run(graph, columns, samples, seed);
        return new SampledFactor(columns, options);
    }

    private void FillColumn(int v, ReadOnlySpan<Arc> column, int[] place)
    {
        Span<int> successors = Successors.AsSpan((int)ColumnStart[v], column.Length);
        Span<float> shares = ColumnShares.AsSpan((int)ColumnStart[v], column.Length);
        bool isShort = column.Length <= 24; // insertion beats the general sort there
        for (int i = 0; i < column.Length; i++)
        {
            int successor = place[column[i].To], k = i;
            for (; isShort && k > 0 && successors[k - 1] > successor; k--)
            {
                successors[k] = successors[k - 1];
                shares[k] = shares[k - 1];
            }
            successors[k] = successor;
            shares[k] = column[i].Weight;
        }
        if (!isShort)
            successors.Sort(shares);
    }

    // From the last column back, so that rows come out ascending.
    private static (long[] Start, int[] Index, float[] Share) Transpose(long[] columnStart, int[] successors, float[] columnShares)
    {
        int n = columnStart.Length - 1;
        long[] at = new long[n + 1]; // where a row ends, then where it starts
        foreach (int v in successors)
            at[v]++;
        for (int v = 1; v <= n; v++)
            at[v] += at[v - 1];
        int[] index = GC.AllocateUninitializedArray<int>(successors.Length);
        float[] share = GC.AllocateUninitializedArray<float>(successors.Length);
        for (int u = n - 1; u >= 0; u--)
        {
            for (long k = columnStart[u]; k < columnStart[u + 1]; k++)
            {
                long to = --at[successors[k]];
                index[to] = u;
                share[to] = columnShares[k];
            }
        }
        return (at, index, share);
    }
}
