// When the probes are enough: after every panel, in the order of their numbers, by the target error; after every batch by the clock.
// Invariant: without a time budget the decision depends on the panels alone, so that threads do not move it.
//
// The target is met where, in every table wanted, 95 % of the probed rows have a relative standard error below it. Rows are sampled by stride. All
// standard errors but that of the Kirchhoff index fall as 1/sqrt(K) and change little else from panel to panel; a table that was above the target by
// some factor is looked at again when four fifths of the probes that this factor foretells are in.

using System.Diagnostics;
using ScaleResist.Estimating;
using ScaleResist.Graphs;

namespace ScaleResist.Runs;

/// <summary>Follows the sums of a run and says when to stop.</summary>
internal sealed class ProbeDial
{
    private const int FewestPanels = 2;
    private const int MostRows = 8192;
    private const int PairsForCoordinates = 256;
    private const double Percentile = 0.95;
    private const double ShareForetold = 0.8;
    private const double LeastShareOfNodes = 0.01; // of a component whose index counts
    private const double BatchMargin = 1.1;
    private const double Overrun = 1.1;
    private const uint Purpose = 2;

    private readonly Network network;
    private readonly EstimatePlan plan;
    private readonly List<Measure> measures = [];
    private readonly long begin = Stopwatch.GetTimestamp();
    private double lastBatch;
    private int panels;

    /// <summary>Prepares the samples.</summary>
    /// <param name="blocks">Of the network.</param>
    /// <param name="plan">What is wanted of the probes.</param>
    /// <param name="sums">Where panels are added.</param>
    /// <param name="exact">Blocks that need no probes, or null.</param>
    public ProbeDial(Blocks blocks, EstimatePlan plan, ProbedEstimates sums, ExactBlocks? exact)
    {
        network = blocks.Network;
        this.plan = plan;
        if (plan is { TargetError: null, TrialPanels: null })
            return;
        if (plan.Want.HasFlag(Want.Index))
            measures.Add(new Measure(() => IndexErrors(sums.Nodes!), Share: 1) { IsIndex = true });
        if (plan.Want.HasFlag(Want.Links) && sums.Links is not null)
        {
            List<(long Link, long Arc, int U)> sample = SampleLinks(blocks, exact);
            measures.Add(new Measure(() => sample.Select(at => sums.Links.Estimate(at.Link, at.Arc, at.U, 0)), Percentile));
        }
        if (sums.Pairs is not null)
        {
            int[] sample = [.. Sample(sums.Pairs.Count).Select(i => (int)i).Where(sums.Pairs.IsOpen)];
            measures.Add(new Measure(
                () => sample.Select(i => sums.Pairs.Estimate(i, 0)).Where(found => found.Method == ResistanceMethod.Probe)
                    .Select(found => found.Resistance),
                Percentile));
        }
        if (plan.Want.HasFlag(Want.Coordinates))
        {
            List<(int U, int V)> sample = new RandomPairs(blocks, null, plan.Seed, Purpose).Pairs(PairsForCoordinates);
            ForCoordinates = new PairSums(network, blocks.Bridges, sample);
            measures.Add(new Measure(() => Enumerable.Range(0, sample.Count).Select(i => ForCoordinates.Estimate(i, 0).Resistance), Percentile));
        }
        if (plan.Want.HasFlag(Want.Nodes)) // the dearest comes last
            measures.Add(new Measure(() => NodeErrors(sums.Nodes!), Percentile));
    }

    /// <summary>Random pairs by which coordinates are judged; take every panel. Null where nobody asks.</summary>
    public PairSums? ForCoordinates { get; }

    /// <summary>Why no more panels are wanted; null while they are.</summary>
    public StoppedBy? Stopped { get; private set; }

    /// <summary>The place of a quantile in n sorted values: at least that share lie there or below.</summary>
    public static int PlaceOf(double share, int n) => Math.Clamp((int)Math.Ceiling(share * n) - 1, 0, n - 1);

    /// <summary>The largest of the percentiles that the target is compared with, of all panels so far; null without a target.</summary>
    public double? Error() => plan.TargetError is null ? null : measures.Select(measure => measure.Of()).Append(0).Max();

    /// <summary>The same over the tables of rows, and the largest of the indices', of all panels so far; null where there is none.</summary>
    public (double? Rows, double? Index) Errors()
    {
        return (Largest(false), Largest(true));

        double? Largest(bool index) => measures.Where(measure => measure.IsIndex == index).Max(measure => (double?)measure.Of());
    }

    /// <summary>Decides after a panel, by probes and target.</summary>
    public void AfterPanel()
    {
        panels++;
        if (plan.TargetError is double target && panels >= FewestPanels && IsMet(target))
            Stopped = StoppedBy.Target;
        else if (panels == Math.Min(ProbePanel.CountFor(plan.MostProbes), plan.TrialPanels ?? int.MaxValue))
            Stopped = StoppedBy.Probes;
    }

    /// <summary>Whether another panel of solves before the next probes leaves time for the rest.</summary>
    /// <param name="batch">Seconds that the solves of the first batch took.</param>
    public bool MayDeflate(double batch) => plan.TimeBudget is not TimeSpan budget || plan.Probes is not null
        || Elapsed + batch + RunCost.SecondsAfter(network, plan, ProbePanel.Width) <= budget.TotalSeconds;

    /// <summary>Decides after a batch of panels, by the clock, unless the number of probes was asked for.</summary>
    /// <param name="next">Probes after another batch.</param>
    /// <param name="batch">Seconds that this one took, without a deflation.</param>
    /// <exception cref="BudgetException">Not even the first batch leaves time to write, nor would a tenth more.</exception>
    public void AfterBatch(int next, double batch)
    {
        if (plan.TimeBudget is not TimeSpan budget || plan.Probes is not null)
            return;
        bool first = lastBatch == 0;
        double now = Elapsed, after = RunCost.SecondsAfter(network, plan, panels * ProbePanel.Width);
        double audit = RunCost.AuditSeconds(plan, batch);
        // What is solved is worth a little more time than there is.
        if (first && now + RunCost.WritingSeconds(network, plan) > Overrun * budget.TotalSeconds)
            throw RunCost.TooLong(panels * ProbePanel.Width, now + after, budget, "use a larger budget");
        OutOfTime = now + after + audit > budget.TotalSeconds;
        double foreseen = now + (BatchMargin * Math.Max(batch, lastBatch)) + RunCost.SecondsAfter(network, plan, next) + (OutOfTime ? 0 : audit);
        if (foreseen > budget.TotalSeconds)
            Stopped ??= StoppedBy.Time;
        lastBatch = batch;
    }

    /// <summary>Whether a time budget leaves no time for an audit.</summary>
    public bool OutOfTime { get; private set; }

    private double Elapsed => Stopwatch.GetElapsedTime(begin).TotalSeconds;

    private bool IsMet(double target)
    {
        if (measures.Exists(measure => panels < measure.NotBefore))
            return false;
        foreach (Measure measure in measures)
        {
            double error = measure.Of();
            if (error < target)
                continue;
            if (!measure.IsIndex)
                measure.NotBefore = (int)Math.Min(int.MaxValue, ShareForetold * panels * (error / target) * (error / target));
            return false;
        }
        return true;
    }

    private IEnumerable<Estimate> IndexErrors(NodeSums nodes)
    {
        for (int c = 0; c < network.Components.Count && (c == 0 || network.Components[c].Nodes >= LeastShareOfNodes * network.NodeCount); c++)
        {
            if (!nodes.IsExact(c))
                yield return nodes.KirchhoffIndex(c, 0.5);
        }
    }

    private IEnumerable<Estimate> NodeErrors(NodeSums nodes)
    {
        Estimate[] diagonals = nodes.Diagonals(0);
        bool[] exact = [.. Enumerable.Range(0, network.Components.Count).Select(nodes.IsExact)];
        int[] componentOf = network.ComponentOfNodes();
        return Sample(network.NodeCount).Where(u => !exact[componentOf[u]]).Select(u => diagonals[u]);
    }

    private List<(long Link, long Arc, int U)> SampleLinks(Blocks blocks, ExactBlocks? exact)
    {
        List<(long, long, int)> sample = [];
        foreach (long link in Sample(network.LinkCount))
        {
            int u = network.NodeOfLink(link);
            long arc = network.FirstLaterArc(u) + (link - network.LinkStart[u]);
            if (!blocks.Bridges.Contains(link) && exact?.Has(blocks.BlockOf(u, network.Neighbours[arc])) != true)
                sample.Add((link, arc, u));
        }
        return sample;
    }

    private static IEnumerable<long> Sample(long count)
    {
        long rows = Math.Min(count, MostRows);
        for (long i = 0; i < rows; i++)
            yield return i * count / rows;
    }

    // A quantile of relative standard errors over some rows; 0 where there is none.
    private sealed record Measure(Func<IEnumerable<Estimate>> Rows, double Share)
    {
        // The index's error is known from as many samples as there are probes; all others fall as 1/sqrt(K), and foretell when to look again.
        public bool IsIndex { get; init; }

        public int NotBefore { get; set; }

        public double Of()
        {
            double[] errors = [.. Rows().Select(row => row.StandardError == 0 ? 0 : row.StandardError / row.Value)];
            Array.Sort(errors);
            return errors.Length == 0 ? 0 : errors[PlaceOf(Share, errors.Length)];
        }
    }
}
