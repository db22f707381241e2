// The bare pattern that orders are computed on. Invariant: rows are symmetric, without self-loops or duplicates.

namespace ScaleResist.Solving;

/// <summary>A graph of n nodes. Node u's neighbours are <c>Neighbours[Start[u] .. Start[u+1]-1]</c>.</summary>
/// <param name="Start">n + 1 offsets.</param>
/// <param name="Neighbours">One entry an arc.</param>
internal sealed record OrderGraph(int[] Start, int[] Neighbours)
{
    /// <summary>n.</summary>
    public int Count => Start.Length - 1;

    /// <summary>The number of neighbours of a node.</summary>
    public int Degree(int node) => Start[node + 1] - Start[node];

    /// <summary>The neighbours of a node.</summary>
    public ReadOnlySpan<int> Row(int node) => Neighbours.AsSpan(Start[node], Degree(node));
}
