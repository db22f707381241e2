// A clean undirected network in compressed sparse rows: simple, no self-loops, every component a contiguous range of nodes.
// Invariant: rows are sorted, symmetric and free of duplicates; components come largest first; labels follow the internal order.

namespace ScaleResist.Graphs;

/// <summary>What cleaning did to the rows that were read.</summary>
/// <param name="SelfLoops">Rows whose two ends are one node; dropped.</param>
/// <param name="ParallelLinks">Rows merged into an earlier link between the same nodes, conductances added (of lengths the shortest kept).</param>
public sealed record CleaningFacts(long SelfLoops, long ParallelLinks);

/// <summary>A connected component: the nodes <c>Start .. End-1</c> of the internal order.</summary>
/// <param name="Start">First node.</param>
/// <param name="End">One past the last node.</param>
public readonly record struct Component(int Start, int End)
{
    /// <summary>The number of nodes.</summary>
    public int Nodes => End - Start;
}

/// <summary>
/// A simple undirected network with n nodes and m links. Node u's neighbours are
/// <c>Neighbours[RowStart[u] .. RowStart[u+1]-1]</c>, ascending; each link is stored once from each end (2m arcs). Node numbers
/// are internal: outside, only labels are shown.
/// </summary>
public sealed class Network
{
    private readonly long[] linkStart;
    private readonly Laplacian laplacian;

    internal Network(
        NodeLabels labels, long[] rowStart, int[] neighbours, double[]? conductances, double[]? lengths, Component[] components,
        CleaningFacts cleaning, InputFacts input)
    {
        Labels = labels;
        Lengths = lengths;
        Components = components;
        Cleaning = cleaning;
        Input = input;
        NodeKeys = NodeKey.OfAll(labels);
        double[] strengths = new double[labels.Count];
        linkStart = new long[labels.Count + 1];
        for (int u = 0; u < labels.Count; u++)
        {
            double strength = 0;
            long later = 0;
            for (long k = rowStart[u]; k < rowStart[u + 1]; k++)
            {
                strength += conductances is null ? 1 : conductances[k];
                if (neighbours[k] > u)
                    later++;
            }
            strengths[u] = strength;
            linkStart[u + 1] = linkStart[u] + later;
        }
        laplacian = new Laplacian(rowStart, neighbours, conductances, strengths);
    }

    /// <summary>Labels by internal node number.</summary>
    public NodeLabels Labels { get; }

    /// <summary>n + 1 offsets into <see cref="Neighbours"/>.</summary>
    public long[] RowStart => laplacian.RowStart;

    /// <summary>2m neighbours, ascending within each row.</summary>
    public int[] Neighbours => laplacian.Neighbours;

    /// <summary>2m conductances beside <see cref="Neighbours"/>, or null where every link has conductance 1.</summary>
    public double[]? Conductances => laplacian.Conductances;

    /// <summary>2m lengths beside <see cref="Neighbours"/>, or null where links have none. They serve distances alone.</summary>
    public double[]? Lengths { get; }

    /// <summary>Strength d_u = L_uu: the sum of the conductances at a node, n values.</summary>
    public double[] Strengths => laplacian.Strengths;

    /// <summary>L of the whole network.</summary>
    public Laplacian Laplacian => laplacian;

    /// <summary>Components, largest first, ties by smallest label; together they cover all nodes in order.</summary>
    public IReadOnlyList<Component> Components { get; }

    /// <summary>What cleaning did.</summary>
    public CleaningFacts Cleaning { get; }

    /// <summary>What was read.</summary>
    public InputFacts Input { get; }

    /// <summary>Keys of nodes from their labels, for random numbers that survive renumbering.</summary>
    public ulong[] NodeKeys { get; }

    /// <summary>n.</summary>
    public int NodeCount => Labels.Count;

    /// <summary>m.</summary>
    public long LinkCount => linkStart[^1];

    /// <summary>
    /// Links are numbered 0..m-1 by their smaller node, then by the larger: the links from u to later nodes are
    /// <c>LinkStart[u] .. LinkStart[u+1]-1</c>, in the order of the last arcs of row u.
    /// </summary>
    public ReadOnlySpan<long> LinkStart => linkStart;

    /// <summary>The number of neighbours of a node.</summary>
    public int Degree(int node) => (int)(RowStart[node + 1] - RowStart[node]);

    /// <summary>The first arc of row u that leads to a later node.</summary>
    public long FirstLaterArc(int node) => RowStart[node + 1] - (linkStart[node + 1] - linkStart[node]);

    /// <summary>The conductance of an arc.</summary>
    public double Conductance(long arc) => Conductances is null ? 1 : Conductances[arc];

    /// <summary>The arc from one node to another, or -1 where they are not linked. O(log degree).</summary>
    public long FindArc(int from, int to)
    {
        long start = RowStart[from];
        int at = Neighbours.AsSpan((int)start, Degree(from)).BinarySearch(to);
        return at < 0 ? -1 : start + at;
    }

    /// <summary>The number of the link between two nodes, or -1. O(log degree).</summary>
    public long LinkBetween(int one, int other)
    {
        int from = Math.Min(one, other);
        long arc = FindArc(from, Math.Max(one, other));
        return arc < 0 ? -1 : linkStart[from] + (arc - FirstLaterArc(from));
    }

    /// <summary>The smaller node of a link. O(log n).</summary>
    public int NodeOfLink(long link)
    {
        // The last node whose links begin at or before this one and that has any.
        int low = 0, high = NodeCount - 1;
        while (low < high)
        {
            int middle = low + ((high - low + 1) / 2);
            if (linkStart[middle] <= link)
                low = middle;
            else
                high = middle - 1;
        }
        return low;
    }

    /// <summary>The number of links within a component.</summary>
    public long LinksOf(Component component) => linkStart[component.End] - linkStart[component.Start];

    /// <summary>The component of every node, n values.</summary>
    public int[] ComponentOfNodes()
    {
        int[] of = new int[NodeCount];
        for (int c = 0; c < Components.Count; c++)
            of.AsSpan(Components[c].Start, Components[c].Nodes).Fill(c);
        return of;
    }
}
