// Sums over the tree of blocks, seen from every node and block, in one pass up and one down.
// Invariant: nothing is subtracted, so that a small sum beside a large one keeps its digits.

namespace ScaleResist.Graphs;

/// <summary>
/// Sums of values that belong to nodes and to nodes within blocks. Each place sees a node by its own value, and a block by the value
/// of the node of the block that is nearest to the place.
/// </summary>
internal readonly struct BlockTree
{
    private BlockTree(double[] below, double[] above, double[] rest)
    {
        Below = below;
        Above = above;
        Rest = rest;
    }

    /// <summary>For every node: itself and all that hangs on it in the blocks it heads.</summary>
    public double[] Below { get; }

    /// <summary>For every node: all else in its component.</summary>
    public double[] Above { get; }

    /// <summary>For every block: all in its component but the block and what hangs on its members, seen from its head.</summary>
    public double[] Rest { get; }

    /// <summary>Adds up. O(n).</summary>
    /// <param name="blocks">Of the network.</param>
    /// <param name="ofNodes">Values of nodes, n; null: 0.</param>
    /// <param name="ofMembers">Values of nodes in the blocks of which they are members, n, unread for roots; null: 0.</param>
    /// <param name="ofHeads">Values of the heads in the blocks they head, one a block; null: 0.</param>
    public static BlockTree Of(Blocks blocks, double[]? ofNodes, double[]? ofMembers, double[]? ofHeads)
    {
        int n = blocks.Network.NodeCount;
        double[] below = ofNodes is null ? new double[n] : [.. ofNodes];
        double[] whole = new double[blocks.Count]; // the block and what hangs on its members
        double[] rest = new double[blocks.Count];
        for (int b = 0; b < blocks.Count; b++)
        {
            double sum = ofHeads?[b] ?? 0;
            foreach (int v in blocks.Members(b))
                sum += below[v];
            whole[b] = sum;
            rest[b] = below[blocks.Head(b)]; // with the sister blocks before this one
            below[blocks.Head(b)] += sum;
        }
        double[] above = new double[n];
        double[] sisters = new double[n]; // blocks that a node heads, from the last
        for (int b = blocks.Count - 1; b >= 0; b--)
        {
            int head = blocks.Head(b);
            rest[b] += above[head] + sisters[head];
            sisters[head] += whole[b];
            ReadOnlySpan<int> members = blocks.Members(b);
            double others = rest[b];
            foreach (int v in members)
            {
                above[v] = others + (ofMembers?[v] ?? 0);
                others += below[v];
            }
            others = 0;
            for (int i = members.Length - 1; i >= 0; i--)
            {
                above[members[i]] += others;
                others += below[members[i]];
            }
        }
        return new BlockTree(below, above, rest);
    }
}
