// The probed route: draws panels, solves them side by side, and adds each to the sums in the order of its number.
// Invariant: results depend on network, seed and number of probes; not on threads.

using ScaleResist.Estimating;
using ScaleResist.Graphs;
using ScaleResist.Solving;

namespace ScaleResist.Runs;

/// <summary>What a finished set of panels has left behind.</summary>
internal sealed class ProbedEstimates
{
    public required LinkSums Links { get; init; }

    public NodeSums? Nodes { get; init; }

    public PairSums? Pairs { get; init; }

    public Coordinates? Coordinates { get; init; }

    public StrengthForms? Forms { get; private set; }

    /// <summary>Draws, solves and adds all panels of a plan.</summary>
    public static ProbedEstimates Run(
        Network network,
        Bridges bridges,
        EstimatePlan plan,
        EstimateInputs inputs,
        LaplacianSolver solver,
        IRunObserver observer,
        CancellationToken cancel)
    {
        ProbedEstimates sums = new()
        {
            Links = new LinkSums(network, bridges),
            Nodes = (plan.Want & (Want.Index | Want.Nodes)) != 0 ? new NodeSums(network, inputs.NodeWeights) : null,
            Pairs = plan.Want.HasFlag(Want.Pairs) ? new PairSums(network, bridges, inputs.Pairs ?? []) : null,
            Coordinates = plan.Want.HasFlag(Want.Coordinates) ? new Coordinates(network, plan.Probes) : null,
        };
        sums.Pairs?.SolveFew(solver, plan.Probes, plan.Threads, cancel);
        int panels = ProbePanel.CountFor(plan.Probes);
        bool forms = plan.Want.HasFlag(Want.Index);
        Slot[] slots = new Slot[Math.Min(plan.Threads, panels)];
        try
        {
            for (int i = 0; i < slots.Length; i++)
                slots[i] = new Slot(new ProbePanel(network, plan.Seed), solver.NewWorkspace<float>());
            for (int first = 0; first < panels; first += slots.Length)
            {
                int count = Math.Min(slots.Length, panels - first);
                List<Action> work = [];
                for (int i = 0; i < count; i++)
                {
                    (Slot slot, int number) = (slots[i], first + i);
                    slot.Panel.Draw(number, plan.Probes, plan.Threads);
                    work.Add(() => solver.SolveProbes(
                        slot.Panel.B, slot.Panel.Z, slot.Panel.Probes, plan.EffectiveModeError, slot.Workspace, cancel));
                }
                // The forms ride along with the last batch, which may have a thread to spare.
                if (forms && first + count == panels)
                    work.Add(() => sums.Forms = StrengthForms.Solve(network, inputs.NodeWeights, solver, cancel));
                Together(work, plan.Threads);
                for (int i = 0; i < count; i++)
                    sums.Add(slots[i].Panel, plan.Threads);
                observer.Report(sums.Links.Probes);
            }
        }
        finally
        {
            foreach (Slot? slot in slots)
                slot?.Dispose();
        }
        return sums;
    }

    private void Add(ProbePanel panel, int threads)
    {
        Links.Add(panel, threads);
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

    private sealed record Slot(ProbePanel Panel, SolverWorkspace<float> Workspace) : IDisposable
    {
        public void Dispose()
        {
            Panel.Dispose();
            Workspace.Dispose();
        }
    }
}
