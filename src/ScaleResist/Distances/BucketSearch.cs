// Lightest routes of whole steps: a ring of buckets, one a distance, of which a window of the largest step is ever in use (Dial, Commun. ACM
// 12:632, 1969); bits say which buckets hold anything. Invariant: an entry lies in the bucket of the distance it was made at; entries of
// nodes that were improved since are passed over. Without lengths none is improved (see HeapSearch).

using System.Numerics;
using ScaleResist.Graphs;

namespace ScaleResist.Distances;

/// <summary>Distances of whole steps up to 2^16. O(n + m + largest distance / 64); 8 bytes an entry.</summary>
public sealed class BucketSearch : DistanceSearch
{
    private readonly int[] bucket; // the first entry of each, or -1
    private readonly ulong[] filled;
    private (int Node, int Next)[] entries = new (int, int)[1024];
    private int used;
    private int free = -1;
    private int waiting;

    /// <summary>For costs of whole steps.</summary>
    public BucketSearch(DistanceCosts costs)
        : base(costs)
    {
        if (!costs.AreWhole || costs.LargestStep > DistanceCosts.LargestBucketStep)
            throw new ArgumentException("Steps are no whole numbers up to 2^16.", nameof(costs));
        int size = (int)Math.Max(64, BitOperations.RoundUpToPowerOf2((uint)costs.LargestStep + 1));
        bucket = new int[size];
        filled = new ulong[size / 64];
    }

    private protected override void Search(int source, Component component)
    {
        Array.Fill(bucket, -1);
        Array.Clear(filled);
        (used, free, waiting) = (0, -1, 0);
        Distances.AsSpan(component.Start, component.Nodes).Fill(double.PositiveInfinity);
        Distances[source] = 0;
        Push(0, source);
        long at = 0;
        while (waiting > 0)
        {
            at = NextFilled(at);
            int slot = (int)(at & (bucket.Length - 1));
            // Steps of nothing come back into the bucket at hand.
            while (bucket[slot] is int entry and >= 0)
            {
                (int u, int next) = entries[entry];
                bucket[slot] = next;
                entries[entry].Next = free;
                free = entry;
                waiting--;
                if (Distances[u] == at)
                    Relax(u, at);
            }
            filled[slot / 64] &= ~(1UL << slot);
        }
    }

    private void Relax(int u, long at)
    {
        long[] rowStart = Costs.Network.RowStart;
        int[] neighbours = Costs.Network.Neighbours;
        double[] distances = Distances;
        double[]? lengths = Costs.Network.Lengths, weights = Costs.NodeWeights;
        if (lengths is null && weights is not null)
        {
            foreach (int v in neighbours.AsSpan((int)rowStart[u], (int)(rowStart[u + 1] - rowStart[u])))
            {
                if (distances[v] == double.PositiveInfinity)
                    Reach(v, at + weights[v]);
            }
            return;
        }
        for (long k = rowStart[u]; k < rowStart[u + 1]; k++)
        {
            int v = neighbours[k];
            double distance = at + Costs.Length(k) + Costs.Weight(v);
            if (distance < distances[v])
                Reach(v, distance);
        }

        void Reach(int v, double distance)
        {
            distances[v] = distance;
            if (rowStart[v + 1] - rowStart[v] > 1) // beyond a dead end there is nothing
                Push((long)distance, v);
        }
    }

    private void Push(long distance, int node)
    {
        int slot = (int)(distance & (bucket.Length - 1));
        int entry = free;
        if (entry >= 0)
        {
            free = entries[entry].Next;
        }
        else
        {
            if (used == entries.Length)
                Array.Resize(ref entries, 2 * used);
            entry = used++;
        }
        entries[entry] = (node, bucket[slot]);
        bucket[slot] = entry;
        filled[slot / 64] |= 1UL << slot;
        waiting++;
    }

    // The first distance from here on whose bucket holds anything; there is one.
    private long NextFilled(long at)
    {
        int slot = (int)(at & (bucket.Length - 1));
        int word = slot / 64;
        ulong bits = filled[word] & (ulong.MaxValue << slot);
        while (bits == 0)
        {
            word = (word + 1) & (filled.Length - 1);
            bits = filled[word];
        }
        int found = (word * 64) + BitOperations.TrailingZeroCount(bits);
        return at + ((found - slot) & (bucket.Length - 1));
    }
}
