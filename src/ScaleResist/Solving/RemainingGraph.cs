// What is left of a graph while its nodes are being eliminated: rows of arcs, close together in the order of the nodes, written afresh each round.
// Invariant: rows are symmetric, without self-loops or duplicates; only nodes that are alive have rows, and only to nodes that are alive.
//
// Two buffers of arcs serve in turn: memory touched for the first time costs more than the work that is done in it.

using System.Runtime.InteropServices;
using ScaleResist.Graphs;

namespace ScaleResist.Solving;

/// <summary>Rows of the nodes that are alive.</summary>
internal sealed class RemainingGraph
{
    private const int Chunk = 2048; // nodes
    private const int LongRow = 64;
    private readonly int[] alive; // ascending
    private readonly bool[] gone;
    private readonly int[] degree;
    private readonly int[] incoming; // ends of added links, by node
    private readonly ParallelOptions threads;
    private long[] start, nextStart;
    private Arc[] arcs, nextArcs = [];

    /// <summary>All of a Laplacian.</summary>
    public RemainingGraph(Laplacian laplacian, ParallelOptions threads)
    {
        int n = laplacian.NodeCount;
        this.threads = threads;
        Count = n;
        alive = new int[n];
        gone = new bool[n];
        degree = new int[n];
        incoming = new int[n];
        start = new long[n];
        nextStart = new long[n];
        arcs = GC.AllocateUninitializedArray<Arc>(laplacian.Neighbours.Length);
        ForChunks(n, (from, to) =>
        {
            for (int v = from; v < to; v++)
            {
                alive[v] = v;
                start[v] = laplacian.RowStart[v];
                degree[v] = (int)(laplacian.RowStart[v + 1] - laplacian.RowStart[v]);
            }
            for (long k = laplacian.RowStart[from]; k < laplacian.RowStart[to]; k++)
                arcs[k] = new Arc(laplacian.Neighbours[k], (float)laplacian.Conductance(k));
        });
    }

    /// <summary>Nodes alive.</summary>
    public int Count { get; private set; }

    /// <summary>The nodes alive, ascending.</summary>
    public ReadOnlySpan<int> Nodes => alive.AsSpan(0, Count);

    /// <summary>The number of neighbours of a node that is alive.</summary>
    public int Degree(int node) => degree[node];

    /// <summary>The arcs of a node that is alive.</summary>
    public ReadOnlySpan<Arc> Row(int node) => arcs.AsSpan((int)start[node], degree[node]);

    /// <summary>Takes nodes out, no two of them neighbours, and puts links in; parallel ones are merged. Linear in nodes, arcs and links.</summary>
    public void Replace(ReadOnlySpan<int> independent, ReadOnlySpan<SampledLink> links)
    {
        long length = Measure(independent, links);
        if (nextArcs.Length < length)
            nextArcs = GC.AllocateUninitializedArray<Arc>(checked((int)length));
        foreach (ref readonly SampledLink link in links)
        {
            if (link.Weight > 0)
            {
                nextArcs[--nextStart[link.A]] = new Arc(link.B, link.Weight);
                nextArcs[--nextStart[link.B]] = new Arc(link.A, link.Weight);
            }
        }
        ForChunks(Count, (from, to) =>
        {
            for (int i = from; i < to; i++)
                Rewrite(alive[i]);
        });
        (start, nextStart) = (nextStart, start);
        (arcs, nextArcs) = (nextArcs, arcs);
    }

    // Room for each new row, whose added links come first: nextStart stands behind these. Returns the room needed in all.
    private long Measure(ReadOnlySpan<int> independent, ReadOnlySpan<SampledLink> links)
    {
        long[] losses = nextStart; // until the rooms are known
        foreach (int v in Nodes)
            losses[v] = 0;
        foreach (int v in independent)
        {
            gone[v] = true;
            foreach (Arc arc in Row(v))
                losses[arc.To]++;
        }
        foreach (ref readonly SampledLink link in links)
        {
            if (link.Weight > 0)
            {
                incoming[link.A]++;
                incoming[link.B]++;
            }
        }
        long end = 0;
        int left = 0;
        foreach (int v in Nodes)
        {
            if (gone[v])
                continue;
            alive[left++] = v;
            long kept = degree[v] - losses[v];
            nextStart[v] = end + incoming[v];
            end = nextStart[v] + kept;
        }
        Count = left;
        return end;
    }

    // Added links may be parallel to each other and to old ones; old ones are not to each other.
    private void Rewrite(int v)
    {
        ReadOnlySpan<Arc> old = Row(v);
        Span<Arc> row = nextArcs.AsSpan((int)nextStart[v]); // written no further than its room
        int count = 0;
        if (incoming[v] + old.Length > LongRow)
        {
            count = incoming[v];
            foreach (Arc arc in old)
            {
                if (!gone[arc.To])
                    row[count++] = arc;
            }
            count = SortAndMerge(row[..count]);
        }
        else
        {
            for (int i = 0; i < incoming[v]; i++)
                Put(row[i], row, ref count, count);
            int added = count;
            foreach (Arc arc in old)
            {
                if (!gone[arc.To])
                    Put(arc, row, ref count, added);
            }
        }
        degree[v] = count;
        incoming[v] = 0;
    }

    // Merges an arc with one of the first few of a row, or appends it.
    private static void Put(Arc arc, Span<Arc> row, ref int count, int among)
    {
        for (int i = 0; i < among; i++)
        {
            if (row[i].IsParallelTo(arc))
            {
                row[i] = row[i].MergedWith(arc);
                return;
            }
        }
        row[count++] = arc;
    }

    private static int SortAndMerge(Span<Arc> row)
    {
        MemoryMarshal.Cast<Arc, ulong>(row).Sort();
        int count = 0;
        foreach (Arc arc in row)
        {
            if (count > 0 && row[count - 1].IsParallelTo(arc))
                row[count - 1] = row[count - 1].MergedWith(arc);
            else
                row[count++] = arc;
        }
        return count;
    }

    private void ForChunks(int count, Action<int, int> body) =>
        Parallel.For(0, (count + Chunk - 1) / Chunk, threads, chunk => body(chunk * Chunk, Math.Min(count, (chunk + 1) * Chunk)));
}
