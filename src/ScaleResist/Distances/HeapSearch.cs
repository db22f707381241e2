// Lightest routes by a heap of four children a node (Dijkstra 1959; Johnson, Inf. Process. Lett. 4:53, 1975).
// Invariant: keys leave in ascending order. Where links have no length, what a node costs does not depend on where it is entered from,
// so the first neighbour to leave the heap gives its distance: each node enters the heap once, and none is ever improved.

using ScaleResist.Graphs;

namespace ScaleResist.Distances;

/// <summary>Distances of any steps. O((n + m) log n), without lengths O(m + n log n).</summary>
public sealed class HeapSearch(DistanceCosts costs) : DistanceSearch(costs)
{
    private (double Key, int Node)[] heap = new (double, int)[1024];
    private int count;

    private protected override void Search(int source, Component component)
    {
        Distances.AsSpan(component.Start, component.Nodes).Fill(double.PositiveInfinity);
        Distances[source] = 0;
        count = 0;
        Push(0, source);
        if (Costs.Network.Lengths is double[] lengths)
            ByLinks(lengths);
        else
            ByNodes(Costs.NodeWeights!);
    }

    private void ByNodes(double[] weights)
    {
        long[] rowStart = Costs.Network.RowStart;
        int[] neighbours = Costs.Network.Neighbours;
        double[] distances = Distances;
        while (count > 0)
        {
            (double key, int u) = Pop();
            foreach (int v in neighbours.AsSpan((int)rowStart[u], (int)(rowStart[u + 1] - rowStart[u])))
            {
                if (distances[v] != double.PositiveInfinity)
                    continue;
                double distance = key + weights[v];
                distances[v] = distance;
                if (rowStart[v + 1] - rowStart[v] > 1) // beyond a dead end there is nothing
                    Push(distance, v);
            }
        }
    }

    private void ByLinks(double[] lengths)
    {
        long[] rowStart = Costs.Network.RowStart;
        int[] neighbours = Costs.Network.Neighbours;
        while (count > 0)
        {
            (double key, int u) = Pop();
            if (key > Distances[u])
                continue; // improved since
            for (long k = rowStart[u]; k < rowStart[u + 1]; k++)
            {
                int v = neighbours[k];
                double distance = key + lengths[k] + Costs.Weight(v);
                if (distance >= Distances[v])
                    continue;
                Distances[v] = distance;
                if (rowStart[v + 1] - rowStart[v] > 1)
                    Push(distance, v);
            }
        }
    }

    private void Push(double key, int node)
    {
        if (count == heap.Length)
            Array.Resize(ref heap, 2 * count);
        int at = count++;
        while (at > 0)
        {
            int parent = (at - 1) / 4;
            if (heap[parent].Key <= key)
                break;
            heap[at] = heap[parent];
            at = parent;
        }
        heap[at] = (key, node);
    }

    private (double Key, int Node) Pop()
    {
        (double Key, int Node)[] entries = heap;
        (double Key, int Node) top = entries[0];
        (double Key, int Node) last = entries[--count];
        int at = 0;
        while (true)
        {
            int child = (4 * at) + 1;
            if (child >= count)
                break;
            int least = child, end = Math.Min(child + 4, count);
            double key = entries[child].Key;
            for (int i = child + 1; i < end; i++)
            {
                if (entries[i].Key < key)
                    (key, least) = (entries[i].Key, i);
            }
            if (key >= last.Key)
                break;
            entries[at] = entries[least];
            at = least;
        }
        entries[at] = last;
        return top;
    }
}
