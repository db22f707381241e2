// Nodes by degree, the least first, degrees changing by one at a time: doubly linked buckets, constant time an operation.
// Invariant: every node not yet taken stands in the bucket of its degree, capped at the last bucket.

using ScaleResist.Graphs;

namespace ScaleResist.Solving;

/// <summary>A bucket queue of nodes by degree.</summary>
internal sealed class DegreeQueue
{
    private const int Buckets = 4096;
    private readonly int[] head = new int[Buckets];
    private readonly int[] next;
    private readonly int[] previous;
    private readonly int[] degree;
    private int least = Buckets - 1;

    /// <summary>All nodes of a Laplacian by the length of their rows.</summary>
    public DegreeQueue(Laplacian laplacian)
    {
        int n = laplacian.NodeCount;
        next = new int[n];
        previous = new int[n];
        degree = new int[n];
        Array.Fill(head, -1);
        for (int v = n - 1; v >= 0; v--)
        {
            degree[v] = (int)(laplacian.RowStart[v + 1] - laplacian.RowStart[v]);
            Insert(v);
        }
    }

    /// <summary>Takes a node of least degree.</summary>
    public int TakeLeast()
    {
        while (head[least] < 0)
            least++;
        int node = head[least];
        Remove(node);
        return node;
    }

    /// <summary>The node lost a link.</summary>
    public void Lower(int node) => Move(node, -1);

    /// <summary>The node gained a link.</summary>
    public void Raise(int node) => Move(node, 1);

    private void Move(int node, int step)
    {
        int before = Bucket(node);
        degree[node] += step;
        int now = Bucket(node);
        if (before == now)
            return;
        degree[node] -= step;
        Remove(node);
        degree[node] += step;
        Insert(node);
    }

    private int Bucket(int node) => Math.Clamp(degree[node], 0, Buckets - 1);

    private void Insert(int node)
    {
        int bucket = Bucket(node);
        next[node] = head[bucket];
        previous[node] = -1;
        if (head[bucket] >= 0)
            previous[head[bucket]] = node;
        head[bucket] = node;
        least = Math.Min(least, bucket);
    }

    private void Remove(int node)
    {
        if (previous[node] >= 0)
            next[previous[node]] = next[node];
        else
            head[Bucket(node)] = next[node];
        if (next[node] >= 0)
            previous[next[node]] = previous[node];
    }
}
