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

using ScaleResist.Graphs;
using ScaleResist.Kernels;
using ScaleResist.Solving;

namespace ScaleResist.Estimating;

/// <summary>Mean and spread of independent samples (Welford 1962).</summary>
internal struct RunningMoments
{
    private double mean;
    private double spread;

    public readonly double Mean => mean;

    public int Count { get; private set; }

    /// <summary>Standard error of the mean.</summary>
    public readonly double StandardError => StandardErrorOf(Count);

    /// <summary>Standard error that the mean of so many samples is foreseen to have.</summary>
    public readonly double StandardErrorOf(int samples) => Math.Sqrt(spread / samples / (Count - 1));

    public void Add(double sample)
    {
        Count++;
        double step = sample - mean;
        mean += step / Count;
        spread += step * (sample - mean);
    }
}

/// <summary>Diagonals by node and indices by component, panel by panel.</summary>
public sealed unsafe class NodeSums
{
    private const int MembersPerChunk = 1 << 12;
    private const int MostDeflationSteps = 2; // panels of solves
    private const double WorthDeflating = 0.003; // relative standard error foreseen of an index, above which it is
    private readonly Blocks blocks;
    private readonly Network network;
    private readonly ExactBlocks? exact;
    private readonly BlockRows rows;
    private readonly Samples plain;
    private readonly Samples byStrength;
    private readonly Samples? byWeight;
    private readonly double[] squares; // of members, summed over probes
    private readonly double[] headSquares; // of heads, by block
    private readonly List<Chunk>[] chunks; // of the components that several threads share; of the others together
    private readonly int sharedComponents;
    private Deflation? deflation;

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
        plain = NewSamples(HangingWeights.Of(blocks, null), known => known.Plain);
        byStrength = NewSamples(HangingWeights.Of(blocks, network.Strengths), known => known.ByStrength);
        byWeight = weights is null ? null : NewSamples(HangingWeights.Of(blocks, weights), known => known.ByWeight);
        foreach (Samples samples in Indices())
            FillKnown(samples);
        squares = new double[network.NodeCount];
        headSquares = new double[blocks.Count];
        while (sharedComponents < network.Components.Count && network.Components[sharedComponents].Nodes > MembersPerChunk)
            sharedComponents++;
        chunks = new List<Chunk>[sharedComponents + 1];
        for (int c = 0; c < sharedComponents; c++)
            chunks[c] = ChunksOf(c);
        chunks[sharedComponents] = ChunksOfSmallComponents();
    }

    /// <summary>Probes added so far.</summary>
    public int Probes { get; private set; }

    /// <summary>Right-hand sides solved to deflate; 0 where nothing was.</summary>
    public int DeflationSolves => (deflation?.Steps ?? 0) * Deflation.Columns;

    /// <summary>
    /// Takes a few smooth modes out of the large blocks of those components whose index the probes would leave with a relative standard
    /// error above 0.3 %, judged by the first panel: one panel of solves, a second where the first was not enough. Estimates stay unbiased
    /// for any directions; the panel's spread decides only whether the solves are spent.
    /// </summary>
    /// <param name="pilot">The first panel, solved; it is not added.</param>
    /// <param name="probes">K, the probes of the whole run.</param>
    /// <param name="solver">Prepared for the network.</param>
    /// <param name="workspace">Of the solver.</param>
    /// <param name="seed">Of the directions' signs.</param>
    /// <param name="threads">Threads for all but the solves.</param>
    /// <param name="cancel">Ends the solves.</param>
    public void Deflate(
        ProbePanel pilot, int probes, LaplacianSolver solver, SolverWorkspace<float> workspace, ulong seed, int threads, CancellationToken cancel)
    {
        if (Probes > 0)
            throw new InvalidOperationException("deflation comes before the first panel");
        int steps = Math.Min(MostDeflationSteps, probes / Deflation.Columns);
        int[] large = [.. Enumerable.Range(0, blocks.Count).Where(b => blocks.NodesOf(b) >= Deflation.LeastNodes && IsProbed(b))];
        if (steps == 0 || large.Length == 0)
            return;
        int[] chosen = Wide(large);
        for (int step = 0; step < steps && chosen.Length > 0; step++)
        {
            deflation ??= new Deflation(blocks, rows, plain.Hanging, chosen);
            deflation.Step(solver, workspace, seed, threads, cancel);
            DeflatedShares[] shares = [.. Indices().Select(samples => samples.Deflate(network.NodeCount, blocks.Count))];
            deflation.Fill(shares, threads);
            foreach (Samples samples in Indices())
                FillKnown(samples);
            if (step + 1 < steps)
                chosen = Wide(chosen);
        }

        // The blocks of components that this many probes would leave too uncertain.
        int[] Wide(int[] among)
        {
            Add(pilot, threads);
            int[] wide = [.. among.Where(b => plain.RelativeError(blocks.ComponentOf(b), probes) > WorthDeflating)];
            foreach (Samples samples in Indices())
                samples.Clear();
            Array.Clear(squares);
            Array.Clear(headSquares);
            Probes = 0;
            return wide;
        }
    }

    /// <summary>Adds a solved panel. Panels are added in order of their numbers.</summary>
    public void Add(ProbePanel panel, int threads)
    {
        ParallelOptions options = new() { MaxDegreeOfParallelism = threads };
        for (int c = 0; c < sharedComponents; c++)
        {
            List<Chunk> parts = chunks[c];
            NodeSquareSums[] sums = new NodeSquareSums[parts.Count];
            // A block cut in pieces is centred before its squares are taken; whole blocks come after, in one step.
            for (int i = 0; i < parts.Count; i += parts[i].Pieces)
            {
                if (parts[i].Pieces > 1)
                    AddInPieces(panel, c, parts, i, sums, options);
            }
            Parallel.For(0, parts.Count, options, i =>
            {
                if (parts[i].Pieces == 1)
                    AddBlocks(panel, c, parts[i].First, parts[i].End, new Scratch(), ref sums[i]);
            });
            NodeSquareSums total = default;
            foreach (ref readonly NodeSquareSums sum in sums.AsSpan())
                total.Add(sum);
            AddSamples(c, panel.Probes, total);
        }
        List<Chunk> small = chunks[sharedComponents];
        Parallel.For(0, small.Count, options, i =>
        {
            Scratch scratch = new();
            for (int c = small[i].First; c < small[i].End; c++)
            {
                NodeSquareSums total = default;
                (int first, int end) = blocks.OfComponent(c);
                AddBlocks(panel, c, first, end, scratch, ref total);
                AddSamples(c, panel.Probes, total);
            }
        });
        Probes += panel.Probes;
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
    public Estimate KirchhoffIndex(int component, double confidence) => plain.Estimate(component, confidence);

    /// <summary>The sum of d_u d_v R over pairs.</summary>
    public Estimate DegreeKirchhoffIndex(int component, double confidence) => byStrength.Estimate(component, confidence);

    /// <summary>The sum of w_u w_v R over pairs; null without node weights.</summary>
    public Estimate? WeightedKirchhoffIndex(int component, double confidence) => byWeight?.Estimate(component, confidence);

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
        double[] variance = Around((_, _, sum) => sum / count * (sum / count) * 2 / count, _ => 0);
        Estimate[] diagonals = new Estimate[n];
        for (int u = 0; u < n; u++)
        {
            double error = Math.Sqrt(variance[u]);
            double stretch = probed[u] > 0 ? Math.Exp(quantile * error / probed[u]) : 1;
            diagonals[u] = new Estimate(
                known[u] + probed[u], error, known[u] + (probed[u] / stretch), known[u] + (probed[u] * stretch));
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
                    ofHeads[b] = known ? ofExact(exact!.OfHead(b)) : part(plain.HeadShare(b, c), rows.OfHead(b), headSquares[b]);
                    foreach (int v in blocks.Members(b))
                        ofMembers[v] = known ? ofExact(exact!.OfMember(v)) : part(plain.MemberShare(v, c), rows.OfMember(v), squares[v]);
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

    private bool IsProbed(int block) => !blocks.IsBridge(block) && exact?.Has(block) != true;

    private IEnumerable<Samples> Indices() => byWeight is null ? [plain, byStrength] : [plain, byStrength, byWeight];

    private Samples NewSamples(HangingWeights hanging, Func<(double Plain, double ByStrength, double ByWeight), double> choose) =>
        new(hanging, new double[network.Components.Count], choose);

    private void FillKnown(Samples samples)
    {
        HangingWeights hanging = samples.Hanging;
        for (int c = 0; c < samples.Known.Length; c++)
        {
            (int first, int end) = blocks.OfComponent(c);
            samples.Known[c] = 0;
            for (int b = first; b < end; b++)
            {
                if (exact?.Has(b) == true)
                {
                    samples.Known[c] += samples.Choose(exact.Index(b));
                    continue;
                }
                double sum = hanging.OfHead(b) * Square(samples.HeadShare(b, c)) / rows.OfHead(b);
                foreach (int v in blocks.Members(b))
                    sum += hanging.OfMember(v) * Square(samples.MemberShare(v, c)) / rows.OfMember(v);
                samples.Known[c] += hanging.Total(c) * (sum + samples.Deflated(b));
            }
        }

        static double Square(double k) => k * k;
    }

    private List<Chunk> ChunksOf(int component)
    {
        (int first, int end) = blocks.OfComponent(component);
        List<Chunk> list = [];
        for (int b = first; b < end;)
        {
            int size = blocks.NodesOf(b) - 1, start = b++;
            if (size > MembersPerChunk)
            {
                int pieces = (size + MembersPerChunk - 1) / MembersPerChunk;
                for (int i = 0; i < pieces; i++)
                    list.Add(new Chunk(start, b, pieces, i * MembersPerChunk, Math.Min(size, (i + 1) * MembersPerChunk)));
                continue;
            }
            while (b < end && size + blocks.NodesOf(b) - 1 <= MembersPerChunk)
                size += blocks.NodesOf(b++) - 1;
            list.Add(new Chunk(start, b, 1, 0, 0));
        }
        return list;
    }

    // Chunks of whole components, numbered by component.
    private List<Chunk> ChunksOfSmallComponents()
    {
        List<Chunk> list = [];
        for (int c = sharedComponents; c < network.Components.Count && network.Components[c].Nodes > 1;)
        {
            int start = c, size = 0;
            while (c < network.Components.Count && network.Components[c].Nodes > 1 && size < MembersPerChunk)
                size += network.Components[c++].Nodes;
            list.Add(new Chunk(start, c, 1, 0, 0));
        }
        return list;
    }

    private void AddInPieces(
        ProbePanel panel, int component, List<Chunk> parts, int first, NodeSquareSums[] sums, ParallelOptions options)
    {
        int block = parts[first].First, pieces = parts[first].Pieces;
        if (!IsProbed(block))
            return;
        float[]? coefficients = null;
        if (deflation?.Has(block) == true)
        {
            double[][] products = new double[pieces][];
            Parallel.For(0, pieces, options, i =>
                deflation.AddProducts(panel, block, parts[first + i].From, parts[first + i].To, products[i] = new double[16 * 16]));
            for (int i = 1; i < pieces; i++)
            {
                for (int j = 0; j < products[0].Length; j++)
                    products[0][j] += products[i][j];
            }
            coefficients = deflation.Coefficients(block, products[0]);
        }
        NodeSquareSums[] offsets = new NodeSquareSums[pieces];
        Parallel.For(0, pieces, options, i =>
            AddOffsets(panel, block, parts[first + i].From, parts[first + i].To, coefficients, new Scratch(), ref offsets[i]));
        NodeSquareSums offset = default;
        foreach (ref readonly NodeSquareSums piece in offsets.AsSpan())
            offset.Add(piece);
        float[] centres = Centres(panel, component, block, offset, new float[3 * ProbePanel.Width]);
        Parallel.For(0, pieces, options, i =>
            AddSquares(
                panel, component, block, parts[first + i].From, parts[first + i].To, coefficients, centres, new Scratch(), ref sums[first + i]));
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
                double[] products = new double[16 * 16];
                deflation.AddProducts(panel, b, 0, count, products);
                coefficients = deflation.Coefficients(b, products);
            }
            NodeSquareSums offset = default;
            AddOffsets(panel, b, 0, count, coefficients, scratch, ref offset);
            float[] centres = Centres(panel, component, b, offset, scratch.Centres);
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
                NodeKernels.AddOffsets(z, origin, plain.Hanging.OfMember(v), ref sums.Plain);
                NodeKernels.AddOffsets(z, origin, byStrength.Hanging.OfMember(v), ref sums.ByStrength);
                if (byWeight is not null)
                    NodeKernels.AddOffsets(z, origin, byWeight.Hanging.OfMember(v), ref sums.ByWeight);
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
    private float[] Centres(ProbePanel panel, int component, int block, in NodeSquareSums offsets, float[] centres)
    {
        ReadOnlySpan<float> origin = panel.Z.Row(blocks.Head(block));
        double n = plain.Hanging.Total(component), strength = byStrength.Hanging.Total(component);
        double weight = byWeight?.Hanging.Total(component) ?? 0;
        for (int lane = 0; lane < ProbePanel.Width; lane++)
        {
            centres[lane] = (float)(origin[lane] + (offsets.Plain[lane] / n));
            centres[16 + lane] = (float)(origin[lane] + (offsets.ByStrength[lane] / strength));
            centres[32 + lane] = weight > 0 ? (float)(origin[lane] + (offsets.ByWeight[lane] / weight)) : 0;
        }
        return centres;
    }

    private void AddSquares(
        ProbePanel panel, int component, int block, int from, int to, float[]? coefficients, float[] centres, Scratch scratch, ref NodeSquareSums sums)
    {
        fixed (float* centre = centres, own = scratch.Row, reduced = scratch.Reduced)
        {
            if (from == 0)
            {
                int u = blocks.Head(block);
                float* z = Row(panel.Z, u), b = RowOfB(u, own);
                double d = rows.OfHead(block);
                headSquares[block] += NodeKernels.AddSquares(
                    z, centre, b, (float)(plain.HeadShare(block, component) / d), plain.Hanging.OfHead(block), ref sums.Plain);
                NodeKernels.AddSquares(
                    z, centre + 16, b, (float)(byStrength.HeadShare(block, component) / d), byStrength.Hanging.OfHead(block), ref sums.ByStrength);
                if (byWeight is not null)
                {
                    NodeKernels.AddSquares(
                        z, centre + 32, b, (float)(byWeight.HeadShare(block, component) / d), byWeight.Hanging.OfHead(block), ref sums.ByWeight);
                }
            }
            foreach (int u in blocks.Members(block)[from..to])
            {
                float* z = RowOfZ(panel, u, coefficients, reduced), b = RowOfB(u, own);
                double d = rows.OfMember(u);
                squares[u] += NodeKernels.AddSquares(
                    z, centre, b, (float)(plain.MemberShare(u, component) / d), plain.Hanging.OfMember(u), ref sums.Plain);
                NodeKernels.AddSquares(
                    z, centre + 16, b, (float)(byStrength.MemberShare(u, component) / d), byStrength.Hanging.OfMember(u), ref sums.ByStrength);
                if (byWeight is not null)
                {
                    NodeKernels.AddSquares(
                        z, centre + 32, b, (float)(byWeight.MemberShare(u, component) / d), byWeight.Hanging.OfMember(u), ref sums.ByWeight);
                }
            }
        }

        float* RowOfB(int u, float* own)
        {
            if (!blocks.IsCutNode(u))
                return Row(panel.B, u);
            rows.Gather(panel, block, u, own, scratch.Links);
            return own;
        }
    }

    private void AddSamples(int component, int probes, in NodeSquareSums sums)
    {
        for (int lane = 0; lane < probes; lane++)
        {
            plain.Add(component, sums.Plain[lane]);
            byStrength.Add(component, sums.ByStrength[lane]);
            byWeight?.Add(component, sums.ByWeight[lane]);
        }
    }

    private static float* Row(Panel<float> panel, int node) => panel.Pointer + ((long)node * ProbePanel.Width);

    // A run of whole blocks (or small components), or one of the pieces of a block's members.
    private readonly record struct Chunk(int First, int End, int Pieces, int From, int To);

    private sealed class Scratch
    {
        public readonly float[] Centres = new float[3 * ProbePanel.Width];
        public readonly float[] Row = new float[ProbePanel.Width];
        public readonly float[] Reduced = new float[ProbePanel.Width];
        public readonly List<(int To, double C)> Links = [];
    }

    // One index: its weights, and by component its samples W sum w x^2 beside what is known.
    private sealed class Samples(
        HangingWeights hanging, double[] known, Func<(double Plain, double ByStrength, double ByWeight), double> choose)
    {
        private readonly RunningMoments[] moments = new RunningMoments[known.Length];
        private DeflatedShares? deflated;

        public HangingWeights Hanging => hanging;

        public double[] Known => known;

        public Func<(double Plain, double ByStrength, double ByWeight), double> Choose => choose;

        // k = 1 - w_B / W, less what a deflation takes
        public double MemberShare(int node, int component) =>
            Share(hanging.OfMember(node), hanging.Total(component)) - (deflated?.OfMembers[node] ?? 0);

        public double HeadShare(int block, int component) =>
            Share(hanging.OfHead(block), hanging.Total(component)) - (deflated?.OfHeads[block] ?? 0);

        public double Deflated(int block) => deflated is not null && deflated.Parts.TryGetValue(block, out double part) ? part : 0;

        public DeflatedShares Deflate(int nodes, int blocks) => deflated ??= new DeflatedShares(hanging, nodes, blocks);

        public void Clear() => Array.Clear(moments);

        public void Add(int component, double sum) => moments[component].Add(hanging.Total(component) * sum);

        // Standard error over value, foreseen for so many probes.
        public double RelativeError(int component, int probes)
        {
            double error = moments[component].StandardErrorOf(probes);
            return error > 0 ? error / (known[component] + moments[component].Mean) : 0;
        }

        public Estimate Estimate(int component, double confidence)
        {
            RunningMoments probed = moments[component];
            if (probed.Count == 0 || probed.Mean == 0)
                return Estimating.Estimate.Exact(known[component]);
            double value = known[component] + probed.Mean;
            double half = Quantiles.Student(confidence, probed.Count - 1) * probed.StandardError;
            return new Estimate(value, probed.StandardError, value - half, value + half);
        }

        private static double Share(double weight, double total) => total > 0 ? Math.Max(0, 1 - (weight / total)) : 1;
    }
}
