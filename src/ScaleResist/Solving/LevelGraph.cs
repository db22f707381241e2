// One level of a multilevel bisection: a graph with weights, and the smaller graph that heavy-edge matching makes of it.
// Invariant: a coarse node weighs what its nodes weigh together, a coarse link what the links between them do; links within a node vanish.

namespace ScaleResist.Solving;

/// <summary>A graph with integer weights on nodes and arcs.</summary>
internal sealed record LevelGraph(int[] Start, int[] Neighbours, int[] ArcWeights, int[] NodeWeights)
{
    /// <summary>The number of nodes.</summary>
    public int Count => NodeWeights.Length;

    /// <summary>A graph whose weights are all 1.</summary>
    public static LevelGraph Of(OrderGraph graph)
    {
        int[] arcs = new int[graph.Neighbours.Length], nodes = new int[graph.Count];
        Array.Fill(arcs, 1);
        Array.Fill(nodes, 1);
        return new LevelGraph(graph.Start, graph.Neighbours, arcs, nodes);
    }

    /// <summary>
    /// Pairs each node with the unpaired neighbour of the heaviest link, the lighter neighbour where links tie, and merges the pairs that weigh
    /// no more than <paramref name="heaviest"/>. Returns the coarse graph and the coarse node of every node.
    /// </summary>
    public (LevelGraph Coarse, int[] CoarseOf) Coarsen(int heaviest)
    {
        int n = Count, count = 0;
        int[] mate = new int[n];
        Array.Fill(mate, -1);
        foreach (int u in Shuffled(n))
        {
            if (mate[u] >= 0)
                continue;
            int best = u, weight = 0, lightest = 0;
            for (int k = Start[u]; k < Start[u + 1]; k++)
            {
                int v = Neighbours[k];
                if (mate[v] >= 0 || ArcWeights[k] < weight || NodeWeights[u] + NodeWeights[v] > heaviest)
                    continue;
                if (ArcWeights[k] == weight && NodeWeights[v] >= lightest)
                    continue;
                (best, weight, lightest) = (v, ArcWeights[k], NodeWeights[v]);
            }
            mate[u] = best;
            mate[best] = u;
        }
        int[] coarseOf = new int[n], first = new int[n];
        for (int u = 0; u < n; u++)
        {
            coarseOf[u] = mate[u] < u ? coarseOf[mate[u]] : count;
            if (mate[u] >= u)
                first[count++] = u;
        }
        return (Contract(coarseOf, first, mate, count), coarseOf);
    }

    // A fixed shuffle: pairs made in the order of rows would grow into strips.
    private static int[] Shuffled(int n)
    {
        int[] order = new int[n];
        for (int i = 0; i < n; i++)
            order[i] = i;
        ulong state = 0x9E3779B97F4A7C15;
        for (int i = n - 1; i > 0; i--)
        {
            state = (state * 6364136223846793005) + 1442695040888963407;
            int j = (int)Math.BigMul(state, (ulong)i + 1, out _);
            (order[i], order[j]) = (order[j], order[i]);
        }
        return order;
    }

    private LevelGraph Contract(int[] coarseOf, int[] first, int[] mate, int count)
    {
        int[] start = new int[count + 1], nodes = new int[count], at = new int[count];
        int[] neighbours = new int[Neighbours.Length], arcs = new int[Neighbours.Length];
        Array.Fill(at, -1);
        int write = 0;
        for (int c = 0; c < count; c++)
        {
            start[c] = write;
            Add(first[c]);
            if (mate[first[c]] != first[c])
                Add(mate[first[c]]);

            void Add(int u)
            {
                nodes[c] += NodeWeights[u];
                for (int k = Start[u]; k < Start[u + 1]; k++)
                {
                    int to = coarseOf[Neighbours[k]];
                    if (to == c)
                        continue;
                    if (at[to] >= start[c])
                    {
                        arcs[at[to]] += ArcWeights[k];
                        continue;
                    }
                    at[to] = write;
                    neighbours[write] = to;
                    arcs[write++] = ArcWeights[k];
                }
            }
        }
        start[count] = write;
        Array.Resize(ref neighbours, write);
        Array.Resize(ref arcs, write);
        return new LevelGraph(start, neighbours, arcs, nodes);
    }
}
