// A vertex separator of a graph and its refinement by single moves (after Fiduccia & Mattheyses, Design Automation Conf. 1982).
// Invariant: no link joins side 0 to side 1. Moving v from the separator to a side draws v's neighbours on the other side into it.
//
// A pass moves the node of the best gain w(v) - w(neighbours drawn in), uphill too, each node once, and goes back to the best state seen.

namespace ScaleResist.Solving;

/// <summary>Sides 0 and 1 and the separator between them on one level; moves keep the heavier side within the balance.</summary>
/// <param name="graph">The graph.</param>
/// <param name="part">0, 1 or <see cref="Between"/> for every node.</param>
/// <param name="heaps">Workspace for at least as many nodes, empty.</param>
internal sealed class Separator(LevelGraph graph, byte[] part, GainHeap[] heaps)
{
    /// <summary>In the separator.</summary>
    public const byte Between = 2;

    private const int Passes = 6;
    private const int MostMovesUphill = 200;
    private const double HeavierSide = 0.6;
    private readonly long[] weights = WeightsOf(graph, part);
    private readonly List<(int Node, byte Before)> log = [];
    private readonly bool[] moved = new bool[graph.Count];

    /// <summary>The part of every node.</summary>
    public byte[] Part => part;

    /// <summary>The separator's weight.</summary>
    public long Weight => weights[Between];

    /// <summary>The heavier side's weight.</summary>
    public long Heavier => Math.Max(weights[0], weights[1]);

    /// <summary>Lighter, or as light and better balanced.</summary>
    public bool IsBetterThan(long weight, long heavier) => (Weight, Heavier).CompareTo((weight, heavier)) < 0;

    /// <summary>Passes until one brings nothing.</summary>
    public void Refine()
    {
        for (int pass = 0; pass < Passes && Pass(); pass++)
        {
        }
    }

    private bool Pass()
    {
        (long weight, long heavier) = (Weight, Heavier);
        (long bestWeight, long bestHeavier, int best) = (weight, heavier, 0);
        long limit = Math.Max((long)(HeavierSide * (weights[0] + weights[1] + weights[2])), heavier);
        for (int v = 0; v < graph.Count; v++)
        {
            if (part[v] == Between)
                Enter(v);
        }
        int uphill = 0;
        while (uphill++ < MostMovesUphill && Choose(limit, out int v, out byte side))
        {
            Move(v, side);
            if (!IsBetterThan(bestWeight, bestHeavier))
                continue;
            (bestWeight, bestHeavier, best) = (Weight, Heavier, log.Count);
            uphill = 0;
        }
        heaps[0].Clear();
        heaps[1].Clear();
        for (int k = log.Count - 1; k >= 0; k--)
        {
            (int node, byte before) = log[k];
            moved[node] = false;
            if (k >= best)
                Assign(node, before);
        }
        log.Clear();
        return IsBetterThan(weight, heavier);
    }

    private bool Choose(long limit, out int v, out byte side)
    {
        bool zero = Fits(0, limit), one = Fits(1, limit);
        side = (byte)(zero && one ? heaps[0].TopGain != heaps[1].TopGain ? heaps[0].TopGain > heaps[1].TopGain ? 0 : 1
            : weights[0] <= weights[1] ? 0 : 1 : zero ? 0 : 1);
        v = zero || one ? heaps[side].Top : -1;
        return zero || one;
    }

    private bool Fits(int side, long limit) => !heaps[side].IsEmpty && weights[side] + graph.NodeWeights[heaps[side].Top] <= limit;

    private void Move(int v, byte side)
    {
        int other = 1 - side;
        heaps[0].Remove(v);
        heaps[1].Remove(v);
        Set(v, side);
        moved[v] = true;
        for (int k = graph.Start[v]; k < graph.Start[v + 1]; k++)
        {
            int u = graph.Neighbours[k];
            if (part[u] == Between)
            {
                if (heaps[other].Contains(u))
                    heaps[other].Change(u, -graph.NodeWeights[v]);
                continue;
            }
            if (part[u] != other)
                continue;
            Set(u, Between);
            for (int j = graph.Start[u]; j < graph.Start[u + 1]; j++)
            {
                int x = graph.Neighbours[j];
                if (part[x] == Between && heaps[side].Contains(x))
                    heaps[side].Change(x, graph.NodeWeights[u]);
            }
            if (!moved[u])
                Enter(u);
        }
    }

    private void Enter(int v)
    {
        int zero = graph.NodeWeights[v], one = zero;
        for (int k = graph.Start[v]; k < graph.Start[v + 1]; k++)
        {
            int u = graph.Neighbours[k];
            if (part[u] == 1)
                zero -= graph.NodeWeights[u];
            else if (part[u] == 0)
                one -= graph.NodeWeights[u];
        }
        heaps[0].Add(v, zero);
        heaps[1].Add(v, one);
    }

    private void Set(int node, byte to)
    {
        log.Add((node, part[node]));
        Assign(node, to);
    }

    private void Assign(int node, byte to)
    {
        weights[part[node]] -= graph.NodeWeights[node];
        weights[to] += graph.NodeWeights[node];
        part[node] = to;
    }

    private static long[] WeightsOf(LevelGraph graph, byte[] part)
    {
        long[] weights = new long[3];
        for (int v = 0; v < part.Length; v++)
            weights[part[v]] += graph.NodeWeights[v];
        return weights;
    }
}
