// What is left of a graph while its nodes are being eliminated: rows of packed arcs in the order of the nodes, written afresh in every round.
// Invariant: rows are symmetric, without self-loops or duplicates; only nodes that are alive have rows, and only to nodes that are alive.
//
// Two buffers of arcs serve in turn, and links are pooled: memory that was never touched costs more than the work done in it.

using System.Runtime.CompilerServices;
using ScaleResist.Graphs;

namespace ScaleResist.Solving;

/// <summary>The other end in the upper half and the conductance's bits below, so that arcs sort by their ends.</summary>
/// <param name="Bits">Both.</param>
internal readonly record struct Arc(ulong Bits)
{
    /// <summary>An arc to a node.</summary>
    public Arc(int to, float conductance)
        : this(((ulong)(uint)to << 32) | BitConverter.SingleToUInt32Bits(conductance))
    {
    }

    /// <summary>The other end.</summary>
    public int To => (int)(Bits >> 32);

    /// <summary>Positive; floats, since the factor's shares are.</summary>
    public float Conductance => BitConverter.UInt32BitsToSingle((uint)Bits);
}

/// <summary>A link that an elimination leaves behind; conductance 0: none.</summary>
internal readonly record struct SampledLink(int A, int B, float Conductance);

/// <summary>Rows of the nodes that are alive.</summary>
internal sealed class RemainingGraph
{
    private const int Chunk = 2048; // nodes
    private const int LongRow = 64;
    private readonly int[] alive; // ascending
    private readonly bool[] gone;
    private readonly int[] degree;
    private readonly int[] incoming; // links of the round that end at a node
    private readonly ParallelOptions threads;
    private long[] start, nextStart;
    private ulong[] arcs, nextArcs = [];

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
        arcs = GC.AllocateUninitializedArray<ulong>(laplacian.Neighbours.Length);
        ForChunks(n, v =>
        {
            alive[v] = v;
            start[v] = laplacian.RowStart[v];
            degree[v] = (int)(laplacian.RowStart[v + 1] - laplacian.RowStart[v]);
            for (long k = laplacian.RowStart[v]; k < laplacian.RowStart[v + 1]; k++)
                arcs[k] = new Arc(laplacian.Neighbours[k], (float)laplacian.Conductance(k)).Bits;
        });
    }

    /// <summary>Nodes alive.</summary>
    public int Count { get; private set; }

    /// <summary>The nodes alive, ascending.</summary>
    public ReadOnlySpan<int> Nodes => alive.AsSpan(0, Count);

    /// <summary>The number of neighbours of a node that is alive.</summary>
    public int Degree(int node) => degree[node];

    /// <summary>The arcs of a node that is alive.</summary>
    public ReadOnlySpan<Arc> Row(int node) =>
        System.Runtime.InteropServices.MemoryMarshal.Cast<ulong, Arc>(arcs.AsSpan((int)start[node], degree[node]));

    /// <summary>Takes independent nodes out and puts links between their neighbours in; parallel ones are merged.</summary>
    /// <param name="independent">Nodes to go, no two of them neighbours.</param>
    /// <param name="links">Links to add.</param>
    public void Replace(ReadOnlySpan<int> independent, ReadOnlySpan<SampledLink> links)
    {
        // Until the rows are written anew, nextStart counts the neighbours that go.
        foreach (int v in Nodes)
            nextStart[v] = 0;
        foreach (int v in independent)
        {
            gone[v] = true;
            foreach (Arc arc in Row(v))
                nextStart[arc.To]++;
        }
        foreach (SampledLink link in links)
        {
            if (link.Conductance > 0)
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
            long length = degree[v] - nextStart[v] + incoming[v];
            nextStart[v] = end + incoming[v];
            end += length;
        }
        Count = left;
        if (nextArcs.Length < end)
            nextArcs = GC.AllocateUninitializedArray<ulong>(checked((int)end));
        foreach (SampledLink link in links)
        {
            if (link.Conductance > 0)
            {
                nextArcs[--nextStart[link.A]] = new Arc(link.B, link.Conductance).Bits;
                nextArcs[--nextStart[link.B]] = new Arc(link.A, link.Conductance).Bits;
            }
        }
        ForChunks(left, i => Merge(alive[i]));
        (start, nextStart) = (nextStart, start);
        (arcs, nextArcs) = (nextArcs, arcs);
    }

    // The new links of a row stand at its beginning; the old ones follow.
    private void Merge(int v)
    {
        int begin = (int)nextStart[v], added = begin + incoming[v], end = begin;
        for (int read = begin; read < added; read++)
            Put(nextArcs[read], end);
        int merged = end;
        ReadOnlySpan<Arc> row = Row(v);
        if (row.Length + merged - begin > LongRow)
        {
            foreach (Arc arc in row)
            {
                if (!gone[arc.To])
                    nextArcs[end++] = arc.Bits;
            }
            Array.Sort(nextArcs, begin, end - begin);
            int last = end;
            end = begin + 1;
            for (int read = begin + 1; read < last; read++)
            {
                if ((nextArcs[read] ^ nextArcs[end - 1]) >> 32 == 0)
                    nextArcs[end - 1] = new Arc((int)(nextArcs[read] >> 32), new Arc(nextArcs[read]).Conductance + new Arc(nextArcs[end - 1]).Conductance).Bits;
                else
                    nextArcs[end++] = nextArcs[read];
            }
        }
        else
        {
            foreach (Arc arc in row)
            {
                if (!gone[arc.To])
                    Put(arc.Bits, merged);
            }
        }
        degree[v] = end - begin;
        incoming[v] = 0;

        [MethodImpl(MethodImplOptions.AggressiveInlining)]
        void Put(ulong bits, int last)
        {
            for (int k = begin; k < last; k++)
            {
                if ((nextArcs[k] ^ bits) >> 32 == 0)
                {
                    nextArcs[k] = new Arc((int)(bits >> 32), new Arc(nextArcs[k]).Conductance + new Arc(bits).Conductance).Bits;
                    return;
                }
            }
            nextArcs[end++] = bits;
        }
    }

    private void ForChunks(int count, Action<int> body) =>
        Parallel.For(0, (count + Chunk - 1) / Chunk, threads, chunk =>
        {
            for (int i = chunk * Chunk; i < Math.Min(count, (chunk + 1) * Chunk); i++)
                body(i);
        });
}
