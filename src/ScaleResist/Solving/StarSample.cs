// One eliminated node: its column of the factor, and the few links that stand for the clique it leaves behind (Kyng & Sachdeva 2016; Gao, Kyng &
// Spielman 2023).
//
// Neighbours sorted by weight w_1 <= ... <= w_k, d = sum w: for each i < k and each of S samples one j > i is drawn with probability w_j / W_i,
// W_i = sum over j > i of w_j, and joined to i by w_i W_i / (d S): in expectation w_i w_j / d, the clique's link.
// Invariant: the draws depend on seed and node alone, so nodes may be eliminated in any order, on any thread.

using ScaleResist.Graphs;

namespace ScaleResist.Solving;

/// <summary>A star in work: the neighbours of the node that goes. One for each thread.</summary>
/// <param name="samples">S.</param>
/// <param name="seed">Of the draws.</param>
internal sealed class StarSample(int samples, ulong seed)
{
    private const ulong Step = 0x9E3779B97F4A7C15;
    private const int Short = 16;
    private readonly ulong key = NodeKey.Of((long)seed);
    private double[] after = new double[Short + 1]; // W_i before each neighbour: the sum of the weights from it on
    private ulong state;

    /// <summary>The neighbours; distinct. Sorted by weight once <see cref="Begin"/> was called.</summary>
    public int[] Nodes { get; private set; } = new int[Short];

    /// <summary>Beside <see cref="Nodes"/>.</summary>
    public double[] Weights { get; private set; } = new double[Short];

    /// <summary>Makes room, keeping what is there.</summary>
    public void Ensure(int count)
    {
        if (count <= Nodes.Length)
            return;
        int size = Math.Max(count, 2 * Nodes.Length);
        int[] nodes = Nodes;
        double[] weights = Weights;
        Array.Resize(ref nodes, size);
        Array.Resize(ref weights, size);
        (Nodes, Weights, after) = (nodes, weights, new double[size + 1]);
    }

    /// <summary>Sorts the first <paramref name="count"/> neighbours; returns d, the sum of their weights.</summary>
    public double Begin(int node, int count)
    {
        state = NodeKey.Of((long)(key + (ulong)node));
        Sort(count);
        double d = 0;
        after[count] = 0;
        for (int i = count - 1; i >= 0; i--)
            after[i] = d += Weights[i];
        return d;
    }

    /// <summary>The conductance of each of the S links that neighbour i sends to later ones; 0 where floating point has nothing left.</summary>
    public double Conductance(int i, double d) => Weights[i] * after[i + 1] / (d * samples);

    /// <summary>j > i with probability w_j / W_i: the first whose later weights sum to at most a uniform share of W_i.</summary>
    public int Draw(int i, int count)
    {
        state += Step;
        double target = (NodeKey.Of((long)state) >> 11) * (1.0 / (1UL << 53)) * after[i + 1];
        int low = i + 1, high = count - 1;
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

    // Most rows are short, and insertion beats the general sort there. Both order ties the same way each time.
    private void Sort(int count)
    {
        (int[] nodes, double[] weights) = (Nodes, Weights);
        if (count > 2 * Short)
        {
            Array.Sort(weights, nodes, 0, count);
            return;
        }
        for (int i = 1; i < count; i++)
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
}
