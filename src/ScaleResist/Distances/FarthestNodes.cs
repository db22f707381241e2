// The nodes farthest from a reference, most distant first, as far as a list of bounded length goes.
// Invariant: Reach is never below the distance from the reference to any node of the component that has not been searched.

using ScaleResist.Graphs;

namespace ScaleResist.Distances;

/// <summary>The farthest nodes of one search, which shrink as they are searched themselves.</summary>
internal sealed class FarthestNodes
{
    private const int Longest = 512;
    private const int Bins = 1024;
    private readonly int[] nodes;
    private readonly double[] distances;
    private readonly double rest; // the largest distance of a node that the list leaves out
    private int next;

    private FarthestNodes(int[] nodes, double[] distances, double rest)
    {
        this.nodes = nodes;
        this.distances = distances;
        this.rest = rest;
    }

    /// <summary>The largest distance from the reference to a node that was not searched, or a bound on it.</summary>
    public double Reach => next < nodes.Length ? distances[next] : rest;

    /// <summary>The node at that distance, or -1 where the list has come to its end.</summary>
    public int Target => next < nodes.Length ? nodes[next] : -1;

    /// <summary>Takes the farthest nodes of a search; -infinity is the reach where every node was searched. O(n).</summary>
    public static FarthestNodes Of(double[] distances, Component component, double largest, bool[] searched)
    {
        // Where the list begins: the lowest bin of distances above which the nodes still fit.
        Span<int> counts = stackalloc int[Bins];
        counts.Clear();
        double scale = largest > 0 ? (Bins - 1) / largest : 0;
        for (int v = component.Start; v < component.End; v++)
            counts[(int)(distances[v] * scale)]++;
        int bin = Bins, kept = 0;
        while (bin > 0 && kept + counts[bin - 1] <= Longest)
            kept += counts[--bin];
        List<(double Distance, int Node)> list = new(kept);
        double rest = double.NegativeInfinity;
        for (int v = component.Start; v < component.End; v++)
        {
            if (searched[v])
                continue;
            if ((int)(distances[v] * scale) >= bin)
                list.Add((distances[v], v));
            else if (distances[v] > rest)
                rest = distances[v];
        }
        list.Sort((a, b) => a.Distance != b.Distance ? b.Distance.CompareTo(a.Distance) : a.Node.CompareTo(b.Node));
        return new FarthestNodes([.. list.Select(x => x.Node)], [.. list.Select(x => x.Distance)], rest);
    }

    /// <summary>Passes over what has been searched meanwhile.</summary>
    public void Advance(bool[] searched)
    {
        while (next < nodes.Length && searched[nodes[next]])
            next++;
    }
}
