// Blocks whose part of every index is known without probes, for a run that finds some blocks exactly and probes the others.

using ScaleResist.Graphs;

namespace ScaleResist.Estimating;

/// <summary>
/// Known blocks. A block B counts by Kf_w(B) = sum over its pairs of w_B(u) w_B(v) R(u,v), w_B the weights that hang off its nodes
/// (<see cref="HangingWeights"/>), and by the diagonal m_u = sum_v s_v R(u,v) / n - Kf_s(B) / n^2 for the numbers of nodes s_B that
/// hang, n those of the component. Bridges are known without being set.
/// </summary>
/// <param name="blocks">Of the network.</param>
public sealed class ExactBlocks(Blocks blocks)
{
    private readonly double[] plain = Unknown(blocks.Count);
    private readonly double[] byStrength = Unknown(blocks.Count);
    private readonly double[] byWeight = Unknown(blocks.Count);
    private readonly double[] ofMembers = Unknown(blocks.Network.NodeCount);
    private readonly double[] ofHeads = Unknown(blocks.Count);

    /// <summary>Sets a block.</summary>
    /// <param name="block">Which.</param>
    /// <param name="index">Kf_w(B) for w = 1, for w = strengths and for the node weights (0 without).</param>
    /// <param name="members">m_u of the members, in their order.</param>
    /// <param name="head">m_u of the head.</param>
    public void Set(int block, (double Plain, double ByStrength, double ByWeight) index, ReadOnlySpan<double> members, double head)
    {
        (plain[block], byStrength[block], byWeight[block]) = index;
        ofHeads[block] = head;
        ReadOnlySpan<int> nodes = blocks.Members(block);
        for (int i = 0; i < nodes.Length; i++)
            ofMembers[nodes[i]] = members[i];
    }

    /// <summary>Whether a block has been set.</summary>
    public bool Has(int block) => !double.IsNaN(plain[block]);

    internal (double Plain, double ByStrength, double ByWeight) Index(int block) => (plain[block], byStrength[block], byWeight[block]);

    internal double OfMember(int node) => ofMembers[node];

    internal double OfHead(int block) => ofHeads[block];

    private static double[] Unknown(int count)
    {
        double[] values = new double[count];
        Array.Fill(values, double.NaN);
        return values;
    }
}
