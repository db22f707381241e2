// The order in which a sparse factor of a Laplacian eliminates the nodes, for little fill.
// Invariant: a permutation of the nodes that depends on the pattern alone, not on threads or clocks.
//
// Degrees up to 2 go first and hubs last. What is left is ordered by minimum degree, which also tells exactly what its factor costs; where
// that is much and one bisection promises less, by nested dissection too, and the cheaper of the two is kept.

using ScaleResist.Graphs;

namespace ScaleResist.Solving;

/// <summary>Fill-reducing orders.</summary>
internal static class FillReducingOrder
{
    private const double HubDegree = 10; // times the root of the number of nodes
    private const double WorthDissecting = 2e4; // operations of the factor a node
    private const double SquaresOfSeparator = 5; // of the first separator; George's square grids take 7.75 log2 n

    /// <summary>All nodes in the order of elimination; the last one is to be grounded.</summary>
    /// <exception cref="InvalidOperationException">The graph has more arcs than an array can hold.</exception>
    public static int[] Of(Laplacian laplacian, int threads, CancellationToken cancel) =>
        Of(laplacian, OrderLimits.None, threads, cancel)
        ?? throw new InvalidOperationException($"{laplacian.RowStart[laplacian.NodeCount]} arcs are too many for an exact factor.");

    /// <summary>
    /// The same, or null where the factor would exceed the limits. Hopeless graphs are given up on as soon as a bound on the entries to come
    /// says so, or when the search has read more list entries than half of what the factor may have and a few times the graph.
    /// </summary>
    public static int[]? Of(Laplacian laplacian, OrderLimits limits, int threads, CancellationToken cancel)
    {
        long arcs = laplacian.RowStart[laplacian.NodeCount];
        if (arcs > Array.MaxLength || laplacian.NodeCount + (arcs / 2) > limits.Entries)
            return null;
        SmallDegrees small = SmallDegrees.Of(laplacian);
        cancel.ThrowIfCancellationRequested();
        (OrderGraph graph, int[] nodes, int[] hubs) = WithoutHubs(small.Core);
        int[]? core = MinimumDegree.Order(graph, graph.Count, limits, out ColumnCosts costs, cancel);
        int[]? order = core is null ? null : Join(core);
        if (graph.Count > 0 && costs.Operations > WorthDissecting * graph.Count)
        {
            byte[] part = Bisection.Of(graph, cancel);
            double separator = part.Count(p => p == Separator.Between);
            long entries = core is null ? limits.Entries : costs.Entries;
            if (SquaresOfSeparator * separator * separator < entries)
            {
                int[] dissected = Join(NestedDissection.Order(graph, part, threads, cancel));
                if (order is null || EliminationTree.Of(laplacian, dissected).Operations < EliminationTree.Of(laplacian, order).Operations)
                    order = dissected;
            }
        }
        if (order is null || limits == OrderLimits.None)
            return order;
        EliminationTree tree = EliminationTree.Of(laplacian, order);
        return tree.Entries <= limits.Entries && tree.Operations <= limits.Operations ? order : null;

        int[] Join(int[] middle)
        {
            int[] all = new int[laplacian.NodeCount];
            small.Order.CopyTo(all);
            int at = small.Order.Length;
            foreach (int i in middle)
                all[at++] = small.CoreNodes[nodes[i]];
            foreach (int i in hubs)
                all[at++] = small.CoreNodes[i];
            return all;
        }
    }

    // Nodes of very high degree would be read again at each of their neighbours; they go last, by degree.
    private static (OrderGraph Graph, int[] Nodes, int[] Hubs) WithoutHubs(OrderGraph graph)
    {
        double root = Math.Sqrt(graph.Count);
        int limit = (int)Math.Max(100, HubDegree * root);
        int[] nodes = [.. Enumerable.Range(0, graph.Count).Where(i => graph.Degree(i) <= limit)];
        int hubs = graph.Count - nodes.Length;
        if (hubs == 0 || hubs > root)
            return (graph, [.. Enumerable.Range(0, graph.Count)], []);
        int[] place = new int[graph.Count];
        Array.Fill(place, -1);
        for (int i = 0; i < nodes.Length; i++)
            place[nodes[i]] = i;
        int[] start = new int[nodes.Length + 1];
        List<int> neighbours = new(graph.Neighbours.Length);
        for (int i = 0; i < nodes.Length; i++)
        {
            foreach (int u in graph.Row(nodes[i]))
            {
                if (place[u] >= 0)
                    neighbours.Add(place[u]);
            }
            start[i + 1] = neighbours.Count;
        }
        int[] last = [.. Enumerable.Range(0, graph.Count).Where(i => place[i] < 0).OrderBy(graph.Degree)];
        return (new OrderGraph(start, [.. neighbours]), nodes, last);
    }
}
