// The audit: random links and pairs drawn before the first probe, solved to certified enclosures after the last, and what the probes say of them held
// against those.
// Invariant: an audit changes no other number. It is drawn by seed and blames the error bars only where chance would do so in one run of a
// thousand: by the binomial test on links, whose errors are nearly independent; and by a single value six standard errors off, which counts
// whatever the dependence (pairs share the slow modes of a network, so that all their intervals may miss together). A solver that stops too early
// spoils smooth modes before it spoils links, and is found by itself, whatever the statistics: the first panel is checked by a second solve
// (SolveCheck), and blamed where it is off by more than 4.5 times what it may be, near a quarter of a
// mode's statistical error; in slow modes of roads sound solves are off by nearly 4 times.

using System.Globalization;
using MathNet.Numerics.Distributions;
using ScaleResist.Estimating;
using ScaleResist.Graphs;
using ScaleResist.Solving;

namespace ScaleResist.Runs;

/// <summary>References of random links and pairs, and the comparison.</summary>
internal sealed class Audit
{
    /// <summary>Links and pairs of an audit, half of each.</summary>
    public const int Few = 16;

    // From so many probes on, twice as many are a small part of the run.
    private const int Many = 32;
    private const int ProbesForMany = 256;
    private const double ReferenceWidth = 1e-4; // little beside the least of standard errors
    private const double WidestReference = 1e-3;
    private const double ChanceOfBlame = 1e-3;
    private const double SixStandardErrors = 1 - 2e-9; // as the confidence of an interval
    private const uint Purpose = 1;
    private const double SolverMargin = 4.5; // twentieths: near a quarter of a mode's statistical error

    private readonly Network network;
    private readonly List<(long Link, int U, int V)> links;
    private readonly List<(int U, int V)> pairs;
    private CertifiedPairs? references; // links, then pairs

    /// <summary>Draws.</summary>
    /// <param name="blocks">Of the network.</param>
    /// <param name="plan">Seed and probes.</param>
    /// <param name="exact">What needs no probes, or null.</param>
    /// <param name="linksAreProbed">Whether links are, so that they have numbers to be audited.</param>
    public Audit(Blocks blocks, EstimatePlan plan, ExactPart? exact, bool linksAreProbed)
    {
        network = blocks.Network;
        int count = CountFor(plan);
        RandomPairs random = new(blocks, exact, plan.Seed, Purpose);
        links = linksAreProbed ? random.Links(count / 2) : [];
        pairs = random.Pairs(count - links.Count);
        Pairs = new PairSums(network, blocks.Bridges, pairs);
    }

    /// <summary>What the probes say of the pairs; takes every panel.</summary>
    public PairSums Pairs { get; }

    /// <summary>How many links and pairs the audit of a plan solves.</summary>
    public static int CountFor(EstimatePlan plan) => plan.ForeseenProbes >= ProbesForMany ? Many : Few;

    /// <summary>Solves the references.</summary>
    public Audit Solve(LaplacianSolver solver, int threads, CancellationToken cancel)
    {
        references = CertifiedPairs.Solve(
            network, solver, [.. links.Select(link => (link.U, link.V)), .. pairs], threads, cancel, ReferenceWidth);
        return this;
    }

    /// <summary>Compares, once it is solved, and writes the rows that could be compared.</summary>
    /// <param name="bridges">Of the network.</param>
    /// <param name="sums">Of links; null where none is probed.</param>
    /// <param name="plan">Confidence of the intervals, and the error allowed to solves.</param>
    /// <param name="solverError">Of the first panel, as found; null where nobody looked.</param>
    /// <param name="writer">Takes the rows.</param>
    public AuditFacts Write(Bridges bridges, LinkSums? sums, EstimatePlan plan, double? solverError, ITableWriter writer)
    {
        double confidence = plan.Confidence;
        CertifiedPairs references = this.references ?? throw new InvalidOperationException("the audit is not solved");
        LinkResistances inside = new(network, bridges, sums, null, confidence), near = new(network, bridges, sums, null, SixStandardErrors);
        List<Row> rows = [];
        for (int i = 0; i < links.Count; i++)
            Add(links[i].U, links[i].V, references[i], true, OfLink(inside, links[i].Link), OfLink(near, links[i].Link));
        for (int i = 0; i < pairs.Count; i++)
        {
            Add(pairs[i].U, pairs[i].V, references[links.Count + i], false,
                Pairs.Estimate(i, Quantiles.Normal(confidence)).Resistance, Pairs.Estimate(i, Quantiles.Normal(SixStandardErrors)).Resistance);
        }
        writer.Write(ToBatch(rows));
        return Facts(rows, links.Count + pairs.Count - rows.Count, plan, solverError);

        void Add(int u, int v, Enclosure reference, bool isLink, Estimate estimate, Estimate wide)
        {
            if (reference.RelativeWidth <= WidestReference)
                rows.Add(new Row(u, v, reference, isLink, estimate.Value, Holds(estimate, reference), Holds(wide, reference) == false));
        }

        static Estimate OfLink(LinkResistances resistances, long link)
        {
            Span<LinkResult> one = stackalloc LinkResult[1];
            resistances.Fill(link, one);
            return one[0].Resistance;
        }

        static bool? Holds(Estimate interval, Enclosure truth) => interval.Lower <= truth.Lower && truth.Upper <= interval.Upper ? true
            : truth.Upper < interval.Lower || interval.Upper < truth.Lower ? false : null;
    }

    /// <summary>The facts where only solves are checked.</summary>
    public static AuditFacts OfSolves(EstimatePlan plan, double? solverError) => Facts([], 0, plan, solverError);

    private readonly record struct Row(int U, int V, Enclosure Reference, bool IsLink, double Resistance, bool? Held, bool FarOff)
    {
        public double RelativeError => (Resistance / Reference.Middle) - 1;
    }

    private RowBatch ToBatch(List<Row> rows)
    {
        Array source = LabelColumns.New(network.Labels, rows.Count), target = LabelColumns.New(network.Labels, rows.Count);
        for (int i = 0; i < rows.Count; i++)
        {
            bool ascending = network.Labels.Compare(rows[i].U, rows[i].V) < 0;
            LabelColumns.Put(network.Labels, source, i, ascending ? rows[i].U : rows[i].V);
            LabelColumns.Put(network.Labels, target, i, ascending ? rows[i].V : rows[i].U);
        }
        return new RowBatch(rows.Count,
        [
            source, target, Column(row => row.Resistance), Column(row => row.Reference.Lower), Column(row => row.Reference.Upper),
            Column(row => row.RelativeError),
        ]);

        double[] Column(Func<Row, double> value) => [.. rows.Select(value)];
    }

    private static AuditFacts Facts(List<Row> rows, int tooWide, EstimatePlan plan, double? solverError)
    {
        double confidence = plan.Confidence, allowed = plan.SoundModeErrorOf(0);
        double[] errors = [.. rows.Select(row => Math.Abs(row.RelativeError)).Order()];
        int intervals = rows.Count(row => row.Held is not null), held = rows.Count(row => row.Held == true);
        int ofLinks = rows.Count(row => row.IsLink && row.Held is not null), linksHeld = rows.Count(row => row.IsLink && row.Held == true);
        int farOff = rows.Count(row => row.FarOff);
        return new AuditFacts
        {
            Compared = rows.Count,
            TooWide = tooWide,
            MedianError = Quantile(0.5),
            Percentile95Error = Quantile(0.95),
            WorstError = Quantile(1),
            Intervals = intervals,
            Held = held,
            LinkIntervals = ofLinks,
            LinksHeld = linksHeld,
            FarOff = farOff,
            SolverError = solverError,
            SolverErrorAllowed = allowed,
            Warning = solverError is double off && !(off <= SolverMargin * allowed)
                ? string.Create(CultureInfo.InvariantCulture,
                    $"solves of probes are off by {off:0.0e+0} of a mode's standard deviation, where {allowed:0.0e+0} is allowed")
                : ChanceOf(ofLinks - linksHeld, ofLinks, 1 - confidence) <= ChanceOfBlame
                ? string.Create(CultureInfo.InvariantCulture,
                    $"{linksHeld} of {ofLinks} audited links lie within their intervals, where {100 * confidence:0.####} % should")
                : farOff > 0 ? $"{farOff} of {rows.Count} audited links and pairs lie more than six standard errors from the truth" : null,
        };

        double? Quantile(double share) => errors.Length == 0 ? null : errors[ProbeDial.PlaceOf(share, errors.Length)];
    }

    // That at least so many of n intervals miss, each with the given probability.
    private static double ChanceOf(int missed, int n, double probability) =>
        missed == 0 ? 1 : 1 - Binomial.CDF(probability, n, missed - 1);
}
