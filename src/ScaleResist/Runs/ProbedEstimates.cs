// The probed route: draws panels, solves them side by side, and adds each to the sums in the order of its number.
// Invariant: results depend on network, seed and number of probes; not on threads. A panel solved beyond the last one wanted is not added.

using System.Diagnostics;
using ScaleResist.Estimating;
using ScaleResist.Graphs;
using ScaleResist.Solving;

namespace ScaleResist.Runs;

/// <summary>What a finished set of panels has left behind.</summary>
internal sealed class ProbedEstimates
{
    public LinkSums? Links { get; init; }

    /// <summary>What the loss of links takes, where links are wanted.</summary>
    public LossSums? Losses { get; init; }

    public NodeSums? Nodes { get; init; }

    public PairSums? Pairs { get; init; }

    public Coordinates? Coordinates { get; init; }

    /// <summary>The mode error of the first panel, as a check by a second solve found it; null where a time budget left no time for one.</summary>
    public double? SolverError { get; private set; }

    /// <summary>How many probes there were, and why not more.</summary>
    public ProbingFacts? Facts { get; private set; }

    /// <summary>Whether a time budget leaves no time for an audit.</summary>
    public bool OutOfTime { get; private set; }

    /// <summary>Of a trial: the percentile of relative standard errors over the tables of rows, and the index's; null where there is none.</summary>
    public (double? Rows, double? Index) Errors { get; private set; }

    /// <summary>Draws, solves and adds the panels of a plan: all, or as many as target and time ask for.</summary>
    /// <param name="blocks">Of the network.</param>
    /// <param name="plan">What is wanted of the probes.</param>
    /// <param name="inputs">Pairs and node weights.</param>
    /// <param name="exact">Blocks that need no probes, or null.</param>
    /// <param name="exactPairs">Pairs that need none, or null.</param>
    /// <param name="links">Whether links are probed.</param>
    /// <param name="audited">Pairs of an audit, which take every panel too; or null.</param>
    /// <param name="solver">Prepared for the network.</param>
    /// <param name="observer">Hears of every batch.</param>
    /// <param name="cancel">Ends the run.</param>
    public static ProbedEstimates Run(
        Blocks blocks,
        EstimatePlan plan,
        EstimateInputs inputs,
        ExactBlocks? exact,
        ExactPairs? exactPairs,
        bool links,
        PairSums? audited,
        LaplacianSolver solver,
        IRunObserver observer,
        CancellationToken cancel)
    {
        Network network = blocks.Network;
        ProbedEstimates sums = new()
        {
            Links = links ? new LinkSums(
                network, blocks.Bridges, LinkSteps.Of(network, RunCost.BytesForSteps(network, plan), plan.Threads, cancel)) : null,
            Losses = links && plan.Want.HasFlag(Want.Links) ? new LossSums(network, blocks.Bridges) : null,
            Nodes = (plan.Want & (Want.Index | Want.Nodes)) != 0 ? new NodeSums(blocks, inputs.NodeWeights, exact) : null,
            Pairs = plan.Want.HasFlag(Want.Pairs) ? new PairSums(network, blocks.Bridges, inputs.Pairs ?? [], exactPairs) : null,
            Coordinates = plan.Want.HasFlag(Want.Coordinates) ? new Coordinates(network) : null,
        };
        ProbeDial dial = new(blocks, plan, sums, exact);
        sums.Pairs?.SolveFew(solver, plan.ForeseenProbes, plan.Threads, cancel);
        int panels = ProbePanel.CountFor(plan.MostProbes), added = 0;
        Slot[] slots = new Slot[Math.Min(plan.PanelsAtOnce ?? plan.Threads, panels)];
        try
        {
            for (int i = 0; i < slots.Length; i++)
                slots[i] = new Slot(
                    new ProbePanel(network, plan.Seed), sums.Losses is null ? null : new NodeSignPanel(network, plan.Seed),
                    solver.NewWorkspace<float>());
            long begin = Stopwatch.GetTimestamp();
            for (int first = 0; dial.Stopped is null; first += slots.Length)
            {
                int count = Math.Min(slots.Length, panels - first);
                long batch = Stopwatch.GetTimestamp();
                for (int i = 0; i < count; i++)
                {
                    slots[i].Panel.Draw(first + i, plan.MostProbes, plan.Threads);
                    slots[i].Signs?.Draw(first + i, plan.MostProbes, plan.Threads);
                }
                SolveBatch(count);
                double solved = Stopwatch.GetElapsedTime(batch).TotalSeconds;
                double deflating = first == 0 ? sums.AddFirst(network, slots[0], plan, solver, () => dial.MayDeflate(solved), cancel) : 0;
                if (sums.Coordinates is not null)
                    RunCost.CheckMemory(network, plan, added + (count * ProbePanel.Width));
                for (int i = 0; i < count && dial.Stopped is null; i++)
                {
                    sums.Add(slots[i].Panel, slots[i].Signs, first + i > 0, plan.Threads);
                    audited?.Add(slots[i].Panel);
                    dial.ForCoordinates?.Add(slots[i].Panel);
                    added += slots[i].Panel.Probes;
                    dial.AfterPanel();
                }
                // The first batch compiles: where there is another, that one foretells the rest.
                if (plan.Probes is not null && first == (panels > slots.Length ? slots.Length : 0))
                {
                    double seconds = Stopwatch.GetElapsedTime(batch).TotalSeconds - deflating;
                    double once = Stopwatch.GetElapsedTime(begin).TotalSeconds - (((first / slots.Length) + 1) * seconds);
                    RunCost.CheckTime(network, plan, (panels + slots.Length - 1) / slots.Length, seconds, once);
                }
                dial.AfterBatch(Math.Min(plan.MostProbes, added + (slots.Length * ProbePanel.Width)), Stopwatch.GetElapsedTime(batch).TotalSeconds - deflating);
                observer.Report(added);
            }
            sums.OutOfTime = dial.OutOfTime;
            if (plan.TrialPanels is not null)
                sums.Errors = dial.Errors();
            sums.Facts = new ProbingFacts
            {
                Probes = added,
                StoppedBy = dial.Stopped!.Value.ToString().ToLowerInvariant(),
                TargetError = plan.TargetError,
                RelativeStandardError = dial.Error(),
            };
        }
        finally
        {
            sums.Links?.Complete();
            foreach (Slot? slot in slots)
                slot?.Dispose();
        }
        return sums;

        void SolveBatch(int count) => Together(
            [.. slots.Take(count).Select<Slot, Action>(slot => () => slot.Solve(solver, plan.ModeErrorOf(slot.Panel.Number), cancel))], plan.Threads);
    }

    // The first panel's check and its nodes; both, and a deflation, are once for all panels: the seconds they took are not a batch's.
    private double AddFirst(
        Network network, Slot slot, EstimatePlan plan, LaplacianSolver solver, Func<bool> mayTakeTime, CancellationToken cancel)
    {
        long begin = Stopwatch.GetTimestamp();
        if (mayTakeTime())
            SolverError = SolveCheck.ModeError(network, slot.Panel, solver, slot.Workspace, plan.Threads, cancel);
        Nodes?.AddFirst(slot.Panel, plan.ForeseenProbes, solver, slot.Workspace, plan.Seed, plan.Threads, cancel, mayTakeTime);
        return Stopwatch.GetElapsedTime(begin).TotalSeconds;
    }

    private void Add(ProbePanel panel, NodeSignPanel? signs, bool nodes, int threads)
    {
        if (signs is not null)
            Losses!.Add(panel, signs, threads);
        Links?.Add(panel, threads);
        if (nodes)
            Nodes?.Add(panel, threads);
        Pairs?.Add(panel);
        Coordinates?.Add(panel);
    }

    // Parallel.Invoke wraps what is thrown; the first error is the one to tell.
    private static void Together(List<Action> work, int threads)
    {
        try
        {
            Parallel.Invoke(new ParallelOptions { MaxDegreeOfParallelism = threads }, [.. work]);
        }
        catch (AggregateException several)
        {
            System.Runtime.ExceptionServices.ExceptionDispatchInfo.Throw(several.Flatten().InnerExceptions[0]);
        }
    }

    private sealed record Slot(ProbePanel Panel, NodeSignPanel? Signs, SolverWorkspace<float> Workspace) : IDisposable
    {
        public void Solve(LaplacianSolver solver, double error, CancellationToken cancel)
        {
            Panel.Solve(solver, error, Workspace, cancel);
            if (Signs is not null)
                solver.SolveProbes(Signs.B, Signs.X, Signs.Probes, error, Workspace, cancel);
        }

        public void Dispose()
        {
            Panel.Dispose();
            Signs?.Dispose();
            Workspace.Dispose();
        }
    }
}
