// A heap of nodes by gain, the greatest on top, the smaller number where gains tie, so that the order of taking is determined.
// Invariant: place[heap[k]] = k, and -1 for nodes outside.

namespace ScaleResist.Solving;

/// <summary>An indexed binary heap of at most <paramref name="nodes"/> nodes.</summary>
internal sealed class GainHeap(int nodes)
{
    private readonly int[] place = Outside(nodes);
    private readonly int[] gains = new int[nodes];
    private int[] heap = new int[64];
    private int count;

    /// <summary>Whether there is none.</summary>
    public bool IsEmpty => count == 0;

    /// <summary>The node of the greatest gain.</summary>
    public int Top => heap[0];

    /// <summary>The greatest gain.</summary>
    public int TopGain => gains[heap[0]];

    /// <summary>Whether a node is in the heap.</summary>
    public bool Contains(int node) => place[node] >= 0;

    /// <summary>Puts a node in.</summary>
    public void Add(int node, int gain)
    {
        if (count == heap.Length)
            Array.Resize(ref heap, 2 * count);
        gains[node] = gain;
        Put(count++, node);
        Rise(node);
    }

    /// <summary>Changes the gain of a node that is in.</summary>
    public void Change(int node, int by)
    {
        gains[node] += by;
        if (by > 0)
            Rise(node);
        else
            Sink(node);
    }

    /// <summary>Takes a node out that is in.</summary>
    public void Remove(int node)
    {
        int hole = place[node], moved = heap[--count];
        place[node] = -1;
        if (moved == node)
            return;
        Put(hole, moved);
        Rise(moved);
        Sink(moved);
    }

    /// <summary>Takes all nodes out.</summary>
    public void Clear()
    {
        while (count > 0)
            place[heap[--count]] = -1;
    }

    private void Rise(int node)
    {
        int k = place[node];
        for (int up = (k - 1) / 2; k > 0 && Before(node, heap[up]); k = up, up = (k - 1) / 2)
            Put(k, heap[up]);
        Put(k, node);
    }

    private void Sink(int node)
    {
        int k = place[node];
        while (true)
        {
            int down = (2 * k) + 1;
            if (down >= count)
                break;
            if (down + 1 < count && Before(heap[down + 1], heap[down]))
                down++;
            if (!Before(heap[down], node))
                break;
            Put(k, heap[down]);
            k = down;
        }
        Put(k, node);
    }

    private bool Before(int a, int b) => gains[a] != gains[b] ? gains[a] > gains[b] : a < b;

    private void Put(int k, int node)
    {
        heap[k] = node;
        place[node] = k;
    }

    private static int[] Outside(int nodes)
    {
        int[] places = new int[nodes];
        Array.Fill(places, -1);
        return places;
    }
}
