// One eliminated node: its column of the factor, and the few links that stand for the clique it leaves behind (Kyng & Sachdeva 2016; Gao, Kyng &
// Spielman 2023).
//
// Neighbours sorted by weight w_1 <= ... <= w_k, d = sum w: for each i < k and each of S samples one j > i is drawn with probability w_j / W_i,
// W_i = sum over j > i of w_j, and joined to i by w_i W_i / (d S): in expectation w_i w_j / d, the clique's link.
// Invariant: the draws depend on seed and node alone, so independent nodes may be eliminated in any order, on any thread.

using ScaleResist.Graphs;

namespace ScaleResist.Solving;

/// <summary>The star of the node that goes. One for each thread.</summary>
/// <param name="samples">S for small stars; large ones do with one.</param>
/// <param name="seed">Of the draws.</param>
internal sealed class StarSample(int samples, ulong seed)
{
    // Several samples an entry multiply links faster than merging removes them where stars are large, as late on a cubic grid: one has to do there.
    private const int ManyNeighbours = 32;
    private const int Short = 16;
    private readonly ulong key = NodeKey.Of((long)seed);
    private double[] after = new double[Short + 1]; // the sum of the weights from each neighbour on
    private ulong state;
    private double d;

    /// <summary>How many neighbours there are.</summary>
    public int Count { get; private set; }

    /// <summary>The neighbours; distinct. Sorted by weight once <see cref="Eliminate"/> was called.</summary>
    public int[] Nodes { get; private set; } = new int[Short];

    /// <summary>Beside <see cref="Nodes"/>.</summary>
    public double[] Weights { get; private set; } = new double[Short];

    /// <summary>How many links a star of so many neighbours leaves behind.</summary>
    public static int LinkCount(int neighbours, int samples) => Math.Max(neighbours - 1, 0) * SamplesFor(neighbours, samples);

    /// <summary>Begins anew.</summary>
    public void Clear() => Count = 0;

    /// <summary>Adds a neighbour.</summary>
    public void Add(int node, double weight)
    {
        if (Count == Nodes.Length)
            Grow();
        Nodes[Count] = node;
        Weights[Count++] = weight;
    }

    /// <summary>The column of the factor, w / d, and 1 / d.</summary>
    /// <param name="node">The node that goes, which keys the draws.</param>
    /// <param name="column">Receives an arc for each neighbour.</param>
    /// <returns>1 / d; 0 for a node without neighbours.</returns>
    public float Eliminate(int node, Span<Arc> column)
    {
        state = NodeKey.Of((long)(key + (ulong)node));
        Sort();
        after[Count] = d = 0;
        for (int i = Count - 1; i >= 0; i--)
            after[i] = d += Weights[i];
        double inverse = d > 0 ? 1 / d : 0;
        for (int i = 0; i < Count; i++)
            column[i] = new Arc(Nodes[i], (float)(Weights[i] * inverse));
        return (float)inverse;
    }

    /// <summary>The links to keep of the clique; conductance 0 where floats have nothing left.</summary>
    public void Sample(Span<SampledLink> links)
    {
        int each = SamplesFor(Count, samples), next = 0;
        for (int i = 0; i + 1 < Count; i++)
        {
            float c = (float)(Weights[i] * after[i + 1] / (d * each));
            for (int s = 0; s < each; s++)
                links[next++] = new SampledLink(Nodes[i], Nodes[Draw(i)], c);
        }
    }

    private static int SamplesFor(int neighbours, int samples) => neighbours <= ManyNeighbours ? samples : 1;

    // j > i with probability w_j / W_i: the first whose later weights sum to at most a uniform share of W_i.
    private int Draw(int i)
    {
        state += 0x9E3779B97F4A7C15; // SplitMix64
        double target = (NodeKey.Of((long)state) >> 11) * (1.0 / (1UL << 53)) * after[i + 1];
        int low = i + 1, high = Count - 1;
        while (high - low > Short)
        {
            int middle = (low + high) / 2;
            if (after[middle + 1] <= target)
                high = middle;
            else
                low = middle + 1;
        }
        int drawn = low;
        for (int j = low; j < high; j++)
            drawn += after[j + 1] > target ? 1 : 0; // no branch to mispredict
        return drawn;
    }

    // Most stars are small, and insertion beats the general sort there. Both order ties the same way each time.
    private void Sort()
    {
        (int[] nodes, double[] weights) = (Nodes, Weights);
        if (Count > 2 * Short)
        {
            Array.Sort(weights, nodes, 0, Count);
            return;
        }
        for (int i = 1; i < Count; i++)
        {
            double weight = weights[i];
            int node = nodes[i], j = i;
            for (; j > 0 && weights[j - 1] > weight; j--)
            {
                weights[j] = weights[j - 1];
                nodes[j] = nodes[j - 1];
            }
            weights[j] = weight;
            nodes[j] = node;
        }
    }

    private void Grow()
    {
        int[] nodes = Nodes;
        double[] weights = Weights;
        Array.Resize(ref nodes, 2 * Count);
        Array.Resize(ref weights, 2 * Count);
        (Nodes, Weights, after) = (nodes, weights, new double[(2 * Count) + 1]);
    }
}
