// The frontier between accuracy and time of one network on this machine, from a whole run with few probes and a few panels as larger runs would solve them.
// Invariant: a trial of K probes is the beginning of the run of K probes: the same solver, tolerance and deflation, the same panels.
//
// Standard errors fall as 1/sqrt(K). Seconds of a run: what the whole run took but for its solves, what its code took to compile, the first batch of
// panels with its deflation, and a batch's seconds for each further one. Between two trials that took the same preconditioner and the same deflation
// nothing is tried: the iterations of a panel, and so a batch's seconds, are linear in log K.

using System.Diagnostics;
using ScaleResist.Estimating;
using ScaleResist.Graphs;
using ScaleResist.Solving;

namespace ScaleResist.Runs;

/// <summary>Finds the frontier.</summary>
public sealed class Frontier
{
    private const int Whole = EstimatePlan.DefaultProbes; // of the run that is done from end to end
    private const int FewestPanels = 4;
    private const int Batches = 3; // the first has the deflation
    private const double SecondsForExact = 20; // foreseen, that are spent on an exact run
    private const double AffordableSeconds = 3600;
    private const double SecondsOfEnd = 0.1; // record, rename, and the process's end

    // Powers of two from the whole run on.
    private static readonly int[] Ladder = [Whole, 128, 256, 512, 1024, 2048, EstimatePlan.LargestProbes];

    private readonly Network network;
    private readonly EstimatePlan plan;
    private readonly IRunObserver observer;
    private readonly CancellationToken cancel;
    private readonly Blocks blocks;
    private readonly Trial?[] trials = new Trial?[Ladder.Length];

    private Frontier(Network network, EstimatePlan plan, IRunObserver observer, CancellationToken cancel)
    {
        this.network = network;
        this.plan = plan;
        this.observer = observer;
        this.cancel = cancel;
        blocks = Blocks.Find(network);
    }

    /// <summary>Measures and foresees.</summary>
    /// <param name="network">The network.</param>
    /// <param name="plan">What is wanted; pairs are not. Its route and its probes are not looked at.</param>
    /// <param name="before">Seconds that a run takes before the network is in memory.</param>
    /// <param name="openTables">Takes the tables of a run that is done from end to end; called at most twice.</param>
    /// <param name="observer">Follows the phases.</param>
    /// <param name="cancel">Ends with an <see cref="OperationCanceledException"/>.</param>
    /// <returns>The points in order of predicted time.</returns>
    /// <exception cref="SolveException">A solve did not reach its tolerance.</exception>
    /// <exception cref="BudgetException">Not even a small run fits the memory budget.</exception>
    public static IReadOnlyList<FrontierPoint> Of(
        Network network, EstimatePlan plan, double before, Func<ITableSink> openTables, IRunObserver observer, CancellationToken cancel)
    {
        if (plan.Want.HasFlag(Want.Pairs) || (plan.Want & ~Want.Components) == 0)
            throw new ArgumentException("Pairs have no frontier here, and components have no error.", nameof(plan));
        EstimatePlan free = plan with { TargetError = null, TimeBudget = null };
        BatchClock clock = new(observer);
        long begin = Stopwatch.GetTimestamp();
        // Cold, as a run of its own would be: this comes first.
        EstimateSummary whole = EstimateRun.Execute(
            network, free with { Route = Route.Probe, Probes = Whole, TrialPanels = ProbePanel.CountFor(Whole) }, new EstimateInputs(), openTables(), clock, cancel);
        double seconds = Stopwatch.GetElapsedTime(begin).TotalSeconds;
        Frontier frontier = new(network, free, observer, cancel);
        List<FrontierPoint> points = [];
        if (whole.Probing is null) // a tree, exact at no cost
            points.Add(frontier.ExactPoint(before + seconds + SecondsOfEnd, before + seconds, RunCost.ProbedBytes(network, plan, Whole)));
        else
            points.AddRange(frontier.Probed(whole, before, seconds, clock.Ends));
        if (whole.Probing is not null && frontier.Exact(before, openTables) is FrontierPoint exact)
            points.Add(exact);
        return FrontierPoint.Mark(points);
    }

    private IEnumerable<FrontierPoint> Probed(EstimateSummary whole, double before, double seconds, IReadOnlyList<double> ends)
    {
        double PhaseOf(string name) => whole.Phases.Where(phase => phase.Name == name).Sum(phase => phase.Seconds);
        double preparing = PhaseOf("preparing"), auditing = PhaseOf("solving an audit");
        seconds -= PhaseOf("solving") - ends[^1]; // what the errors took to be measured
        trials[0] = Try(Whole);
        trials[^1] = Try(Ladder[^1]);
        Between(0, Ladder.Length - 1);
        Trial first = trials[0]!;
        double compiling = Math.Max(0, ends[^1] - first.Seconds(RoundsOf(Whole)));
        double rest = before + seconds - preparing - auditing - ends[^1] + compiling + SecondsOfEnd;
        foreach (int probes in Ladder)
        {
            Trial trial = At(probes);
            EstimatePlan own = plan with { Probes = probes };
            long bytes = RunCost.ProbedBytes(network, own, probes);
            if (bytes > plan.MemoryBudget)
                continue;
            bool run = probes == Whole;
            yield return new FrontierPoint
            {
                Route = Route.Probe,
                Probes = probes,
                PredictedError = trial.Rows / Math.Sqrt(probes),
                PredictedIndexError = trial.Index / Math.Sqrt(probes),
                AchievedError = run ? whole.TrialErrors.Rows : null,
                AchievedIndexError = run ? whole.TrialErrors.Index : null,
                PredictedSeconds = rest + (trial.Preconditioner == first.Preconditioner ? preparing : trial.Preparing)
                    + (auditing * AuditRounds(own) / AuditRounds(plan with { Probes = Whole })) + trial.Seconds(RoundsOf(probes))
                    + RunCost.CoordinateSeconds(network, plan, probes - Whole),
                AchievedSeconds = run ? before + seconds : null,
                PredictedBytes = bytes,
            };
        }

        int RoundsOf(int probes) => Rounds(ProbePanel.CountFor(probes));

        int AuditRounds(EstimatePlan own) => Rounds(ProbePanel.CountFor(Audit.CountFor(own)));

        int Rounds(int panels) => (panels + plan.Threads - 1) / plan.Threads;
    }

    private FrontierPoint? Exact(double before, Func<ITableSink> openTables)
    {
        if (plan.Want.HasFlag(Want.Coordinates))
            return null; // they are of probes
        observer.Begin("choosing a route", network.LinkCount, "links");
        long begin = Stopwatch.GetTimestamp();
        RouteChoice route = RouteChoice.Of(blocks, plan with { Route = Route.Auto, AffordableSeconds = AffordableSeconds }, cancel);
        double choosing = Stopwatch.GetElapsedTime(begin).TotalSeconds;
        observer.End();
        if (!route.AllExact || route.Forecast is not ExactForecast forecast)
            return null;
        double? achieved = null;
        if (forecast.Seconds <= SecondsForExact)
        {
            begin = Stopwatch.GetTimestamp();
            EstimateRun.Execute(network, plan with { Route = Route.Exact }, new EstimateInputs(), openTables(), observer, cancel);
            achieved = before + Stopwatch.GetElapsedTime(begin).TotalSeconds;
        }
        return ExactPoint(before + choosing + forecast.Seconds + SecondsOfEnd, achieved, forecast.Bytes);
    }

    private FrontierPoint ExactPoint(double seconds, double? achieved, long bytes)
    {
        double? rows = (plan.Want & (Want.Links | Want.Nodes)) == 0 ? null : 0, index = plan.Want.HasFlag(Want.Index) ? 0 : null;
        return new FrontierPoint
        {
            Route = Route.Exact,
            Probes = null,
            PredictedError = rows,
            PredictedIndexError = index,
            AchievedError = achieved is null ? null : rows,
            AchievedIndexError = achieved is null ? null : index,
            PredictedSeconds = seconds,
            AchievedSeconds = achieved,
            PredictedBytes = bytes,
        };
    }

    // Tries what lies between two trials that differ in more than their tolerance.
    private void Between(int low, int high)
    {
        int middle = (low + high) / 2;
        if (middle == low || trials[low]!.IsLike(trials[high]!))
            return;
        trials[middle] = Try(Ladder[middle]);
        Between(low, middle);
        Between(middle, high);
    }

    private Trial At(int probes)
    {
        int at = Array.IndexOf(Ladder, probes), low = at, high = at;
        while (trials[low] is null)
            low--;
        while (trials[high] is null)
            high++;
        return low == high ? trials[at]! : trials[low]!.Towards(trials[high]!, (double)(at - low) / (high - low));
    }

    private Trial Try(int probes)
    {
        int panels = Math.Min(ProbePanel.CountFor(probes), Math.Max(FewestPanels, Batches * plan.Threads));
        EstimatePlan own = plan with { Route = Route.Probe, Probes = probes, TrialPanels = panels };
        observer.Begin($"trying {probes} probes", panels * ProbePanel.Width, "probes");
        long begin = Stopwatch.GetTimestamp();
        LaplacianSolver solver = new(network, probes, plan.Seed, cancel);
        double preparing = Stopwatch.GetElapsedTime(begin).TotalSeconds;
        BatchClock clock = new(observer);
        clock.Start();
        ProbedEstimates sums = ProbedEstimates.Run(blocks, own, new EstimateInputs(), null, null, true, null, solver, clock, cancel);
        observer.End();
        double[] later = [.. clock.Ends.Zip(clock.Ends.Skip(1), (from, to) => to - from).Order()];
        double root = Math.Sqrt(panels * ProbePanel.Width);
        return new Trial(
            solver.Preconditioner, sums.Nodes?.DeflationSolves ?? 0, preparing, clock.Ends[0], later.Length == 0 ? 0 : later[(later.Length - 1) / 2],
            sums.Errors.Rows * root, sums.Errors.Index * root);
    }

    // Errors are those of one probe.
    private sealed record Trial(string Preconditioner, int DeflationSolves, double Preparing, double First, double Later, double? Rows, double? Index)
    {
        public bool IsLike(Trial other) => Preconditioner == other.Preconditioner && DeflationSolves == other.DeflationSolves;

        public double Seconds(int rounds) => First + ((rounds - 1) * Later);

        public Trial Towards(Trial other, double share) => this with
        {
            First = Mean(First, other.First, share),
            Later = Mean(Later, other.Later, share),
            Rows = Rows is null ? null : Mean(Rows.Value, other.Rows!.Value, share),
            Index = Index is null ? null : Mean(Index.Value, other.Index!.Value, share),
        };

        private static double Mean(double from, double to, double share) => from + (share * (to - from));
    }

    // When each batch of the phase "solving" was done, in seconds since it began.
    private sealed class BatchClock(IRunObserver view) : IRunObserver
    {
        private readonly List<double> ends = [];
        private bool solving;
        private long begin;

        public IReadOnlyList<double> Ends => ends;

        public void Start() => (solving, begin) = (true, Stopwatch.GetTimestamp());

        public void Begin(string phase, double? total, string unit)
        {
            view.Begin(phase, total, unit);
            if (phase == "solving")
                Start();
        }

        public void Report(double done)
        {
            if (solving)
                ends.Add(Stopwatch.GetElapsedTime(begin).TotalSeconds);
            view.Report(done);
        }

        public void End()
        {
            solving = false;
            view.End();
        }
    }
}
