// Nodes by degree, the least first. A node may stand in several buckets; what a bucket says is checked when the node comes up.
// Invariant: every node not yet taken stands in at least one bucket that is not above its degree, so none is overlooked.

namespace ScaleResist.Solving;

/// <summary>A bucket queue of nodes by degree, capped at the last bucket.</summary>
internal sealed class DegreeQueue
{
    private const int Last = 1023;
    private readonly Stack<int>[] buckets = [.. Enumerable.Range(0, Last + 1).Select(_ => new Stack<int>())];
    private readonly int[] degree; // -1: taken
    private int least;

    /// <summary>All nodes by their degrees.</summary>
    public DegreeQueue(int[] degrees)
    {
        degree = [.. degrees];
        for (int v = degree.Length - 1; v >= 0; v--)
            buckets[Bucket(v)].Push(v);
    }

    /// <summary>Takes a node of least degree.</summary>
    public int TakeLeast()
    {
        while (true)
        {
            while (buckets[least].Count == 0)
                least++;
            int node = buckets[least].Pop();
            if (degree[node] < 0)
                continue;
            int bucket = Bucket(node);
            if (bucket <= least)
            {
                degree[node] = -1;
                return node;
            }
            buckets[bucket].Push(node);
        }
    }

    /// <summary>The node's degree changed by so much.</summary>
    public void Change(int node, int by)
    {
        degree[node] += by;
        if (by >= 0)
            return; // it stands too low for now, and moves up when it comes up
        int bucket = Bucket(node);
        buckets[bucket].Push(node);
        least = Math.Min(least, bucket);
    }

    private int Bucket(int node) => Math.Clamp(degree[node], 0, Last);
}
