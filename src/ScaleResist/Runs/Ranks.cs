// Closeness ranks with their bounds.
// Invariant: ranks count within a component, 1 the closest; Lower..Upper holds every rank that the intervals allow. A node of lower l_u is closer to
// all others, for total resistance is n l_u + tr L+: those surely closer have intervals that end below this one's begin, those perhaps closer begin
// below its end.

using ScaleResist.Estimating;
using ScaleResist.Graphs;

namespace ScaleResist.Runs;

/// <summary>By internal node: the rank of its estimate, and the least and the largest rank that the intervals allow.</summary>
internal sealed record Ranks(int[] Rank, int[] Lower, int[] Upper)
{
    /// <summary>Ranks of all nodes within their components.</summary>
    /// <param name="network">The network.</param>
    /// <param name="diagonal">l_u with its interval, by internal node.</param>
    public static Ranks Of(Network network, Estimate[] diagonal)
    {
        int n = network.NodeCount;
        Ranks ranks = new(new int[n], new int[n], new int[n]);
        foreach (Component component in network.Components)
        {
            int size = component.Nodes;
            int[] nodes = new int[size];
            double[] values = new double[size], lower = new double[size], upper = new double[size];
            for (int i = 0; i < size; i++)
            {
                nodes[i] = component.Start + i;
                Estimate l = diagonal[component.Start + i];
                (values[i], lower[i], upper[i]) = (l.Value, l.Lower, l.Upper);
            }
            Array.Sort(values, nodes);
            Array.Sort(lower);
            Array.Sort(upper);
            for (int i = 0; i < size; i++)
            {
                Estimate l = diagonal[nodes[i]];
                ranks.Rank[nodes[i]] = i + 1;
                ranks.Lower[nodes[i]] = 1 + CountBelow(upper, l.Lower, orEqual: false);
                ranks.Upper[nodes[i]] = CountBelow(lower, l.Upper, orEqual: true);
            }
        }
        return ranks;
    }

    private static int CountBelow(double[] sorted, double value, bool orEqual)
    {
        int low = 0, high = sorted.Length;
        while (low < high)
        {
            int middle = (low + high) / 2;
            if (sorted[middle] < value || (orEqual && sorted[middle] == value))
                low = middle + 1;
            else
                high = middle;
        }
        return low;
    }
}
