// The order in which a sparse factor of a Laplacian eliminates the nodes: little fill.
// Invariant: a permutation of the nodes that depends on the pattern alone, not on threads or clocks.

using ScaleResist.Graphs;

namespace ScaleResist.Solving;

/// <summary>Fill-reducing orders.</summary>
internal static class FillReducingOrder
{
    /// <summary>All nodes in the order of elimination; the last one is to be grounded.</summary>
    public static int[] Of(Laplacian laplacian, int threads, CancellationToken cancel) =>
        Of(laplacian, OrderLimits.None, threads, cancel)
        ?? throw new InvalidOperationException($"A graph of {laplacian.RowStart[laplacian.NodeCount]} arcs is too large for an order.");

    /// <summary>The same, or null where the factor would exceed the limits.</summary>
    public static int[]? Of(Laplacian laplacian, OrderLimits limits, int threads, CancellationToken cancel)
    {
        SmallDegrees small = SmallDegrees.Of(laplacian);
        int[]? core = MinimumDegree.Order(small.Core, small.Core.Count, limits, out ColumnCosts costs, cancel);
        if (core is null)
            return null;
        return [.. small.Order, .. core.Select(i => small.CoreNodes[i])];
    }
}
