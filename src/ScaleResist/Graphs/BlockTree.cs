// Sums over all blocks of a component as each of its nodes sees them.
// Invariant: nothing is subtracted, so that a small sum beside a large one keeps its digits.

namespace ScaleResist.Graphs;

/// <summary>Sums over the tree of blocks.</summary>
public static class BlockTree
{
    /// <summary>
    /// For every node u the sum over the blocks B of its component of a_B(p_B(u)), where p_B(u) is the node of B nearest to u.
    /// One pass up and one down; O(n).
    /// </summary>
    /// <param name="blocks">Of the network.</param>
    /// <param name="ofMembers">a_B of a node in the block of which it is a member, n values; unread for roots.</param>
    /// <param name="ofHeads">a_B of the head, a value a block.</param>
    public static double[] Around(Blocks blocks, double[] ofMembers, double[] ofHeads)
    {
        int n = blocks.Network.NodeCount;
        double[] below = new double[n]; // of u: over the blocks that hang below u
        double[] whole = new double[blocks.Count]; // the block and all below it, seen from its head
        double[] rest = new double[blocks.Count]; // all else, seen from its head
        for (int b = 0; b < blocks.Count; b++)
        {
            double sum = ofHeads[b];
            foreach (int v in blocks.Members(b))
                sum += below[v];
            rest[b] = below[blocks.Head(b)]; // sister blocks before this one
            whole[b] = sum;
            below[blocks.Head(b)] += sum;
        }
        double[] above = new double[n]; // over the blocks that do not hang below u
        double[] sisters = new double[n]; // over blocks that u heads, from the last
        for (int b = blocks.Count - 1; b >= 0; b--)
        {
            int head = blocks.Head(b);
            rest[b] += above[head] + sisters[head];
            sisters[head] += whole[b];
            ReadOnlySpan<int> members = blocks.Members(b);
            double others = rest[b];
            foreach (int v in members)
            {
                above[v] = ofMembers[v] + others;
                others += below[v];
            }
            others = 0;
            for (int i = members.Length - 1; i >= 0; i--)
            {
                above[members[i]] += others;
                others += below[members[i]];
            }
        }
        for (int u = 0; u < n; u++)
            above[u] += below[u];
        return above;
    }
}
