// Nodes of degree 0, 1 and 2 go first: a pendant node leaves nothing, a node of a chain leaves one link between its neighbours.
// Invariant: to[arc] is the far end or -1 where the arc is gone, and twin[to's arc] leads back; a row never grows, so that each node's row is
// read once, when it goes, and hubs cost no more than their arcs. Parallel links may arise between two long rows; the core drops them.

using ScaleResist.Graphs;

namespace ScaleResist.Solving;

/// <summary>The pattern's elimination of small degrees, by degree: 0 and 1 before 2. O(n + arcs).</summary>
internal sealed class SmallDegrees
{
    private const int LongestSearch = 64; // entries looked through for a parallel link
    private readonly Laplacian laplacian;
    private readonly int[] to;
    private readonly int[] twin;
    private readonly int[] degree; // parallel links counted each
    private readonly bool[] gone;
    private readonly int[] pendant; // waiting, of degree 0 and 1
    private readonly int[] chain; // waiting, of degree 2
    private int pendants, chains;
    private readonly int[] order;
    private int ordered;

    private SmallDegrees(Laplacian laplacian)
    {
        this.laplacian = laplacian;
        int n = laplacian.NodeCount;
        to = laplacian.Neighbours.AsSpan(0, checked((int)laplacian.RowStart[n])).ToArray();
        twin = new int[to.Length];
        degree = new int[n];
        gone = new bool[n];
        pendant = new int[n];
        chain = new int[n];
        order = new int[n];
        // Rows are visited in order, and each lists its neighbours in order: the first arc of v not yet matched is the one back to u.
        int[] matched = new int[n];
        for (int u = 0; u < n; u++)
        {
            (int from, int end) = Row(u);
            degree[u] = end - from;
            for (int k = from; k < end; k++)
            {
                int v = to[k];
                twin[k] = (int)laplacian.RowStart[v] + matched[v]++;
            }
        }
        Core = new OrderGraph([0], []);
        CoreNodes = [];
    }

    // Nothing to eliminate: the pattern is its own core.
    private SmallDegrees(Laplacian laplacian, int[] nodes)
    {
        this.laplacian = laplacian;
        to = twin = degree = pendant = chain = order = [];
        gone = [];
        CoreNodes = nodes;
        Core = new OrderGraph(Array.ConvertAll(laplacian.RowStart, start => checked((int)start)), laplacian.Neighbours[..(int)laplacian.RowStart[^1]]);
    }

    /// <summary>The nodes eliminated, in order.</summary>
    public ReadOnlySpan<int> Order => order.AsSpan(0, ordered);

    /// <summary>The nodes that are left, ascending.</summary>
    public int[] CoreNodes { get; private set; }

    /// <summary>The links among <see cref="CoreNodes"/>, old and new, numbered by their places there.</summary>
    public OrderGraph Core { get; private set; }

    /// <summary>Costs of the columns eliminated; exact, but for one entry too many where a parallel link was overlooked.</summary>
    public ColumnCosts Costs;

    /// <summary>Eliminates what can be, down to nothing on forests and series-parallel networks. At most 2^31 arcs.</summary>
    public static SmallDegrees Of(Laplacian laplacian)
    {
        int[] nodes = [.. Enumerable.Range(0, laplacian.NodeCount)];
        if (Array.TrueForAll(nodes, u => laplacian.RowStart[u + 1] - laplacian.RowStart[u] > 2))
            return new SmallDegrees(laplacian, nodes);
        SmallDegrees run = new(laplacian);
        run.Run();
        run.BuildCore();
        return run;
    }

    private (int From, int End) Row(int u) => ((int)laplacian.RowStart[u], (int)laplacian.RowStart[u + 1]);

    private void Run()
    {
        for (int u = degree.Length - 1; u >= 0; u--)
        {
            if (degree[u] < 2)
                pendant[pendants++] = u;
        }
        for (int u = 0; u < degree.Length; u++)
        {
            if (degree[u] == 2)
                chain[chains++] = u;
        }
        int nextChain = 0;
        while (pendants > 0 || nextChain < chains)
        {
            int v = pendants > 0 ? pendant[--pendants] : chain[nextChain++];
            if (!gone[v])
                Eliminate(v);
        }
    }

    private void Eliminate(int v)
    {
        gone[v] = true;
        order[ordered++] = v;
        int one = -1, other = -1;
        (int from, int end) = Row(v);
        for (int k = from; k < end; k++)
        {
            if (to[k] >= 0)
                (one, other) = (k, one);
        }
        int a = one < 0 ? -1 : to[one], b = other < 0 ? -1 : to[other];
        Costs.Add(1, a < 0 ? 0 : b < 0 || a == b ? 1 : 2);
        if (b >= 0 && a != b && !AreLinked(a, b))
        {
            int there = twin[one], back = twin[other];
            (to[there], to[back]) = (b, a);
            (twin[there], twin[back]) = (back, there);
            return;
        }
        if (a >= 0)
            Drop(a, twin[one]);
        if (b >= 0)
            Drop(b, twin[other]);
    }

    // Degrees never rise, so a node enters each of the two waiting lists at most once.
    private void Drop(int u, int arc)
    {
        to[arc] = -1;
        degree[u]--;
        if (degree[u] == 2)
            chain[chains++] = u;
        else if (degree[u] == 1)
            pendant[pendants++] = u;
    }

    private bool AreLinked(int a, int b)
    {
        (int from, int end) = Row(a);
        (int otherFrom, int otherEnd) = Row(b);
        return end - from <= otherEnd - otherFrom ? Find(from, end, b) : Find(otherFrom, otherEnd, a);

        bool Find(int from, int end, int node) => end - from <= LongestSearch && to.AsSpan(from, end - from).Contains(node);
    }

    private void BuildCore()
    {
        CoreNodes = new int[gone.Length - ordered];
        int[] place = new int[gone.Length];
        int count = 0;
        for (int u = 0; u < gone.Length; u++)
        {
            if (gone[u])
                continue;
            place[u] = count;
            CoreNodes[count++] = u;
        }
        int[] start = new int[count + 1], seen = new int[count];
        for (int i = 0; i < count; i++)
            start[i + 1] = start[i] + degree[CoreNodes[i]];
        int[] neighbours = new int[start[count]];
        int write = 0;
        for (int i = 0; i < count; i++)
        {
            start[i] = write;
            (int from, int end) = Row(CoreNodes[i]);
            for (int k = from; k < end; k++)
            {
                if (to[k] < 0 || seen[place[to[k]]] == i + 1)
                    continue;
                seen[place[to[k]]] = i + 1;
                neighbours[write++] = place[to[k]];
            }
        }
        start[count] = write;
        Core = new OrderGraph(start, write == neighbours.Length ? neighbours : neighbours[..write]);
    }
}
