// Exact resistances of any two nodes of a component whose blocks are all exact: along the tree of blocks, and within the one block where the two
// paths to the root meet through a factor.
//
// With H(u) the resistance to the root, R(u,v) = H(u) - H(a) + H(v) - H(b) + R_B(a,b), where a and b are the nodes at which the two paths enter
// the first block B that they share; where they meet in a node, a = b.

using ScaleResist.Graphs;
using ScaleResist.Solving;

namespace ScaleResist.Estimating;

/// <summary>Exact pairs; safe from several threads.</summary>
internal sealed class ExactPairs : IDisposable
{
    private readonly Blocks blocks;
    private readonly ExactPart part;
    private readonly ThreadLocal<PathResistance> paths;
    private readonly int[] componentOf;
    private readonly double[] toRoot;
    private readonly int[] depth; // blocks between a node and the root

    /// <summary>Prepares from exact results: O(n).</summary>
    public ExactPairs(ExactResults exact)
    {
        part = exact.Part;
        blocks = part.Blocks;
        paths = new ThreadLocal<PathResistance>(() => new PathResistance(exact.Factor));
        componentOf = blocks.Network.ComponentOfNodes();
        toRoot = new double[blocks.Network.NodeCount];
        depth = new int[blocks.Network.NodeCount];
        for (int b = blocks.Count - 1; b >= 0; b--)
        {
            if (part.Probed[b])
                continue;
            int head = blocks.Head(b);
            foreach (int v in blocks.Members(b))
            {
                toRoot[v] = toRoot[head] + exact.ToHead(v);
                depth[v] = depth[head] + 1;
            }
        }
    }

    /// <summary>Whether a pair's resistance is exact here: it lies in one component, and no block of that is probed.</summary>
    public bool Holds(int u, int v) => componentOf[u] == componentOf[v] && part.HoldsComponent(componentOf[u]);

    /// <summary>R(u,v) of two nodes of one component that the exact part holds as a whole. O(depth of the block tree) and two paths of the factor.</summary>
    public double Between(int u, int v)
    {
        if (u == v)
            return 0;
        (int a, int b) = (u, v);
        while (depth[a] > depth[b])
            a = blocks.Head(blocks.BlockOf(a));
        while (depth[b] > depth[a])
            b = blocks.Head(blocks.BlockOf(b));
        while (a != b && blocks.BlockOf(a) != blocks.BlockOf(b))
            (a, b) = (blocks.Head(blocks.BlockOf(a)), blocks.Head(blocks.BlockOf(b)));
        double within = a == b ? 0 : paths.Value!.Between(part.RowOf(a), part.RowOf(b));
        return toRoot[u] - toRoot[a] + (toRoot[v] - toRoot[b]) + within;
    }

    /// <inheritdoc/>
    public void Dispose() => paths.Dispose();
}
