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
    private readonly IReadOnlyList<Component> components;

    private HangingWeights(double[] ofMembers, double[] ofHeads, IReadOnlyList<Component> components)
    {
        this.ofMembers = ofMembers;
        this.ofHeads = ofHeads;
        this.components = components;
    }

    /// <summary>One pass up the tree of blocks and one down: O(n), 8 bytes a node and a block.</summary>
    /// <param name="blocks">Of the network.</param>
    /// <param name="weights">n values, finite and not negative; null: 1 each.</param>
    public static HangingWeights Of(Blocks blocks, double[]? weights)
    {
        if (weights is null)
        {
            weights = new double[blocks.Network.NodeCount];
            Array.Fill(weights, 1);
        }
        BlockTree sums = BlockTree.Of(blocks, weights, null, null);
        return new HangingWeights(sums.Below, sums.Rest, blocks.Network.Components);
    }

    /// <summary>w_B(u) of a node in the block of which it is a member; the total for the root of a component.</summary>
    public double OfMember(int node) => ofMembers[node];

    /// <summary>w_B of a block's head.</summary>
    public double OfHead(int block) => ofHeads[block];

    /// <summary>W: the sum of w over a component.</summary>
    public double Total(int component) => ofMembers[components[component].Start]; // the root has all
}
