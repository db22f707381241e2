// What a case does to the index and to pairs, from its solved columns.
//
// The area of a case (Splits) is made one by virtual links between component i and component 0: with L+ of each and b_i = 1_i/n_i - 1_0/n_0,
//     N = L+ + (1/c0) sum over i > 0 of 1_i 1_i'
// is an inverse of L + c0 sum of b_i b_i' as far as resistances go, and a virtual link is lost like any other. N U is L+ U plus a constant on each
// component. With S the part that counts, w the weights on it, W their sum, and l the diagonal of L+,
//     Kf_w(S) afterwards = W (sum w_u l_u + s_1 / c0) - (w'L+ w + s_2 / c0) - W tr(K^-1 G)          (LowRankUpdate; G over S),
// s_1 the weight of S outside component 0, s_2 the sum of squares of its weights by component, the first left out. w'L+w takes one more column for
// components that S holds in part only, and is known for those that it holds whole.
// Invariant: where S is all of a component and nothing else, the change is -W tr(K^-1 G), with no error of probes in it.

using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Estimating;

/// <summary>Requested pairs, and (e_u - e_v)' L+ (e_u - e_v) of each: R where both ends lie in one component.</summary>
internal sealed record BasePairs((int U, int V)[] Ends, double[] Forms);

/// <summary>Sums of cases; for one thread at a time.</summary>
internal sealed unsafe class CaseSums(Potentials potentials, WeightedTotals[] totals, BasePairs pairs, CaseMask mask, double quantile)
{
    private const double ExactDigits = 1e-15;
    private const double SolvedDigits = 10 * SolvedPotentials.Tolerance;
    private const double WorthWidening = 1e-8;
    private const int Half = PanelPair.Half;
    private readonly Network network = potentials.Network;

    /// <summary>What a case does.</summary>
    /// <param name="work">The case.</param>
    /// <param name="columns">Its k columns of links and virtual links.</param>
    /// <param name="x">The panels of its batch.</param>
    public CaseImpact Of(CaseWork work, List<CaseColumn> columns, List<PanelPair> x)
    {
        CaseParts parts = work.Parts;
        int k = columns.Count;
        double[,] couplings = new double[k, k];
        for (int i = 0; i < k; i++)
        {
            CaseColumn row = columns[i];
            for (int j = 0; j < k; j++)
            {
                // A virtual link sees means over components: constants are all that they hold.
                couplings[i, j] = row.IsLink
                    ? At(x, work.First + j, row.Link.U) - At(x, work.First + j, row.Link.V)
                    : work.Join * columns[j].SumOver(row.Join);
            }
        }
        LowRankUpdate update = new(couplings, work.Steps);
        Estimate before = totals[0].Index[parts.Area[0]];
        (double after, double change, double error) = Index(work, update, 0, x);
        // What the small system loses of the digits that its columns have.
        double digits = update.Loss * (potentials.Method == ResistanceMethod.Exact ? ExactDigits : SolvedDigits);
        double slack = (quantile * error) + (digits > WorthWidening ? digits * Math.Max(before.Value, Math.Abs(after)) : 0);
        return new CaseImpact
        {
            ComponentsAfter = parts.Count,
            NodesCutOff = parts.CutOff,
            Before = before,
            After = after,
            Change = new Estimate(change, error, change - slack, change + slack),
            Weighted = totals.Length == 1 ? null : (totals[1].Index[parts.Area[0]].Value, Index(work, update, 1, x).After),
            Pairs = OfPairs(work, columns, update, x),
        };
    }

    private static double At(List<PanelPair> x, int column, int node) => x[column / PanelPair.Width].At(node, column % PanelPair.Width);

    private (double After, double Change, double Error) Index(CaseWork work, LowRankUpdate update, int weighting, List<PanelPair> x)
    {
        CaseParts parts = work.Parts;
        WeightedTotals kind = totals[weighting];
        Estimate before = kind.Index[parts.Area[0]];
        int k = work.Steps.Length;
        double weight = 0, outside = 0, squares = 0, diagonal = 0, form = 0, listedError = 0;
        double[] ofWeights = new double[parts.Area.Length];
        double[,] gram = new double[k, k];
        double[] rows = new double[k];
        bool whole = true;
        for (int place = 0; place < parts.Area.Length; place++)
        {
            if (parts.Held[place] == 0)
                continue;
            int c = parts.Area[place];
            Component range = network.Components[c];
            whole &= place == 0 && parts.Held[0] == range.Nodes;
            double[]? over = kind.Weights;
            if (CaseMask.IsPartial(network, parts, place))
            {
                ReadOnlySpan<double> held = mask.Of(parts, place, kind);
                over = mask.Values;
                int column = work.First + k + weighting;
                for (int u = range.Start; u < range.End; u++)
                {
                    ofWeights[place] += held[u - range.Start];
                    form += held[u - range.Start] * At(x, column, u);
                }
                double listed = 0;
                foreach (int u in parts.Listed)
                {
                    if (u < range.Start || u >= range.End)
                        continue;
                    listed += kind.Of(u) * potentials.Diagonal[u];
                    listedError += potentials.DiagonalErrors is double[] errors ? kind.Of(u) * errors[u] : 0;
                }
                diagonal += parts.ListedAreIn ? listed : kind.Diagonal[c] - listed;
            }
            else
            {
                ofWeights[place] = kind.Weight[c];
                form += kind.Form[c];
                diagonal += kind.Diagonal[c];
            }
            weight += ofWeights[place];
            outside += place > 0 ? ofWeights[place] : 0;
            squares += place > 0 ? ofWeights[place] * ofWeights[place] : 0;
            AddGram(work.First, range, over, x, gram, rows);
        }
        if (parts.Nodes <= 1 || weight == 0)
            return (0, -before.Value, before.StandardError);
        for (int i = 0; i < k; i++)
        {
            for (int j = 0; j < k; j++)
                gram[i, j] -= rows[i] * rows[j] / weight;
        }
        double fall = weight * update.Trace(gram);
        if (whole)
            return (before.Value - fall, -fall, 0);
        double after = (weight * (diagonal + (work.Join * outside))) - (form + (work.Join * squares)) - fall;
        return (after, after - before.Value, (weight * listedError) + DiagonalError(parts, kind, ofWeights, weight));
    }

    // The errors of all sums A that the change holds, less what the index before holds of the first: at worst they add up.
    private double DiagonalError(CaseParts parts, WeightedTotals kind, double[] ofWeights, double weight)
    {
        double error = 0;
        for (int place = 0; place < parts.Area.Length; place++)
        {
            int c = parts.Area[place];
            bool summed = ofWeights[place] > 0 && !(parts.ListedAreIn && CaseMask.IsPartial(network, parts, place));
            double share = (summed ? weight : 0) - (place == 0 ? kind.Weight[c] : 0);
            error += kind.Weight[c] > 0 ? Math.Abs(share) * kind.Index[c].StandardError / kind.Weight[c] : 0;
        }
        return error;
    }

    // gram += sum of w x x' and rows += sum of w x, over one component.
    private static void AddGram(int first, Component range, double[]? weights, List<PanelPair> x, double[,] gram, double[] rows)
    {
        int k = rows.Length;
        double* products = stackalloc double[Half * Half];
        double* sums = stackalloc double[Half];
        fixed (double* w = weights)
        {
            for (int i = first / Half; i * Half < first + k; i++)
            {
                new Span<double>(sums, Half).Clear();
                double* a = Panel(i);
                GramKernels.AddRows(a, w, range.Start, range.End, sums);
                for (int lane = 0; lane < Half; lane++)
                {
                    if (InCase(i, lane) is int at && at >= 0)
                        rows[at] += sums[lane];
                }
                for (int j = i; j * Half < first + k; j++)
                {
                    new Span<double>(products, Half * Half).Clear();
                    GramKernels.AddProducts(a, Panel(j), w, range.Start, range.End, products);
                    for (int one = 0; one < Half; one++)
                    {
                        for (int other = 0; other < Half; other++)
                            Put(InCase(i, one), InCase(j, other), products[(one * Half) + other], twice: i != j);
                    }
                }
            }
        }

        double* Panel(int half) => x[half / 2][half % 2].Pointer;

        int InCase(int half, int lane) => (half * Half) + lane - first is int at && at >= 0 && at < k ? at : -1;

        void Put(int i, int j, double sum, bool twice)
        {
            if (i < 0 || j < 0)
                return;
            gram[i, j] += sum;
            if (twice)
                gram[j, i] += sum;
        }
    }

    private (double Before, double After)[] OfPairs(CaseWork work, List<CaseColumn> columns, LowRankUpdate update, List<PanelPair> x)
    {
        (double, double)[] found = new (double, double)[pairs.Ends.Length];
        CaseParts parts = work.Parts;
        double[] d = new double[columns.Count];
        for (int p = 0; p < found.Length; p++)
        {
            (int u, int v) = pairs.Ends[p];
            bool one = work.ComponentOf[u] == work.ComponentOf[v];
            double before = u == v ? 0 : one ? pairs.Forms[p] : double.PositiveInfinity;
            (int partU, int partV) = (parts.OfPairs[2 * p], parts.OfPairs[(2 * p) + 1]);
            double after = double.PositiveInfinity;
            if (partU == CaseParts.Elsewhere && partV == CaseParts.Elsewhere)
            {
                after = before;
            }
            else if (partU == partV && partU >= 0)
            {
                for (int j = 0; j < d.Length; j++)
                    d[j] = At(x, work.First + j, u) - At(x, work.First + j, v);
                int outside = one ? 0 : (work.ComponentOf[u] == parts.Area[0] ? 0 : 1) + (work.ComponentOf[v] == parts.Area[0] ? 0 : 1);
                after = u == v ? 0 : pairs.Forms[p] + (work.Join * outside) - update.Square(d);
            }
            found[p] = (before, after);
        }
        return found;
    }
}
