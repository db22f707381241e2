// The internal order of nodes: components largest first, breadth-first within each, so that linked nodes lie close in memory.
// Invariant: NodeAt and PlaceOf are inverse permutations, and each component is a contiguous range of places.

namespace ScaleResist.Graphs;

/// <summary>An order of nodes that keeps components together and neighbours near.</summary>
internal sealed class NodeOrder
{
    private NodeOrder(int[] nodeAt, int[] placeOf, Component[] components)
    {
        NodeAt = nodeAt;
        PlaceOf = placeOf;
        Components = components;
    }

    /// <summary>The raw node at each place.</summary>
    public int[] NodeAt { get; }

    /// <summary>The place of each raw node.</summary>
    public int[] PlaceOf { get; }

    /// <summary>Components as ranges of places, largest first, ties by smallest label.</summary>
    public Component[] Components { get; }

    /// <summary>Breadth-first from the first node of each component. O(n + arcs), plus a sort of the components.</summary>
    public static NodeOrder BreadthFirst(long[] rowStart, int[] neighbours, NodeLabels labels)
    {
        int n = rowStart.Length - 1;
        int[] queue = new int[n];
        bool[] seen = new bool[n];
        List<Component> found = [];
        int tail = 0;
        for (int root = 0; root < n; root++)
        {
            if (seen[root])
                continue;
            int head = tail;
            int start = tail;
            seen[root] = true;
            queue[tail++] = root;
            while (head < tail)
            {
                int u = queue[head++];
                for (long k = rowStart[u]; k < rowStart[u + 1]; k++)
                {
                    int v = neighbours[k];
                    if (seen[v])
                        continue;
                    seen[v] = true;
                    queue[tail++] = v;
                }
            }
            found.Add(new Component(start, tail));
        }
        return Arrange(queue, found, labels);
    }

    private static NodeOrder Arrange(int[] queue, List<Component> found, NodeLabels labels)
    {
        (Component Range, int Smallest)[] ranked = new (Component, int)[found.Count];
        for (int c = 0; c < ranked.Length; c++)
        {
            int smallest = queue[found[c].Start];
            for (int i = found[c].Start + 1; i < found[c].End; i++)
            {
                if (labels.Compare(queue[i], smallest) < 0)
                    smallest = queue[i];
            }
            ranked[c] = (found[c], smallest);
        }
        Array.Sort(ranked, (a, b) =>
            a.Range.Nodes != b.Range.Nodes ? b.Range.Nodes.CompareTo(a.Range.Nodes) : labels.Compare(a.Smallest, b.Smallest));

        int[] nodeAt = new int[queue.Length];
        int[] placeOf = new int[queue.Length];
        Component[] components = new Component[ranked.Length];
        int place = 0;
        for (int c = 0; c < ranked.Length; c++)
        {
            Component range = ranked[c].Range;
            components[c] = new Component(place, place + range.Nodes);
            for (int i = range.Start; i < range.End; i++)
            {
                nodeAt[place] = queue[i];
                placeOf[queue[i]] = place++;
            }
        }
        return new NodeOrder(nodeAt, placeOf, components);
    }
}
