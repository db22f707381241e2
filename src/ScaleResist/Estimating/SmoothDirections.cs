// Sixteen smooth directions in each of some blocks: X = L+ S g with random signs g, then X = L+ W X again (Halko, Martinsson & Tropp 2011), W the
// weights that hang off the nodes, S their roots: the part of a block in the Kirchhoff index is W-weighted, and so are the modes that dominate it.
// Invariant: x is 0 at a block's head, so each node has one row of X, that of the block it is a member of; G = X'LX is summed in doubles from
// the rounded X; sums run over fixed pieces in order, so results do not depend on threads.

using MathNet.Numerics.LinearAlgebra;
using ScaleResist.Graphs;
using ScaleResist.Kernels;
using ScaleResist.Solving;

namespace ScaleResist.Estimating;

/// <summary>A piece of the members of a block that is deflated.</summary>
internal readonly record struct BlockPiece(int Slot, int From, int To);

/// <summary>X, n x 16, and G^-1 by block. A block's slot is its place among those chosen.</summary>
internal sealed unsafe class SmoothDirections
{
    /// <summary>Directions a block.</summary>
    public const int Columns = ProbePanel.Width;

    /// <summary>Entries of a matrix of directions.</summary>
    public const int Square = Columns * Columns;

    private const int MembersPerPiece = 1 << 12;
    private const double Tolerance = 0.02; // of the solves for X: a rougher X is as unbiased, a finer one hardly better
    private const uint Stream = 1; // of Philox: the probes have 0

    private readonly Blocks blocks;
    private readonly BlockRows rows;
    private readonly HangingWeights weights;
    private readonly int[] chosen;
    private readonly List<BlockPiece> pieces = [];
    private readonly double[][] inverses; // G^-1 by slot
    private readonly Panel<float> x;

    /// <summary>No directions yet.</summary>
    /// <param name="blocks">Of the network.</param>
    /// <param name="rows">Links within blocks.</param>
    /// <param name="weights">What hangs off the nodes, 1 each.</param>
    /// <param name="chosen">The blocks, ascending.</param>
    public SmoothDirections(Blocks blocks, BlockRows rows, HangingWeights weights, int[] chosen)
    {
        this.blocks = blocks;
        this.rows = rows;
        this.weights = weights;
        this.chosen = chosen;
        for (int slot = 0; slot < chosen.Length; slot++)
        {
            int members = blocks.NodesOf(chosen[slot]) - 1;
            for (int from = 0; from < members; from += MembersPerPiece)
                pieces.Add(new BlockPiece(slot, from, Math.Min(members, from + MembersPerPiece)));
        }
        inverses = new double[chosen.Length][];
        x = new Panel<float>(blocks.Network.NodeCount);
    }

    /// <summary>Panels solved so far.</summary>
    public int Steps { get; private set; }

    /// <summary>Pieces of the blocks, block by block.</summary>
    public IReadOnlyList<BlockPiece> Pieces => pieces;

    /// <summary>G^-1 of a slot, 16 x 16.</summary>
    public double[] Inverse(int slot) => inverses[slot];

    /// <summary>x of a member.</summary>
    public float* Row(int member) => Row(x, member);

    /// <summary>One solve of 16 columns: the first from random signs, the next from W X.</summary>
    public void Step(LaplacianSolver solver, SolverWorkspace<float> workspace, ulong seed, int threads, CancellationToken cancel)
    {
        ParallelOptions options = new() { MaxDegreeOfParallelism = threads };
        using Panel<float> b = new(blocks.Network.NodeCount);
        SetRightHandSides(b, seed, options);
        solver.Solve(b, x, Columns, Tolerance, workspace, new SolveStatistics(), cancel);
        Normalise(options);
        Steps++;
    }

    // b = P'S g, or P'W X, for P = I - 1 w'/W: what the weights leave of a block sums to zero.
    private void SetRightHandSides(Panel<float> b, ulong seed, ParallelOptions options)
    {
        bool first = Steps == 0;
        double[][] centres = first ? SignSums(seed, options) : Centres(weights, options);
        double[][] sums = new double[pieces.Count][];
        Parallel.For(0, pieces.Count, options, i =>
        {
            BlockPiece piece = pieces[i];
            double[] sum = sums[i] = new double[Columns];
            foreach (int u in blocks.Members(chosen[piece.Slot])[piece.From..piece.To])
            {
                double w = weights.OfMember(u), root = Math.Sqrt(w);
                uint signs = first ? Signs(u, seed) : 0;
                float* from = Row(x, u), to = Row(b, u);
                for (int j = 0; j < Columns; j++)
                {
                    double value = first ? ((signs >> j & 1) != 0 ? -root : root) : w * from[j];
                    to[j] = (float)(value - (w * centres[piece.Slot][j]));
                    sum[j] += to[j];
                }
            }
        });
        // A head may be a member of another of the blocks, and head several.
        for (int i = 0; i < pieces.Count; i++)
        {
            float* head = Row(b, blocks.Head(chosen[pieces[i].Slot]));
            for (int j = 0; j < Columns; j++)
                head[j] -= (float)sums[i][j];
        }
    }

    private double[][] SignSums(ulong seed, ParallelOptions options)
    {
        double[][] centres = Sums(Columns, options, (block, members, sum) =>
        {
            foreach (int u in members)
            {
                double root = Math.Sqrt(weights.OfMember(u));
                uint signs = Signs(u, seed);
                for (int j = 0; j < Columns; j++)
                    sum[j] += (signs >> j & 1) != 0 ? -root : root;
            }
        });
        for (int slot = 0; slot < chosen.Length; slot++)
        {
            int head = blocks.Head(chosen[slot]);
            double root = Math.Sqrt(weights.OfHead(chosen[slot])), total = weights.Total(blocks.ComponentOf(chosen[slot]));
            uint signs = Signs(head, seed);
            for (int j = 0; j < Columns; j++)
                centres[slot][j] = (centres[slot][j] + ((signs >> j & 1) != 0 ? -root : root)) / total;
        }
        return centres;
    }

    private uint Signs(int node, ulong seed)
    {
        ulong key = blocks.Network.NodeKeys[node];
        return (uint)(Philox.Block((uint)key, (uint)(key >> 32), 0, Stream, seed).Low & 0xFFFF);
    }

    /// <summary>Sum of w x / W by slot; x is 0 at the head.</summary>
    public double[][] Centres(HangingWeights hanging, ParallelOptions options)
    {
        double[][] centres = Sums(Columns, options, (block, members, sum) =>
        {
            foreach (int u in members)
            {
                double w = hanging.OfMember(u);
                float* row = Row(x, u);
                for (int j = 0; j < Columns; j++)
                    sum[j] += w * row[j];
            }
        });
        for (int slot = 0; slot < chosen.Length; slot++)
        {
            double total = hanging.Total(blocks.ComponentOf(chosen[slot]));
            for (int j = 0; j < Columns; j++)
                centres[slot][j] = total > 0 ? centres[slot][j] / total : 0;
        }
        return centres;
    }

    // Heads to 0, then columns that are orthonormal in L but for rounding, then G of what came out.
    private void Normalise(ParallelOptions options)
    {
        float[][] origins = [.. chosen.Select(block => x.Row(blocks.Head(block)).ToArray())];
        Parallel.ForEach(pieces, options, piece =>
        {
            foreach (int u in blocks.Members(chosen[piece.Slot])[piece.From..piece.To])
            {
                float* row = Row(x, u);
                for (int j = 0; j < Columns; j++)
                    row[j] -= origins[piece.Slot][j];
            }
        });
        double[][] factors = [.. Gram(options).Select(Orthonormal)];
        Parallel.ForEach(pieces, options, piece =>
        {
            double* row = stackalloc double[Columns];
            fixed (double* factor = factors[piece.Slot])
            {
                foreach (int u in blocks.Members(chosen[piece.Slot])[piece.From..piece.To])
                {
                    float* to = Row(x, u);
                    DeflationKernels.Widen(to, row);
                    DeflationKernels.Combine(row, factor, row);
                    for (int j = 0; j < Columns; j++)
                        to[j] = (float)row[j];
                }
            }
        });
        double[][] gram = Gram(options);
        for (int slot = 0; slot < chosen.Length; slot++)
        {
            for (int j = 0; j < Columns; j++)
            {
                if (gram[slot][(j * Columns) + j] == 0)
                    gram[slot][(j * Columns) + j] = 1; // a column of zeros: nothing to take out
            }
            Matrix<double> inverse = Matrix<double>.Build.Dense(Columns, Columns, gram[slot]).Inverse();
            inverses[slot] = ((inverse + inverse.Transpose()) / 2).ToColumnMajorArray();
        }
    }

    // T with T'GT = I; columns are 0 for directions that G does not hold.
    private static double[] Orthonormal(double[] gram)
    {
        MathNet.Numerics.LinearAlgebra.Factorization.Evd<double> modes =
            Matrix<double>.Build.Dense(Columns, Columns, gram).Evd(Symmetricity.Symmetric);
        double[] factor = new double[Square];
        double least = 1e-13 * modes.EigenValues[Columns - 1].Real;
        for (int j = 0; j < Columns; j++)
        {
            double value = modes.EigenValues[j].Real;
            for (int i = 0; i < Columns; i++)
                factor[(i * Columns) + j] = value > least ? modes.EigenVectors[i, j] / Math.Sqrt(value) : 0;
        }
        return factor;
    }

    // G = X'LX by slot.
    private double[][] Gram(ParallelOptions options)
    {
        double[][] gram = Sums(Square, options, (block, members, sum) =>
        {
            List<(int To, double C)> links = [];
            double* row = stackalloc double[Columns];
            fixed (double* to = sum)
            {
                foreach (int u in members)
                {
                    MultiplyRow(block, u, links, row);
                    DeflationKernels.AddProducts(Row(x, u), row, to);
                }
            }
        });
        foreach (double[] matrix in gram)
        {
            for (int i = 0; i < Columns; i++)
            {
                for (int j = 0; j < i; j++)
                {
                    double mean = (matrix[(i * Columns) + j] + matrix[(j * Columns) + i]) / 2;
                    matrix[(i * Columns) + j] = matrix[(j * Columns) + i] = mean;
                }
            }
        }
        return gram;
    }

    /// <summary>(LX)_u within a block.</summary>
    public void MultiplyRow(int block, int node, List<(int To, double C)> links, double* row)
    {
        Network network = blocks.Network;
        float* zero = stackalloc float[Columns];
        new Span<float>(zero, Columns).Clear();
        new Span<double>(row, Columns).Clear();
        int head = blocks.Head(block);
        float* own = node == head ? zero : Row(x, node);
        if (blocks.IsCutNode(node))
        {
            rows.Find(block, node, links);
            foreach ((int v, double c) in links)
                DeflationKernels.AddDifference(own, v == head ? zero : Row(x, v), c, row);
            return;
        }
        for (long k = network.RowStart[node]; k < network.RowStart[node + 1]; k++)
        {
            int v = network.Neighbours[k];
            DeflationKernels.AddDifference(own, v == head ? zero : Row(x, v), network.Conductance(k), row);
        }
    }

    // Sums over the members of each block, piece by piece.
    private double[][] Sums(int length, ParallelOptions options, PieceSum add)
    {
        double[][] ofPieces = new double[pieces.Count][];
        Parallel.For(0, pieces.Count, options, i =>
        {
            int block = chosen[pieces[i].Slot];
            ofPieces[i] = new double[length];
            add(block, blocks.Members(block)[pieces[i].From..pieces[i].To], ofPieces[i]);
        });
        double[][] sums = [.. chosen.Select(_ => new double[length])];
        for (int i = 0; i < pieces.Count; i++)
        {
            double[] total = sums[pieces[i].Slot];
            for (int j = 0; j < length; j++)
                total[j] += ofPieces[i][j];
        }
        return sums;
    }

    private static float* Row(Panel<float> panel, int node) => panel.Pointer + ((long)node * Columns);

    private delegate void PieceSum(int block, ReadOnlySpan<int> members, double[] sum);
}
