// Breadth first where every step costs the same: from the nodes just reached outwards, or from those not reached inwards, whichever
// looks at fewer links (Beamer, Asanovic & Patterson, SC 2012). Which nodes were reached is kept in bits, which stay in cache.
// Invariant: a node is queued once, at its level; the queue holds levels in order.

using System.Numerics;
using ScaleResist.Graphs;

namespace ScaleResist.Distances;

/// <summary>Distances of equal steps. O(n + m); 13 bytes a node beside the distances.</summary>
public sealed class HopSearch : DistanceSearch
{
    private const int InwardGain = 14; // an inward step stops at the first link to the level before
    private readonly int[] queue;
    private readonly ulong[] reached;
    private readonly ulong[] front;
    private readonly double step;

    /// <summary>For costs whose steps are all equal.</summary>
    public HopSearch(DistanceCosts costs)
        : base(costs)
    {
        if (costs.Steps != StepKind.Equal)
            throw new ArgumentException("Steps differ.", nameof(costs));
        int n = costs.Network.NodeCount;
        queue = new int[n];
        reached = new ulong[(n + 63) / 64];
        front = new ulong[(n + 63) / 64];
        step = costs.Weight(0);
    }

    private protected override void Search(int source, Component component) => SearchFrom([source], component);

    /// <summary>For every node of a component the distance from the nearest of some of its nodes, each named once.</summary>
    internal void SearchFrom(ReadOnlySpan<int> sources, Component component)
    {
        long[] rowStart = Costs.Network.RowStart;
        int firstWord = component.Start / 64, words = ((component.End - 1) / 64) - firstWord + 1;
        reached.AsSpan(firstWord, words).Clear();
        long arcsAhead = 0;
        int begin = 0, end = 0, level = 0;
        foreach (int source in sources)
        {
            Distances[source] = 0;
            reached[source / 64] |= 1UL << source;
            queue[end++] = source;
            arcsAhead += Costs.Network.Degree(source);
        }
        long arcsLeft = rowStart[component.End] - rowStart[component.Start] - arcsAhead;
        while (begin < end)
        {
            double distance = ++level * step;
            int next = end;
            if (arcsAhead > arcsLeft / InwardGain && arcsLeft > 0)
            {
                front.AsSpan(firstWord, words).Clear();
                for (int i = begin; i < end; i++)
                    front[queue[i] / 64] |= 1UL << queue[i];
                next = Inward(component, distance, next);
            }
            else
            {
                next = Outward(begin, end, distance);
            }
            arcsAhead = 0;
            for (int i = end; i < next; i++)
                arcsAhead += rowStart[queue[i] + 1] - rowStart[queue[i]];
            arcsLeft -= arcsAhead;
            (begin, end) = (end, next);
        }
    }

    private int Outward(int begin, int end, double distance)
    {
        long[] rowStart = Costs.Network.RowStart;
        int[] neighbours = Costs.Network.Neighbours;
        double[] distances = Distances;
        int next = end;
        for (int i = begin; i < end; i++)
        {
            int u = queue[i];
            foreach (int v in neighbours.AsSpan((int)rowStart[u], (int)(rowStart[u + 1] - rowStart[u])))
            {
                ref ulong word = ref reached[v / 64];
                ulong bit = 1UL << v;
                if ((word & bit) != 0)
                    continue;
                word |= bit;
                distances[v] = distance;
                queue[next++] = v;
            }
        }
        return next;
    }

    private int Inward(Component component, double distance, int next)
    {
        long[] rowStart = Costs.Network.RowStart;
        int[] neighbours = Costs.Network.Neighbours;
        for (int word = component.Start / 64; word <= (component.End - 1) / 64; word++)
        {
            ulong left = ~reached[word] & Within(word, component);
            while (left != 0)
            {
                int v = (word * 64) + BitOperations.TrailingZeroCount(left);
                left &= left - 1;
                foreach (int u in neighbours.AsSpan((int)rowStart[v], (int)(rowStart[v + 1] - rowStart[v])))
                {
                    if ((front[u / 64] >> u & 1) == 0)
                        continue;
                    reached[word] |= 1UL << v;
                    Distances[v] = distance;
                    queue[next++] = v;
                    break;
                }
            }
        }
        return next;
    }

    // The bits of a word that belong to the component.
    private static ulong Within(int word, Component component)
    {
        ulong mask = ulong.MaxValue;
        if (word == component.Start / 64)
            mask &= ulong.MaxValue << component.Start;
        if (word == (component.End - 1) / 64)
            mask &= ulong.MaxValue >> (63 - ((component.End - 1) & 63));
        return mask;
    }
}
