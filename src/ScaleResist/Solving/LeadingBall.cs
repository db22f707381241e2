// A small connected piece of a Laplacian, on which a trial costs next to nothing: the nodes nearest to the first, and the links between them.
// Invariant: the piece is a Laplacian in its own right, connected, with sorted rows; it is the whole where that is small enough.

using ScaleResist.Graphs;

namespace ScaleResist.Solving;

/// <summary>The ball around the first row.</summary>
internal static class LeadingBall
{
    /// <summary>The Laplacian of at most <paramref name="most"/> nodes, breadth-first from row 0. O(arcs of the ball).</summary>
    /// <param name="laplacian">L, of which row 0's component is searched.</param>
    /// <param name="most">The most nodes.</param>
    public static Laplacian Of(Laplacian laplacian, int most)
    {
        List<int> nodes = [0];
        Dictionary<int, int> place = new() { [0] = 0 };
        for (int head = 0; head < nodes.Count && nodes.Count < most; head++)
        {
            for (long k = laplacian.RowStart[nodes[head]]; k < laplacian.RowStart[nodes[head] + 1] && nodes.Count < most; k++)
            {
                if (place.TryAdd(laplacian.Neighbours[k], nodes.Count))
                    nodes.Add(laplacian.Neighbours[k]);
            }
        }
        nodes.Sort();
        for (int i = 0; i < nodes.Count; i++)
            place[nodes[i]] = i;
        long[] rowStart = new long[nodes.Count + 1];
        double[] strengths = new double[nodes.Count];
        List<int> neighbours = [];
        List<double> conductances = [];
        for (int i = 0; i < nodes.Count; i++)
        {
            for (long k = laplacian.RowStart[nodes[i]]; k < laplacian.RowStart[nodes[i] + 1]; k++)
            {
                if (!place.TryGetValue(laplacian.Neighbours[k], out int to))
                    continue;
                neighbours.Add(to);
                conductances.Add(laplacian.Conductance(k));
                strengths[i] += laplacian.Conductance(k);
            }
            rowStart[i + 1] = neighbours.Count;
        }
        return new Laplacian(rowStart, [.. neighbours], laplacian.Conductances is null ? null : [.. conductances], strengths);
    }
}
