// Multilevel bisection by a vertex separator: matched down to a hundred nodes, split there from several seeds, refined on the way back.
// Invariant: every level's parts are a separator of its graph, for the parts of a coarse level are one of the finer level.

namespace ScaleResist.Solving;

/// <summary>Splits a graph in two sides and a separator, by a fixed sequence of steps.</summary>
internal static class Bisection
{
    private const int CoarsestNodes = 100;
    private const int Seeds = 6;

    /// <summary>0, 1 or <see cref="Separator.Between"/> for every node. O(n + arcs) on graphs that matching halves.</summary>
    public static byte[] Of(OrderGraph graph, CancellationToken cancel)
    {
        List<(LevelGraph Graph, int[] CoarseOf)> levels = [];
        LevelGraph coarsest = LevelGraph.Of(graph);
        int heaviest = Math.Max(2, (int)(3L * graph.Count / CoarsestNodes / 2));
        while (coarsest.Count > CoarsestNodes)
        {
            cancel.ThrowIfCancellationRequested();
            (LevelGraph coarse, int[] coarseOf) = coarsest.Coarsen(heaviest);
            if (coarse.Count > 0.95 * coarsest.Count)
                break;
            levels.Add((coarsest, coarseOf));
            coarsest = coarse;
        }
        GainHeap[] heaps = [new(graph.Count), new(graph.Count)];
        byte[] part = Split(coarsest, heaps);
        for (int level = levels.Count - 1; level >= 0; level--)
        {
            (LevelGraph fine, int[] coarseOf) = levels[level];
            byte[] finer = new byte[fine.Count];
            for (int v = 0; v < finer.Length; v++)
                finer[v] = part[coarseOf[v]];
            new Separator(fine, finer, heaps).Refine();
            part = finer;
        }
        return part;
    }

    // Breadth-first from a seed until half the weight is in; what borders on the rest is the separator. The best of several after refinement.
    private static byte[] Split(LevelGraph graph, GainHeap[] heaps)
    {
        int n = graph.Count;
        long total = 0;
        foreach (int weight in graph.NodeWeights)
            total += weight;
        Separator? best = null;
        int[] queue = new int[n];
        for (int seed = 0; seed < Math.Min(Seeds, n); seed++)
        {
            byte[] part = new byte[n];
            Array.Fill(part, (byte)1);
            Grow(graph, (int)((long)seed * n / Seeds), total / 2, part, queue);
            for (int v = 0; v < n; v++)
            {
                for (int k = graph.Start[v]; part[v] == 0 && k < graph.Start[v + 1]; k++)
                {
                    if (part[graph.Neighbours[k]] == 1)
                        part[v] = Separator.Between;
                }
            }
            Separator separator = new(graph, part, heaps);
            separator.Refine();
            if (best is null || separator.IsBetterThan(best.Weight, best.Heavier))
                best = separator;
        }
        return best!.Part;
    }

    private static void Grow(LevelGraph graph, int seed, long half, byte[] part, int[] queue)
    {
        int head = 0, tail = 0;
        long grown = 0;
        for (int next = seed, tried = 0; grown < half && tried < graph.Count; next = (next + 1) % graph.Count, tried++)
        {
            if (part[next] == 0)
                continue;
            part[next] = 0;
            queue[tail++] = next;
            grown += graph.NodeWeights[next];
            while (head < tail && grown < half)
            {
                int u = queue[head++];
                for (int k = graph.Start[u]; k < graph.Start[u + 1] && grown < half; k++)
                {
                    int v = graph.Neighbours[k];
                    if (part[v] == 0)
                        continue;
                    part[v] = 0;
                    queue[tail++] = v;
                    grown += graph.NodeWeights[v];
                }
            }
        }
    }
}
