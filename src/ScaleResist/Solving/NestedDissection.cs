// Nested dissection (George, SIAM J. Numer. Anal. 10:345, 1973): two sides first, their separator last, and so on within the sides.
// Invariant: all neighbours of a leaf outside it lie in separators, which are eliminated later; minimum degree on the leaf sees them as nodes
// that stay (Pellegrini, Roman & Amestoy 2000), so that its degrees are true.

namespace ScaleResist.Solving;

/// <summary>Nested dissection down to small leaves, minimum degree there.</summary>
internal sealed class NestedDissection
{
    private const int LeafNodes = 1000;
    private readonly OrderGraph root;
    private readonly CancellationToken cancel;
    private readonly int[] order;
    private readonly int[] place; // of a node within its leaf

    private NestedDissection(OrderGraph root, CancellationToken cancel)
    {
        this.root = root;
        this.cancel = cancel;
        order = new int[root.Count];
        place = new int[root.Count];
    }

    /// <summary>All nodes in the order of elimination, whatever the number of threads.</summary>
    /// <param name="graph">n nodes.</param>
    /// <param name="part">The first bisection: 0, 1 or <see cref="Separator.Between"/> for every node.</param>
    /// <param name="threads">Threads to use, at least 1.</param>
    /// <param name="cancel">Looked at once a level and leaf.</param>
    public static int[] Order(OrderGraph graph, byte[] part, int threads, CancellationToken cancel)
    {
        NestedDissection run = new(graph, cancel);
        int[] nodes = new int[graph.Count];
        for (int v = 0; v < nodes.Length; v++)
            nodes[v] = v;
        run.Divide(graph, nodes, part, 0, threads);
        return run.order;
    }

    private void Dissect(OrderGraph graph, int[] nodes, int at, int threads)
    {
        cancel.ThrowIfCancellationRequested();
        if (nodes.Length <= LeafNodes)
            OrderLeaf(nodes, at);
        else
            Divide(graph, nodes, Bisection.Of(graph, cancel), at, threads);
    }

    // The sides go to the front of the places from `at` on, the separator to their end.
    private void Divide(OrderGraph graph, int[] nodes, byte[] part, int at, int threads)
    {
        int[] counts = new int[3], local = new int[nodes.Length];
        for (int v = 0; v < nodes.Length; v++)
            local[v] = counts[part[v]]++;
        if (Math.Max(counts[0], counts[1]) == nodes.Length)
        {
            OrderLeaf(nodes, at); // nothing separates it
            return;
        }
        int separator = at + counts[0] + counts[1];
        for (int v = 0; v < nodes.Length; v++)
        {
            if (part[v] == Separator.Between)
                order[separator + local[v]] = nodes[v];
        }
        (OrderGraph zero, int[] zeroNodes) = Side(0);
        (OrderGraph one, int[] oneNodes) = Side(1);
        if (threads > 1)
        {
            Parallel.Invoke(
                new ParallelOptions { CancellationToken = cancel, MaxDegreeOfParallelism = 2 },
                () => Dissect(zero, zeroNodes, at, threads / 2),
                () => Dissect(one, oneNodes, at + zeroNodes.Length, threads - (threads / 2)));
            return;
        }
        Dissect(zero, zeroNodes, at, 1);
        Dissect(one, oneNodes, at + zeroNodes.Length, 1);

        (OrderGraph Graph, int[] Nodes) Side(int side)
        {
            int count = counts[side], arcs = 0;
            int[] start = new int[count + 1], kept = new int[count];
            for (int v = 0; v < nodes.Length; v++)
            {
                if (part[v] != side)
                    continue;
                kept[local[v]] = nodes[v];
                foreach (int u in graph.Row(v))
                    arcs += part[u] == side ? 1 : 0;
                start[local[v] + 1] = arcs;
            }
            int[] neighbours = new int[arcs];
            int write = 0;
            for (int v = 0; v < nodes.Length; v++)
            {
                if (part[v] != side)
                    continue;
                foreach (int u in graph.Row(v))
                {
                    if (part[u] == side)
                        neighbours[write++] = local[u];
                }
            }
            return (new OrderGraph(start, neighbours), kept);
        }
    }

    private void OrderLeaf(int[] nodes, int at)
    {
        cancel.ThrowIfCancellationRequested();
        OrderGraph leaf = WithBorder(nodes);
        int[] leafOrder = MinimumDegree.Order(leaf, nodes.Length, OrderLimits.None, out _, cancel)!;
        for (int k = 0; k < nodes.Length; k++)
            order[at + k] = nodes[leafOrder[k]];
    }

    // The leaf's nodes first, then the separators' nodes next to them, linked to the leaf only.
    private OrderGraph WithBorder(int[] nodes)
    {
        for (int i = 0; i < nodes.Length; i++)
            place[nodes[i]] = i;
        Dictionary<int, List<int>> border = [];
        List<List<int>> borderRows = [];
        int[] ends = new int[nodes.Length + 1];
        List<int> neighbours = [];
        for (int i = 0; i < nodes.Length; i++)
        {
            foreach (int u in root.Row(nodes[i]))
            {
                if (nodes[Math.Min(place[u], nodes.Length - 1)] == u)
                {
                    neighbours.Add(place[u]);
                    continue;
                }
                if (!border.TryGetValue(u, out List<int>? row))
                {
                    border.Add(u, row = [nodes.Length + borderRows.Count]);
                    borderRows.Add(row);
                }
                neighbours.Add(row[0]);
                row.Add(i);
            }
            ends[i + 1] = neighbours.Count;
        }
        int[] start = [.. ends, .. new int[borderRows.Count]];
        for (int b = 0; b < borderRows.Count; b++)
        {
            neighbours.AddRange(borderRows[b].Skip(1));
            start[nodes.Length + b + 1] = neighbours.Count;
        }
        return new OrderGraph(start, [.. neighbours]);
    }
}
