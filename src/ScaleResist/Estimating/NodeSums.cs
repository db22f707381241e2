// What all probes say of nodes and of whole components, block by block: one independent sample of each index a probe.
//
// Resistances add up along the blocks between two nodes. With w_B(u) the weight that hangs off u when the links of block B are gone
// (HangingWeights) and W the component's total,
//     sum of w_u w_v R(u,v) over pairs of a component = sum over its blocks of Kf_w(B),   Kf_w(B) = the same sum over pairs of B, weights w_B.
// A unit current between the ends of a link never leaves the link's block, so z on B is L_B+ b_B but for a constant. Take it as
// y = z - sum w_B z / W: then Cov(y) = P L_B+ P', Cov(y, b_B) = P = I - 1 w_B'/W, and with d, b those of the block, k_u = 1 - w_B(u)/W,
//     x_u = y_u - k_u b_u / d_u:     E y_u^2 = k_u^2 / d_u + E x_u^2,     Kf_w(B) = W sum w_B(u) E y_u^2.
// On a bridge x = 0: its part s (W - s) / c needs no probe, and the noise of weak bridges stays out of every sample.
// With w = 1 the diagonal of L+ is l_u = sum over blocks of E y^2 at the node of the block nearest to u, for n l_u + Kf/n is the sum
// of all resistances from u.
// Where a few smooth modes carry most of the spread, they are taken out of large blocks and added exactly (Deflation): y gives way to
// y - X a, k_u to k_u less its shift, and the part of X is known.
// A solver's error e has energy delta^2 at most (delta the mode error), so e_u^2 <= delta^2 l_u within the block and sum w_B e^2 <= delta^2 Kf_w(B) / W;
// conjugate gradient's e is orthogonal to what it found, so that the means of the squares move by no more. It is the whole error where x = 0, as in
// complete blocks.

using ScaleResist.Graphs;
using ScaleResist.Kernels;
using ScaleResist.Solving;

namespace ScaleResist.Estimating;

/// <summary>Diagonals by node and indices by component, panel by panel.</summary>
public sealed unsafe class NodeSums
{
    private const int MostDeflationSteps = 2; // panels of solves
    private const double WorthDeflating = 0.003; // relative standard error foreseen of an index, above which it is
    private readonly Blocks blocks;
    private readonly Network network;
    private readonly ExactBlocks? exact;
    private readonly BlockRows rows;
    private readonly BlockChunks chunks;
    private readonly IndexSamples[] indices; // by number of nodes, by strength, by node weight where there is one
    private readonly double[] squares; // of members, summed over probes
    private readonly double[] headSquares; // of heads, by block
    private Deflation? deflation;
    private double solverError; // squares of mode errors, summed over probes

    /// <summary>Empty sums.</summary>
    /// <param name="blocks">Of the network.</param>
    /// <param name="weights">Node weights in internal order, or null.</param>
    /// <param name="exact">Blocks that need no probes, or null.</param>
    public NodeSums(Blocks blocks, double[]? weights, ExactBlocks? exact = null)
    {
        this.blocks = blocks;
        this.exact = exact;
        network = blocks.Network;
        rows = new BlockRows(blocks);
        chunks = new BlockChunks(blocks);
        List<IndexSamples> list =
        [
            new(HangingWeights.Of(blocks, null), known => known.Plain),
            new(HangingWeights.Of(blocks, network.Strengths), known => known.ByStrength),
        ];
        if (weights is not null)
            list.Add(new(HangingWeights.Of(blocks, weights), known => known.ByWeight));
        indices = [.. list];
        foreach (IndexSamples index in indices)
            index.FindKnown(blocks, rows, exact);
        squares = new double[network.NodeCount];
        headSquares = new double[blocks.Count];
    }

    /// <summary>Probes added so far.</summary>
    public int Probes { get; private set; }

    /// <summary>Right-hand sides solved to deflate; 0 where nothing was.</summary>
    public int DeflationSolves => (deflation?.Steps ?? 0) * Deflation.Columns;

    /// <summary>
    /// Adds the first panel, once a few smooth modes are taken out of the large blocks of those components whose index the probes would leave
    /// with a relative standard error above 0.3 %, judged by this panel: one panel of solves, a second where the first was not enough.
    /// Estimates stay unbiased for any directions; the panel's spread decides only whether the solves are spent.
    /// </summary>
    /// <param name="panel">Drawn and solved.</param>
    /// <param name="probes">K, the probes of the whole run.</param>
    /// <param name="solver">Prepared for the network.</param>
    /// <param name="workspace">Of the solver.</param>
    /// <param name="seed">Of the directions' signs.</param>
    /// <param name="threads">Threads for all but the solves.</param>
    /// <param name="cancel">Ends the solves.</param>
    /// <param name="mayStep">Asked before each panel of solves; null allows them.</param>
    public void AddFirst(
        ProbePanel panel, int probes, LaplacianSolver solver, SolverWorkspace<float> workspace, ulong seed, int threads, CancellationToken cancel,
        Func<bool>? mayStep = null)
    {
        if (Probes > 0)
            throw new InvalidOperationException("deflation comes before the first panel");
        Add(panel, threads);
        int[] chosen = [.. Enumerable.Range(0, blocks.Count).Where(b => blocks.NodesOf(b) >= Deflation.LeastNodes && IsProbed(b))];
        int steps = Math.Min(MostDeflationSteps, probes / Deflation.Columns);
        for (int step = 0; step < steps; step++)
        {
            chosen = [.. chosen.Where(b => indices[0].RelativeError(blocks.ComponentOf(b), probes) > WorthDeflating)];
            if (chosen.Length == 0 || mayStep?.Invoke() == false)
                break;
            deflation ??= new Deflation(blocks, rows, indices[0].Hanging, chosen);
            deflation.Step(solver, workspace, seed, threads, cancel);
            deflation.Fill([.. indices.Select(index => index.Deflate(network.NodeCount, blocks.Count))], threads);
            foreach (IndexSamples index in indices)
                index.FindKnown(blocks, rows, exact);
            Clear();
            Add(panel, threads);
        }
    }

    /// <summary>Forgets all panels, but keeps the deflation.</summary>
    internal void Clear()
    {
        foreach (IndexSamples index in indices)
            index.Clear();
        Array.Clear(squares);
        Array.Clear(headSquares);
        (Probes, solverError) = (0, 0);
    }

    /// <summary>Adds a solved panel. Panels are added in order of their numbers.</summary>
    public void Add(ProbePanel panel, int threads)
    {
        ParallelOptions options = new() { MaxDegreeOfParallelism = threads };
        for (int c = 0; c < chunks.OfShared.Length; c++)
        {
            BlockChunk[] parts = chunks.OfShared[c];
            NodeSquareSums[] sums = new NodeSquareSums[parts.Length];
            // A block cut in pieces is centred before its squares are taken; whole blocks come after, in one step.
            for (int i = 0; i < parts.Length; i += parts[i].Pieces)
            {
                if (parts[i].Pieces > 1)
                    AddInPieces(panel, c, parts.AsSpan(i, parts[i].Pieces).ToArray(), sums.AsMemory(i), options);
            }
            Parallel.For(0, parts.Length, options, i =>
            {
                if (parts[i].Pieces == 1)
                    AddBlocks(panel, c, parts[i].First, parts[i].End, new Scratch(), ref sums[i]);
            });
            NodeSquareSums total = default;
            foreach (ref readonly NodeSquareSums sum in sums.AsSpan())
                total.Add(sum);
            AddSamples(c, panel.Probes, total);
        }
        Parallel.ForEach(chunks.SmallComponents, options, run =>
        {
            Scratch scratch = new();
            for (int c = run.First; c < run.End; c++)
            {
                NodeSquareSums total = default;
                (int first, int end) = blocks.OfComponent(c);
                AddBlocks(panel, c, first, end, scratch, ref total);
                AddSamples(c, panel.Probes, total);
            }
        });
        Probes += panel.Probes;
        solverError += panel.Probes * panel.ModeError * panel.ModeError;
    }

    /// <summary>Whether nothing of a component was left to the probes.</summary>
    public bool IsExact(int component)
    {
        (int first, int end) = blocks.OfComponent(component);
        for (int b = first; b < end; b++)
        {
            if (IsProbed(b))
                return false;
        }
        return true;
    }

    /// <summary>Kf of a component, the sum of R over its pairs: Student t interval over the probes.</summary>
    public Estimate KirchhoffIndex(int component, double confidence) => indices[0].Estimate(component, confidence, SolverError);

    /// <summary>The sum of d_u d_v R over pairs.</summary>
    public Estimate DegreeKirchhoffIndex(int component, double confidence) => indices[1].Estimate(component, confidence, SolverError);

    /// <summary>The sum of w_u w_v R over pairs; null without node weights.</summary>
    public Estimate? WeightedKirchhoffIndex(int component, double confidence) =>
        indices.Length > 2 ? indices[2].Estimate(component, confidence, SolverError) : null;

    /// <summary>
    /// l_u of every node; 0 for a single node. The parts of the blocks are independent, with standard errors sqrt(2/K) E x^2 each; the
    /// interval is symmetric in the log of the probed part.
    /// </summary>
    /// <param name="quantile">Of the standard normal.</param>
    public Estimate[] Diagonals(double quantile)
    {
        int n = network.NodeCount;
        double[] ofMembers = new double[n], ofHeads = new double[blocks.Count];
        double[] known = Around((share, strength, _) => share * share / strength, value => value, deflated: true);
        double count = Math.Max(1, Probes); // without probes all sums are 0
        double[] probed = Around((_, _, sum) => sum / count, _ => 0);
        double[] open = Around((share, strength, sum) => sum == 0 ? 0 : (share * share / strength) + (sum / count), _ => 0, deflated: true);
        double[] variance = Around((_, _, sum) => sum / count * (sum / count) * 2 / count, _ => 0);
        Estimate[] diagonals = new Estimate[n];
        for (int u = 0; u < n; u++)
        {
            double error = Math.Sqrt(variance[u]);
            double stretch = probed[u] > 0 ? Math.Exp(quantile * error / probed[u]) : 1;
            diagonals[u] = new Estimate(
                known[u] + probed[u], error, known[u] + (probed[u] / stretch), known[u] + (probed[u] * stretch)).WithBias(open[u] * SolverError, known[u]);
        }
        return diagonals;

        // The part of a block from k, d and the sum of x^2, or from the exact value.
        double[] Around(Func<double, double, double, double> part, Func<double, double> ofExact, bool deflated = false)
        {
            for (int c = 0; c < network.Components.Count; c++)
            {
                (int first, int end) = blocks.OfComponent(c);
                for (int b = first; b < end; b++)
                {
                    bool known = exact?.Has(b) == true;
                    ofHeads[b] = known ? ofExact(exact!.OfHead(b)) : part(indices[0].HeadShare(b, c), rows.OfHead(b), headSquares[b]);
                    foreach (int v in blocks.Members(b))
                        ofMembers[v] = known ? ofExact(exact!.OfMember(v)) : part(indices[0].MemberShare(v, c), rows.OfMember(v), squares[v]);
                    if (!deflated || deflation?.Has(b) != true)
                        continue;
                    ofHeads[b] += deflation.OfHead(b);
                    foreach (int v in blocks.Members(b))
                        ofMembers[v] += deflation.OfMember(v);
                }
            }
            BlockTree sums = BlockTree.Of(blocks, null, ofMembers, ofHeads);
            return [.. sums.Below.Zip(sums.Above, (below, above) => below + above)];
        }
    }

    private double SolverError => solverError / Math.Max(1, Probes);

    private bool IsProbed(int block) => !blocks.IsBridge(block) && exact?.Has(block) != true;

    private void AddInPieces(ProbePanel panel, int component, BlockChunk[] parts, Memory<NodeSquareSums> sums, ParallelOptions options)
    {
        int block = parts[0].First;
        if (!IsProbed(block))
            return;
        float[]? coefficients = null;
        if (deflation?.Has(block) == true)
        {
            double[][] products = [.. parts.Select(_ => new double[Deflation.Square])];
            Parallel.For(0, parts.Length, options, i => deflation.AddProducts(panel, block, parts[i].From, parts[i].To, products[i]));
            for (int i = 1; i < parts.Length; i++)
            {
                for (int j = 0; j < Deflation.Square; j++)
                    products[0][j] += products[i][j];
            }
            coefficients = deflation.Coefficients(block, products[0]);
        }
        NodeSquareSums[] offsets = new NodeSquareSums[parts.Length];
        Parallel.For(0, parts.Length, options, i =>
            AddOffsets(panel, block, parts[i].From, parts[i].To, coefficients, new Scratch(), ref offsets[i]));
        NodeSquareSums offset = default;
        foreach (ref readonly NodeSquareSums piece in offsets.AsSpan())
            offset.Add(piece);
        float[] centres = Centres(panel, component, block, offset, new Scratch());
        Parallel.For(0, parts.Length, options, i => AddSquares(
            panel, component, block, parts[i].From, parts[i].To, coefficients, centres, new Scratch(), ref sums.Span[i]));
    }

    private void AddBlocks(ProbePanel panel, int component, int first, int end, Scratch scratch, ref NodeSquareSums sums)
    {
        for (int b = first; b < end; b++)
        {
            if (!IsProbed(b))
                continue;
            int count = blocks.NodesOf(b) - 1;
            float[]? coefficients = null;
            if (deflation?.Has(b) == true)
            {
                double[] products = new double[Deflation.Square];
                deflation.AddProducts(panel, b, 0, count, products);
                coefficients = deflation.Coefficients(b, products);
            }
            NodeSquareSums offset = default;
            AddOffsets(panel, b, 0, count, coefficients, scratch, ref offset);
            float[] centres = Centres(panel, component, b, offset, scratch);
            AddSquares(panel, component, b, 0, count, coefficients, centres, scratch, ref sums);
        }
    }

    // Sums of w (z - z of the head), z less its deflated part, which is 0 at the head.
    private void AddOffsets(
        ProbePanel panel, int block, int from, int to, float[]? coefficients, Scratch scratch, ref NodeSquareSums sums)
    {
        float* origin = Row(panel.Z, blocks.Head(block));
        fixed (float* reduced = scratch.Reduced)
        {
            foreach (int v in blocks.Members(block)[from..to])
            {
                float* z = RowOfZ(panel, v, coefficients, reduced);
                for (int k = 0; k < indices.Length; k++)
                    NodeKernels.AddOffsets(z, origin, indices[k].Hanging.OfMember(v), ref sums[k]);
            }
        }
    }

    private float* RowOfZ(ProbePanel panel, int member, float[]? coefficients, float* reduced)
    {
        if (coefficients is null)
            return Row(panel.Z, member);
        deflation!.Reduce(panel, member, coefficients, reduced);
        return reduced;
    }

    // sum w_B z / W, for each of the weights.
    private float[] Centres(ProbePanel panel, int component, int block, in NodeSquareSums offsets, Scratch scratch)
    {
        ReadOnlySpan<float> origin = panel.Z.Row(blocks.Head(block));
        for (int k = 0; k < indices.Length; k++)
        {
            double total = indices[k].Hanging.Total(component);
            for (int lane = 0; lane < ProbePanel.Width; lane++)
                scratch.Centres[(k * ProbePanel.Width) + lane] = total > 0 ? (float)(origin[lane] + (offsets[k][lane] / total)) : 0;
        }
        return scratch.Centres;
    }

    private void AddSquares(
        ProbePanel panel, int component, int block, int from, int to, float[]? coefficients, float[] centres, Scratch scratch, ref NodeSquareSums sums)
    {
        fixed (float* centre = centres, own = scratch.Row, reduced = scratch.Reduced)
        {
            if (from == 0)
            {
                int head = blocks.Head(block);
                float* z = Row(panel.Z, head), b = RowOfB(panel, block, head, own, scratch);
                for (int k = 0; k < indices.Length; k++)
                {
                    IndexSamples index = indices[k];
                    double square = NodeKernels.AddSquares(
                        z, centre + (k * ProbePanel.Width), b, (float)(index.HeadShare(block, component) / rows.OfHead(block)),
                        index.Hanging.OfHead(block), ref sums[k]);
                    if (k == 0)
                        headSquares[block] += square;
                }
            }
            foreach (int u in blocks.Members(block)[from..to])
            {
                float* z = RowOfZ(panel, u, coefficients, reduced), b = RowOfB(panel, block, u, own, scratch);
                for (int k = 0; k < indices.Length; k++)
                {
                    IndexSamples index = indices[k];
                    double square = NodeKernels.AddSquares(
                        z, centre + (k * ProbePanel.Width), b, (float)(index.MemberShare(u, component) / rows.OfMember(u)),
                        index.Hanging.OfMember(u), ref sums[k]);
                    if (k == 0)
                        squares[u] += square;
                }
            }
        }
    }

    private float* RowOfB(ProbePanel panel, int block, int u, float* own, Scratch scratch)
    {
        if (!blocks.IsCutNode(u))
            return Row(panel.B, u);
        rows.Gather(panel, block, u, own, scratch.Links);
        return own;
    }

    private void AddSamples(int component, int probes, in NodeSquareSums sums)
    {
        for (int lane = 0; lane < probes; lane++)
        {
            for (int k = 0; k < indices.Length; k++)
                indices[k].Add(component, sums[k][lane]);
        }
    }

    private static float* Row(Panel<float> panel, int node) => panel.Pointer + ((long)node * ProbePanel.Width);

    private sealed class Scratch
    {
        public readonly float[] Centres = new float[NodeSquareSums.Most * ProbePanel.Width];
        public readonly float[] Row = new float[ProbePanel.Width];
        public readonly float[] Reduced = new float[ProbePanel.Width];
        public readonly List<(int To, double C)> Links = [];
    }
}
