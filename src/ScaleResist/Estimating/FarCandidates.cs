// Candidates where nobody names any: all pairs that no link joins in a small component, else those among nodes spread far apart electrically.
//
// Landmarks by farthest points (Gonzalez, Theor. Comput. Sci. 38:293, 1985): the first has the largest diagonal of L+, each next the largest
// resistance to the nearest landmark so far, times its weight where nodes have one. A landmark costs one column: R(u,a) = l_u + l_a - 2 (L+ e_a)_u.
// Invariant: pairs come in the order of their landmarks, each once, and none is linked.

using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Estimating;

/// <summary>Candidates in the largest component.</summary>
internal static class FarCandidates
{
    /// <summary>All pairs are candidates up to so many nodes: 10,011 pairs.</summary>
    public const int MostNodes = 142;

    /// <summary>Landmarks of larger components: up to 2,016 pairs.</summary>
    public const int Landmarks = 64;

    /// <summary>Pairs that no link joins, each with the median conductance of the component's links.</summary>
    public static List<Candidate> Of(Potentials potentials, WeightedTotals kind, CancellationToken cancel)
    {
        Network network = potentials.Network;
        Component range = network.Components[0];
        int[] nodes = range.Nodes <= MostNodes
            ? [.. Enumerable.Range(range.Start, range.Nodes)]
            : Farthest(potentials, kind, range, cancel);
        double conductance = Median(network, range);
        List<Candidate> candidates = [];
        for (int i = 0; i < nodes.Length; i++)
        {
            for (int j = i + 1; j < nodes.Length; j++)
            {
                if (network.FindArc(nodes[i], nodes[j]) < 0)
                    candidates.Add(new Candidate(nodes[i], nodes[j], conductance, null));
            }
        }
        return candidates;
    }

    private static int[] Farthest(Potentials potentials, WeightedTotals kind, Component range, CancellationToken cancel)
    {
        int[] nodes = new int[Landmarks];
        double[] nearest = potentials.Diagonal.AsSpan(range.Start, range.Nodes).ToArray();
        using PanelPair b = new(potentials.Network.NodeCount), x = new(potentials.Network.NodeCount);
        using IDisposable workspace = potentials.NewWorkspace();
        for (int i = 0; i < nodes.Length; i++)
        {
            int farthest = 0;
            for (int u = 1; u < nearest.Length; u++)
            {
                if (kind.Of(range.Start + u) * nearest[u] > kind.Of(range.Start + farthest) * nearest[farthest])
                    farthest = u;
            }
            int a = nodes[i] = range.Start + farthest;
            for (int u = range.Start; u < range.End; u++)
                b.At(u, 0) = (u == a ? 1 : 0) - (1.0 / range.Nodes);
            potentials.Solve(b, x, 1, [0], workspace, cancel);
            for (int u = 0; u < nearest.Length; u++)
            {
                double apart = Math.Max(0, potentials.Diagonal[range.Start + u] + x.At(a, 0) - (2 * x.At(range.Start + u, 0)));
                nearest[u] = i == 0 ? apart : Math.Min(nearest[u], apart);
            }
            nearest[farthest] = 0;
        }
        return nodes;
    }

    private static double Median(Network network, Component range)
    {
        if (network.Conductances is not double[] conductances)
            return 1;
        double[] sorted = conductances[(int)network.RowStart[range.Start]..(int)network.RowStart[range.End]];
        Array.Sort(sorted);
        return sorted.Length == 0 ? 1 : sorted[sorted.Length / 2];
    }
}
