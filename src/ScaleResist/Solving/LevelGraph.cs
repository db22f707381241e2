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
        int[] coarseOf = new int[n], first = new int[n], second = new int[n];
        Array.Fill(coarseOf, -1);
        for (int u = 0; u < n; u++)
        {
            if (coarseOf[u] >= 0)
                continue;
            int mate = u, weight = 0, mateWeight = 0;
            for (int k = Start[u]; k < Start[u + 1]; k++)
            {
                int v = Neighbours[k];
                if (coarseOf[v] >= 0 || ArcWeights[k] < weight || NodeWeights[u] + NodeWeights[v] > heaviest)
                    continue;
                if (ArcWeights[k] == weight && NodeWeights[v] >= mateWeight)
                    continue;
                (mate, weight, mateWeight) = (v, ArcWeights[k], NodeWeights[v]);
            }
            first[count] = u;
            second[count] = mate;
            coarseOf[u] = coarseOf[mate] = count++;
        }
        return (Contract(coarseOf, first, second, count), coarseOf);
    }

    private LevelGraph Contract(int[] coarseOf, int[] first, int[] second, int count)
    {
        int[] start = new int[count + 1], nodes = new int[count], at = new int[count];
        int[] neighbours = new int[Neighbours.Length], arcs = new int[Neighbours.Length];
        Array.Fill(at, -1);
        int write = 0;
        for (int c = 0; c < count; c++)
        {
            start[c] = write;
            Add(first[c]);
            if (second[c] != first[c])
                Add(second[c]);

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
