// What hangs off the nodes of each block: the weight that a node carries once the block's own links are taken away.
// Invariant: over the nodes of any block, head included, these weights add up to the component's total.

namespace ScaleResist.Graphs;

/// <summary>
/// For node weights w, w_B(u) = sum of w over all nodes that stay joined to u when the links of block B are lost, u included.
/// With them sums over pairs split over blocks: sum of w_u w_v R(u,v) over a component = sum over its blocks B of the sum of
/// w_B(u) w_B(v) R(u,v) over pairs of B, for R adds up along the blocks between two nodes.
/// </summary>
public sealed class HangingWeights
{
    private readonly double[] ofMembers;
    private readonly double[] ofHeads;
    private readonly double[] totals;

    private HangingWeights(double[] ofMembers, double[] ofHeads, double[] totals)
    {
        this.ofMembers = ofMembers;
        this.ofHeads = ofHeads;
        this.totals = totals;
    }

    /// <summary>One pass up the blocks: O(n), 8 bytes a node and a block.</summary>
    /// <param name="blocks">Of the network.</param>
    /// <param name="weights">n values, finite and not negative; null: 1 each.</param>
    public static HangingWeights Of(Blocks blocks, double[]? weights)
    {
        Network network = blocks.Network;
        double[] hanging = new double[network.NodeCount];
        if (weights is null)
            Array.Fill(hanging, 1);
        else
            weights.CopyTo(hanging, 0);
        double[] heads = new double[blocks.Count], totals = new double[network.Components.Count];
        for (int b = 0; b < blocks.Count; b++)
        {
            double below = 0;
            foreach (int v in blocks.Members(b))
                below += hanging[v];
            heads[b] = below;
            hanging[blocks.Head(b)] += below;
        }
        for (int c = 0; c < totals.Length; c++)
        {
            (int first, int end) = blocks.OfComponent(c);
            totals[c] = hanging[network.Components[c].Start]; // the root
            for (int b = first; b < end; b++)
                heads[b] = Math.Max(weights is null ? 1 : weights[blocks.Head(b)], totals[c] - heads[b]);
        }
        return new HangingWeights(hanging, heads, totals);
    }

    /// <summary>w_B(u) of a node in the block of which it is a member; the total for the root of a component.</summary>
    public double OfMember(int node) => ofMembers[node];

    /// <summary>w_B of a block's head.</summary>
    public double OfHead(int block) => ofHeads[block];

    /// <summary>W: the sum of w over a component.</summary>
    public double Total(int component) => totals[component];
}
