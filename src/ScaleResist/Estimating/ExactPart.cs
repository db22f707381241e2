// The blocks that are treated exactly, as one grounded system. Every block is grounded at its head; the heads of all blocks are one row, so that a
// single factor serves any number of blocks and components.
// Invariant: a node but the root of its component is a member of one block, so it has at most one row; with M the inverse of the system without the
// ground's row, R(u,v) = M_uu + M_vv - 2 M_uv for two nodes of one block, M being 0 at its head.

using ScaleResist.Graphs;

namespace ScaleResist.Estimating;

/// <summary>The part of a network that a factor takes on.</summary>
internal sealed class ExactPart
{
    private readonly int[] rowOf;

    /// <summary>All blocks but those marked.</summary>
    /// <param name="blocks">Of the network.</param>
    /// <param name="probed">By block, whether it is left to the probes.</param>
    public ExactPart(Blocks blocks, bool[] probed)
    {
        Blocks = blocks;
        Probed = probed;
        rowOf = new int[blocks.Network.NodeCount];
        for (int u = 0; u < rowOf.Length; u++)
        {
            int block = blocks.BlockOf(u);
            rowOf[u] = block >= 0 && !probed[block] ? Ground++ : -1;
        }
    }

    /// <summary>The blocks of the network.</summary>
    public Blocks Blocks { get; }

    /// <summary>By block, whether it is left to the probes.</summary>
    public bool[] Probed { get; }

    /// <summary>The ground's row, the last: how many nodes are members of an exact block.</summary>
    public int Ground { get; }

    /// <summary>Whether all blocks of a component are exact.</summary>
    public bool HoldsComponent(int component)
    {
        (int first, int end) = Blocks.OfComponent(component);
        return !Probed.AsSpan(first, end - first).Contains(true);
    }

    /// <summary>The row of a member of an exact block; -1 for other nodes.</summary>
    public int RowOf(int node) => rowOf[node];

    /// <summary>The row of a node in an exact block that it lies in: the ground's if it is the head.</summary>
    public int RowIn(int block, int node) => Blocks.BlockOf(node) == block ? rowOf[node] : Ground;

    /// <summary>What hangs off the members, by row; 0 at the ground.</summary>
    public double[] ByRow(HangingWeights hanging)
    {
        double[] weights = new double[Ground + 1];
        for (int u = 0; u < rowOf.Length; u++)
        {
            if (rowOf[u] >= 0)
                weights[rowOf[u]] = hanging.OfMember(u);
        }
        return weights;
    }

    /// <summary>The Laplacian of the part, (Ground + 1) x (Ground + 1). Rows keep the order of the nodes, which is breadth-first.</summary>
    public Laplacian BuildLaplacian()
    {
        Network network = Blocks.Network;
        int rows = Ground + 1;
        long[] start = new long[rows + 1];
        for (int u = 0; u < rowOf.Length; u++)
        {
            for (long k = network.FirstLaterArc(u); k < network.RowStart[u + 1]; k++)
            {
                if (Ends(u, network.Neighbours[k], out int one, out int other))
                {
                    start[one + 1]++;
                    start[other + 1]++;
                }
            }
        }
        for (int i = 0; i < rows; i++)
            start[i + 1] += start[i];
        int[] neighbours = new int[start[rows]];
        double[]? conductances = network.Conductances is null ? null : new double[start[rows]];
        double[] strengths = new double[rows];
        long[] write = start[..rows];
        for (int u = 0; u < rowOf.Length; u++)
        {
            for (long k = network.FirstLaterArc(u); k < network.RowStart[u + 1]; k++)
            {
                if (!Ends(u, network.Neighbours[k], out int one, out int other))
                    continue;
                Put(one, other, network.Conductance(k));
                Put(other, one, network.Conductance(k));
            }
        }
        for (int i = 0; i < rows; i++)
        {
            Span<int> row = neighbours.AsSpan((int)start[i], (int)(start[i + 1] - start[i]));
            if (Ascends(row))
                continue; // all but the neighbours of the ground, as a rule
            if (conductances is null)
                row.Sort();
            else
                row.Sort(conductances.AsSpan((int)start[i], row.Length));
        }
        return new Laplacian(start, neighbours, conductances, strengths);

        void Put(int from, int to, double c)
        {
            strengths[from] += c;
            if (conductances is not null)
                conductances[write[from]] = c;
            neighbours[write[from]++] = to;
        }
    }

    private static bool Ascends(ReadOnlySpan<int> row)
    {
        for (int k = 1; k < row.Length; k++)
        {
            if (row[k - 1] > row[k])
                return false;
        }
        return true;
    }

    private bool Ends(int u, int v, out int one, out int other)
    {
        int block = Blocks.BlockOf(u, v);
        bool held = !Probed[block];
        one = held ? RowIn(block, u) : -1;
        other = held ? RowIn(block, v) : -1;
        return held;
    }
}
