// What a factor of the exact part says: resistances of its links, and what each of its blocks adds to indices and diagonals.
//
// A block B is grounded at its head, M is the inverse of its grounded Laplacian, w the weights that hang off its nodes, W their sum:
//     R(u,v) = M_uu + M_vv - 2 M_uv
//     Kf_w(B) = sum of w_u w_v R(u,v) over pairs = W sum w_u M_uu - w'M w
//     sum_v w_v R(u,v) = W M_uu + sum w_v M_vv - 2 (M w)_u
//     sum over pairs of w_u w_v R rises by c [W x'diag(w)x - (w'x)^2] / (1 - cR), x = M (e_u - e_v), where link (u,v) is lost (Sherman & Morrison)
//     log of the number of spanning trees = log det (Kirchhoff 1847), a component's the sum over its blocks
// The entries of M that this needs lie on the pattern of the factor (Takahashi, Fagan & Chin 1973), those of M diag(w) M are minus the derivatives of
// (L + t diag(w))^-1 at t = 0 on it; M w comes from one panel solve for all blocks. w = 1: blocks stand for what hangs off them, so the rise within
// the link's block is that of the whole component's Kirchhoff index.

using ScaleResist.Graphs;
using ScaleResist.Kernels;
using ScaleResist.Solving;

namespace ScaleResist.Estimating;

/// <summary>Exact results on the blocks of an <see cref="ExactPart"/>.</summary>
internal sealed class ExactResults : IDisposable
{
    private readonly ExactPart part;
    private readonly Network network;
    private readonly CholeskyFactor factor;
    private readonly SelectedInverse inverse;
    private readonly HangingWeights hangingNodes;
    private readonly double[]? pulls; // M w by row, w = 1

    private ExactResults(ExactPart part, CholeskyFactor factor, SelectedInverse inverse, HangingWeights hangingNodes, bool losses)
    {
        this.hangingNodes = hangingNodes;
        pulls = losses ? new double[part.Ground + 1] : null;
        this.part = part;
        this.factor = factor;
        this.inverse = inverse;
        network = part.Blocks.Network;
        ExactBlocks = new ExactBlocks(part.Blocks);
        LogSpanningTrees = new double[network.Components.Count];
    }

    /// <summary>The exact blocks.</summary>
    public ExactPart Part => part;

    /// <summary>Their factor.</summary>
    public CholeskyFactor Factor => factor;

    /// <summary>Indices and diagonals of the blocks.</summary>
    public ExactBlocks ExactBlocks { get; }

    /// <summary>By component, the log of the (weighted) number of spanning trees; NaN where a block is not exact.</summary>
    public double[] LogSpanningTrees { get; }

    /// <summary>Factorises, inverts and solves.</summary>
    /// <param name="part">The exact blocks.</param>
    /// <param name="symbolic">The analysis of the part's Laplacian.</param>
    /// <param name="laplacian">The part's Laplacian.</param>
    /// <param name="weights">Node weights of the network, or null.</param>
    /// <param name="losses">Whether the loss of links is wanted.</param>
    /// <param name="threads">Threads; the results do not depend on them.</param>
    /// <param name="cancel">Ends the work.</param>
    public static ExactResults Of(
        ExactPart part, SymbolicCholesky symbolic, Laplacian laplacian, double[]? weights, bool losses, int threads,
        CancellationToken cancel)
    {
        CholeskyFactor factor = CholeskyFactor.Of(symbolic, laplacian, threads, cancel);
        HangingWeights hanging = HangingWeights.Of(part.Blocks, null);
        SelectedInverse inverse = losses ? factor.Invert(part.ByRow(hanging), threads, cancel) : factor.Invert(threads, cancel);
        ExactResults results = new(part, factor, inverse, hanging, losses);
        results.AddBlocks(weights);
        results.AddLogarithms();
        return results;
    }

    /// <summary>Whether the loss of links was computed.</summary>
    public bool HasLosses => pulls is not null;

    /// <summary>Whether a link is in the exact part.</summary>
    public bool Holds(int u, int v) => !part.Probed[part.Blocks.BlockOf(u, v)];

    /// <summary>R of a link of the part.</summary>
    public double Resistance(int u, int v)
    {
        int block = part.Blocks.BlockOf(u, v);
        int one = part.RowIn(block, u), other = part.RowIn(block, v);
        double sum = inverse.Diagonal(one) + inverse.Diagonal(other);
        return one == part.Ground || other == part.Ground ? sum : sum - (2 * inverse.Between(one, other));
    }

    /// <summary>
    /// How much the Kirchhoff index of its component rises when a link of the part is lost: n c |L+ (e_u - e_v)|^2 / (1 - p). NaN where the link is a
    /// bridge but for what rounding hides: 1 - p at most 1e-10.
    /// </summary>
    /// <param name="u">One end.</param>
    /// <param name="v">The other.</param>
    /// <param name="conductance">c.</param>
    /// <param name="resistance">R.</param>
    public double LossImpact(int u, int v, double conductance, double resistance)
    {
        const double Rounding = 1e-10;
        int block = part.Blocks.BlockOf(u, v);
        int one = part.RowIn(block, u), other = part.RowIn(block, v);
        double rest = 1 - (conductance * resistance), pull = pulls![one] - pulls[other];
        double spread = (hangingNodes.Total(part.Blocks.ComponentOf(block)) * inverse.Slope(one, other)) - (pull * pull);
        return rest > Rounding ? conductance * Math.Max(0, spread) / rest : double.NaN;
    }

    /// <summary>R between a member of an exact block and the block's head.</summary>
    public double ToHead(int member) => inverse.Diagonal(part.RowOf(member));

    /// <inheritdoc/>
    public void Dispose() => factor.Dispose();

    private void AddBlocks(double[]? weights)
    {
        Blocks blocks = part.Blocks;
        HangingWeights[] hanging =
        [
            hangingNodes, HangingWeights.Of(blocks, network.Strengths),
            .. weights is null ? Array.Empty<HangingWeights>() : [HangingWeights.Of(blocks, weights)],
        ];
        using Panel<double> z = new(part.Ground + 1);
        for (int u = 0; u < network.NodeCount; u++)
        {
            for (int j = 0; j < hanging.Length && part.RowOf(u) >= 0; j++)
                z.Row(part.RowOf(u))[j] = hanging[j].OfMember(u);
        }
        using (SubstitutionWorkspace workspace = factor.NewWorkspace(Panel<double>.Width))
            factor.Solve(z, z, workspace);
        for (int row = 0; row < pulls?.Length; row++)
            pulls[row] = z.Row(row)[0];
        double[] index = new double[3], spread = new double[3];
        List<double> diagonal = [];
        for (int c = 0; c < network.Components.Count; c++)
        {
            (int first, int end) = blocks.OfComponent(c);
            for (int b = first; b < end; b++)
            {
                if (part.Probed[b] || blocks.IsBridge(b))
                    continue;
                Array.Clear(index);
                Array.Clear(spread);
                foreach (int v in blocks.Members(b))
                {
                    int row = part.RowOf(v);
                    for (int j = 0; j < hanging.Length; j++)
                    {
                        double w = hanging[j].OfMember(v);
                        spread[j] += w * inverse.Diagonal(row);
                        index[j] -= w * z.Row(row)[j];
                    }
                }
                for (int j = 0; j < hanging.Length; j++)
                    index[j] += hanging[j].Total(c) * spread[j];
                double n = network.Components[c].Nodes, mean = index[0] / (n * n);
                diagonal.Clear();
                foreach (int v in blocks.Members(b))
                    diagonal.Add((((n * inverse.Diagonal(part.RowOf(v))) + spread[0] - (2 * z.Row(part.RowOf(v))[0])) / n) - mean);
                ExactBlocks.Set(b, (index[0], index[1], index[2]), diagonal.ToArray(), (spread[0] / n) - mean);
            }
        }
    }

    // A front lies within one block: blocks meet at the ground alone.
    private void AddLogarithms()
    {
        int[] componentOf = new int[part.Ground];
        for (int c = 0; c < network.Components.Count; c++)
        {
            for (int u = network.Components[c].Start; u < network.Components[c].End; u++)
            {
                if (part.RowOf(u) >= 0)
                    componentOf[part.RowOf(u)] = c;
            }
        }
        SymbolicCholesky symbolic = factor.Symbolic;
        for (int f = 0; f < symbolic.Count; f++)
            LogSpanningTrees[componentOf[symbolic.Nodes[symbolic.First[f]]]] += factor.LogPivots[f];
        for (int c = 0; c < network.Components.Count; c++)
        {
            if (!part.HoldsComponent(c))
                LogSpanningTrees[c] = double.NaN;
        }
    }
}
