// A few of the smoothest directions of large blocks, taken out of the probes and added exactly.
// On a block with Laplacian L, for any X (n x 16) that is independent of the probes, with G = X'LX and a = G^-1 X'b:
//     y = z - X a,     Cov(y) = L+ - X G^-1 X',     Cov(y_u, b_u) = 1 - 1/n - x_u G^-1 (LX)_u'     (x_u centred)
// so that E z_u^2 = x_u G^-1 x_u' + E y_u^2, and the noise of span X is gone. Any X is right as long as G belongs to it; SmoothDirections finds a
// good one, 0 at a block's head (y is wanted but for a constant).

using ScaleResist.Graphs;
using ScaleResist.Kernels;
using ScaleResist.Solving;

namespace ScaleResist.Estimating;

/// <summary>What a deflation takes from one index: the shares Cov(y_u, b_u) that it moves, and its exact part.</summary>
internal sealed class DeflatedShares
{
    /// <summary>Empty shares, all of them 0.</summary>
    /// <param name="hanging">The index's weights.</param>
    /// <param name="nodes">n.</param>
    /// <param name="blocks">Of the network.</param>
    public DeflatedShares(HangingWeights hanging, int nodes, int blocks)
    {
        Hanging = hanging;
        OfMembers = new float[nodes];
        OfHeads = new float[blocks];
    }

    /// <summary>The index's weights.</summary>
    public HangingWeights Hanging { get; }

    /// <summary>(x_u - centre) G^-1 (LX)_u' by member.</summary>
    public float[] OfMembers { get; }

    /// <summary>The same for the head of each block.</summary>
    public float[] OfHeads { get; }

    /// <summary>Sum over a deflated block of w (x_u - centre) G^-1 (x_u - centre)', by block.</summary>
    public Dictionary<int, double> Parts { get; } = [];
}

/// <summary>Sixteen directions X in each of some blocks.</summary>
internal sealed unsafe class Deflation
{
    /// <summary>Directions a block.</summary>
    public const int Columns = SmoothDirections.Columns;

    /// <summary>Entries of a matrix of directions.</summary>
    public const int Square = SmoothDirections.Square;

    /// <summary>The least block that is deflated.</summary>
    public const int LeastNodes = 64;

    private readonly Blocks blocks;
    private readonly BlockRows rows;
    private readonly int[] chosen;
    private readonly Dictionary<int, int> slots = [];
    private readonly SmoothDirections directions;
    private readonly double[] parts; // x_u G^-1 x_u' by member, centred for w = 1
    private readonly double[] headParts; // by slot

    /// <summary>No directions yet.</summary>
    /// <param name="blocks">Of the network.</param>
    /// <param name="rows">Strengths and right-hand sides within blocks.</param>
    /// <param name="weights">What hangs off the nodes, 1 each.</param>
    /// <param name="chosen">The blocks to deflate, ascending.</param>
    public Deflation(Blocks blocks, BlockRows rows, HangingWeights weights, int[] chosen)
    {
        this.blocks = blocks;
        this.rows = rows;
        this.chosen = chosen;
        for (int slot = 0; slot < chosen.Length; slot++)
            slots[chosen[slot]] = slot;
        directions = new SmoothDirections(blocks, rows, weights, chosen);
        parts = new double[blocks.Network.NodeCount];
        headParts = new double[chosen.Length];
    }

    /// <summary>Panels solved so far.</summary>
    public int Steps => directions.Steps;

    /// <summary>One solve of 16 columns; <see cref="Fill"/> comes after.</summary>
    public void Step(LaplacianSolver solver, SolverWorkspace<float> workspace, ulong seed, int threads, CancellationToken cancel) =>
        directions.Step(solver, workspace, seed, threads, cancel);

    /// <summary>Whether a block is deflated.</summary>
    public bool Has(int block) => slots.ContainsKey(block);

    /// <summary>x_u G^-1 x_u' of a member, centred for w = 1; 0 off the deflated blocks.</summary>
    public double OfMember(int node) => parts[node];

    /// <summary>The same for a block's head.</summary>
    public double OfHead(int block) => slots.TryGetValue(block, out int slot) ? headParts[slot] : 0;

    /// <summary>Fills the shares of each index; the first is that of w = 1.</summary>
    public void Fill(IReadOnlyList<DeflatedShares> indices, int threads)
    {
        ParallelOptions options = new() { MaxDegreeOfParallelism = threads };
        double[][][] centres = [.. indices.Select(index => directions.Centres(index.Hanging, options))];
        IReadOnlyList<BlockPiece> pieces = directions.Pieces;
        double[][] sums = new double[pieces.Count][];
        Parallel.For(0, pieces.Count, options, i =>
        {
            BlockPiece piece = pieces[i];
            int block = chosen[piece.Slot];
            List<(int To, double C)> links = [];
            double* row = stackalloc double[Columns];
            sums[i] = new double[indices.Count];
            foreach (int u in blocks.Members(block)[piece.From..piece.To])
            {
                directions.MultiplyRow(block, u, links, row);
                for (int k = 0; k < indices.Count; k++)
                {
                    (double share, double part) = Split(piece.Slot, directions.Row(u), centres[k][piece.Slot], row);
                    indices[k].OfMembers[u] = (float)share;
                    sums[i][k] += indices[k].Hanging.OfMember(u) * part;
                    if (k == 0)
                        parts[u] = part;
                }
            }
        });
        double[][] ofBlocks = [.. chosen.Select(_ => new double[indices.Count])];
        for (int i = 0; i < pieces.Count; i++)
        {
            for (int k = 0; k < indices.Count; k++)
                ofBlocks[pieces[i].Slot][k] += sums[i][k];
        }
        double* headRow = stackalloc double[Columns];
        float* zero = stackalloc float[Columns];
        new Span<float>(zero, Columns).Clear();
        for (int slot = 0; slot < chosen.Length; slot++)
        {
            int block = chosen[slot];
            directions.MultiplyRow(block, blocks.Head(block), [], headRow);
            for (int k = 0; k < indices.Count; k++)
            {
                (double share, double part) = Split(slot, zero, centres[k][slot], headRow);
                indices[k].OfHeads[block] = (float)share;
                indices[k].Parts[block] = ofBlocks[slot][k] + (indices[k].Hanging.OfHead(block) * part);
                if (k == 0)
                    headParts[slot] = part;
            }
        }
    }

    /// <summary>sums += X'b over some members of a block, 16 x 16.</summary>
    /// <param name="panel">Drawn and solved.</param>
    /// <param name="block">A deflated block.</param>
    /// <param name="from">First of its members.</param>
    /// <param name="to">End.</param>
    /// <param name="sums">Added to.</param>
    public void AddProducts(ProbePanel panel, int block, int from, int to, double[] sums)
    {
        float* own = stackalloc float[Columns];
        double* row = stackalloc double[Columns];
        List<(int To, double C)> links = [];
        fixed (double* total = sums)
        {
            foreach (int u in blocks.Members(block)[from..to])
            {
                float* b = Row(panel.B, u);
                if (blocks.IsCutNode(u))
                {
                    rows.Gather(panel, block, u, own, links);
                    b = own;
                }
                DeflationKernels.Widen(b, row);
                DeflationKernels.AddProducts(directions.Row(u), row, total);
            }
        }
    }

    /// <summary>a = G^-1 X'b, 16 x 16 with a column a probe.</summary>
    public float[] Coefficients(int block, double[] products)
    {
        double[] inverse = directions.Inverse(slots[block]);
        float[] a = new float[Square];
        for (int i = 0; i < Columns; i++)
        {
            for (int j = 0; j < Columns; j++)
            {
                double sum = 0;
                for (int k = 0; k < Columns; k++)
                    sum += inverse[(i * Columns) + k] * products[(k * Columns) + j];
                a[(i * Columns) + j] = (float)sum;
            }
        }
        return a;
    }

    /// <summary>Row of y = z - X a at a member.</summary>
    public void Reduce(ProbePanel panel, int node, float[] coefficients, float* row)
    {
        fixed (float* a = coefficients)
            DeflationKernels.Reduce(Row(panel.Z, node), directions.Row(node), a, row);
    }

    // (x_u - centre) G^-1 (LX)_u' and (x_u - centre) G^-1 (x_u - centre)'.
    private (double Share, double Part) Split(int slot, float* own, double[] centre, double* product)
    {
        double* offset = stackalloc double[Columns];
        double* solved = stackalloc double[Columns];
        for (int j = 0; j < Columns; j++)
            offset[j] = own[j] - centre[j];
        fixed (double* inverse = directions.Inverse(slot))
            DeflationKernels.Combine(offset, inverse, solved);
        double share = 0, part = 0;
        for (int j = 0; j < Columns; j++)
        {
            share += solved[j] * product[j];
            part += solved[j] * offset[j];
        }
        return (share, part);
    }

    private static float* Row(Panel<float> panel, int node) => panel.Pointer + ((long)node * Columns);
}
