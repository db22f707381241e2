// Strengths d and right-hand sides b within single blocks. Off the cut nodes they are the network's own.
// Invariant: over the blocks of a node these strengths and rows add up to the network's.

using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Estimating;

/// <summary>What a cut node has of each of its blocks: d_u^B = sum of c, b_u^B = sum of +-sqrt(c) over its links in B.</summary>
internal sealed class BlockRows
{
    private const int LookUpCost = 8; // arcs read in a row in the time of a search for one

    private readonly Blocks blocks;
    private readonly double[] ofMembers;
    private readonly double[] ofHeads;

    public BlockRows(Blocks blocks)
    {
        this.blocks = blocks;
        Network network = blocks.Network;
        ofMembers = blocks.CutNodes == 0 ? network.Strengths : [.. network.Strengths];
        ofHeads = new double[blocks.Count];
        List<(int To, double C)> links = [];
        for (int b = 0; b < ofHeads.Length; b++)
        {
            int head = blocks.Head(b);
            ofHeads[b] = blocks.IsCutNode(head) ? Strength(b, head) : network.Strengths[head];
            foreach (int v in blocks.Members(b))
            {
                if (blocks.IsCutNode(v))
                    ofMembers[v] = Strength(b, v);
            }
        }

        double Strength(int block, int node)
        {
            Find(block, node, links);
            double sum = 0;
            foreach ((_, double c) in links)
                sum += c;
            return sum;
        }
    }

    /// <summary>d_u^B of a node in the block of which it is a member.</summary>
    public double OfMember(int node) => ofMembers[node];

    /// <summary>d_u^B of a block's head.</summary>
    public double OfHead(int block) => ofHeads[block];

    /// <summary>Puts b_u^B of a cut node into a row of 16.</summary>
    public unsafe void Gather(ProbePanel panel, int block, int node, float* row, List<(int To, double C)> scratch)
    {
        Find(block, node, scratch);
        new Span<float>(row, ProbePanel.Width).Clear();
        foreach ((int to, double c) in scratch)
            ProbeKernels.AddLink(row, (float)Math.Sqrt(c), panel.Signs(node, to), panel.Lanes);
    }

    /// <summary>The links of a node in one of its blocks. A hub may head many small blocks: those look it up from their side.</summary>
    public void Find(int block, int node, List<(int To, double C)> links)
    {
        links.Clear();
        Network network = blocks.Network;
        if (blocks.BlockOf(node) != block && (long)blocks.Members(block).Length * LookUpCost < network.Degree(node))
        {
            foreach (int v in blocks.Members(block))
            {
                long arc = network.FindArc(v, node);
                if (arc >= 0)
                    links.Add((v, network.Conductance(arc)));
            }
            return;
        }
        for (long k = network.RowStart[node]; k < network.RowStart[node + 1]; k++)
        {
            if (blocks.BlockOf(node, network.Neighbours[k]) == block)
                links.Add((network.Neighbours[k], network.Conductance(k)));
        }
    }
}
