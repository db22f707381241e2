// Rough prices of a run beside its solves: memory and writing. The rates are those of one processor; a factor of two is what they are for.

using System.Globalization;
using ScaleResist.Estimating;
using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Runs;

/// <summary>What a run costs, foreseen.</summary>
internal static class RunCost
{
    private const double SecondsPerLinkRow = 0.55e-6;
    private const double SecondsPerNodeRow = 1.6e-6;
    private const double SecondsPerCoordinate = 1e-8;
    private const double SecondsOfStepsPerArc = 1.2e-6; // around hubs; meshes a fraction
    private const double BytesForStepsUnlessSaid = 1.5e9; // two steps around fifty million links
    private const double ShareOfTimeForSteps = 0.1;
    private const double SecondsToEnd = 0.3;
    private const double Margin = 1.2;

    private const double RoomForRounds = 3;
    private const double BatchesOfAudit = 1.2;
    private const double BaseBytes = 200e6;
    private const int PanelsPerThread = 6; // right-hand sides, solutions, and those of an iteration
    private const int LossPanelsPerThread = 2; // signs on nodes, and their solutions
    private const double LinkBytes = 16;
    private const double LossBytes = 14;
    private const int DeflationPanels = 2; // directions, and their right-hand sides
    private const int WalkPanelCount = 3; // two walks, and what preparing keeps by node

    /// <summary>Seconds that writing the wanted tables takes.</summary>
    public static double WritingSeconds(Network network, EstimatePlan plan)
    {
        double nodeTables = (plan.Want.HasFlag(Want.Nodes) ? 1 : 0) + (plan.Want.HasFlag(Want.Components) ? 0.1 : 0);
        return (plan.Want.HasFlag(Want.Links) ? network.LinkCount * SecondsPerLinkRow : 0) + (nodeTables * network.NodeCount * SecondsPerNodeRow);
    }

    /// <summary>
    /// Panels to solve at a time. A panel takes about as long as preparing, side by side with others some half longer: where a time budget has no room
    /// for two rounds of them, one at a time wastes a thread, yet ends sooner.
    /// </summary>
    public static int PanelsAtOnce(Network network, EstimatePlan plan, double preparing) =>
        plan.TimeBudget is TimeSpan left && plan.Probes is null
            && left.TotalSeconds - SecondsAfter(network, plan, ProbePanel.Width) < RoomForRounds * preparing ? 1 : plan.Threads;

    /// <summary>Seconds to keep for what comes after the last probe, with a margin.</summary>
    public static double SecondsAfter(Network network, EstimatePlan plan, int probes) =>
        SecondsToEnd + (Margin * (WritingSeconds(network, plan) + CoordinateSeconds(network, plan, probes)));

    /// <summary>Seconds that an audit takes, from those of a batch of panels.</summary>
    public static double AuditSeconds(EstimatePlan plan, double batch) => (plan.Want & (Want.Links | Want.Pairs)) == 0 ? 0 : BatchesOfAudit * batch;

    /// <summary>Seconds that writing the coordinates of so many probes takes.</summary>
    public static double CoordinateSeconds(Network network, EstimatePlan plan, int probes) =>
        plan.Want.HasFlag(Want.Coordinates) ? SecondsPerCoordinate * network.NodeCount * probes : 0;

    /// <summary>Bytes of a network in memory, with what building it leaves and what is kept by node.</summary>
    public static double NetworkBytes(Network network) =>
        (2.0 * network.LinkCount * (network.Conductances is null ? 12 : 20)) + (120.0 * network.NodeCount);

    /// <summary>Peak resident memory of the probed route with so many probes.</summary>
    public static long ProbedBytes(Network network, EstimatePlan plan, int probes)
    {
        int slots = Math.Min(plan.Threads, ProbePanel.CountFor(plan.MostProbes));
        int deflation = (plan.Want & (Want.Index | Want.Nodes)) != 0 ? DeflationPanels : 0;
        bool losses = plan.Want.HasFlag(Want.Links);
        double panels = (double)((slots * (PanelsPerThread + (losses ? LossPanelsPerThread : 0))) + deflation) * network.NodeCount * Panel<float>.Width * sizeof(float);
        double coordinates = plan.Want.HasFlag(Want.Coordinates) ? (double)network.NodeCount * probes * sizeof(float) : 0;
        return (long)(BaseBytes + NetworkBytes(network) + (network.LinkCount * (LinkBytes + (losses ? LossBytes : 0))) + panels + coordinates);
    }

    /// <summary>
    /// Bytes that several steps around each link may take: what --memory-budget leaves beside one step, 1.5 GB without it, and none where preparing them would take
    /// more than a tenth of a time budget. Only these options decide, not the machine, so that results do not depend on where a plan runs.
    /// </summary>
    public static double BytesForSteps(Network network, EstimatePlan plan) =>
        plan.TimeBudget is TimeSpan time && 2.0 * network.LinkCount * SecondsOfStepsPerArc > ShareOfTimeForSteps * time.TotalSeconds ? 0
        : plan.MemoryBudget is long budget
        ? budget - ProbedBytes(network, plan, plan.ForeseenProbes) - (WalkPanelCount * 64.0 * network.NodeCount) : BytesForStepsUnlessSaid;

    /// <summary>Refuses the probed route where it is foreseen to need more memory than the budget.</summary>
    /// <exception cref="BudgetException">It does not fit.</exception>
    public static void CheckMemory(Network network, EstimatePlan plan, int probes)
    {
        long bytes = ProbedBytes(network, plan, probes);
        if (bytes > plan.MemoryBudget)
        {
            throw new BudgetException(string.Create(CultureInfo.InvariantCulture,
                $"{probes} probes need about {bytes / 1e9:0.0} GB, and --memory-budget is {plan.MemoryBudget / 1e9:0.0} GB; use fewer --threads, "
                + $"fewer tables in --want or a larger budget"));
        }
    }

    /// <summary>Refuses a named number of probes where, after the first batches of panels, the rest is foreseen to take longer than the budget.</summary>
    /// <param name="network">The network.</param>
    /// <param name="plan">The run's.</param>
    /// <param name="batches">Of panels, in all.</param>
    /// <param name="batch">Seconds of one.</param>
    /// <param name="once">Seconds spent once beside them, on compiling and deflating.</param>
    /// <exception cref="BudgetException">It does not fit.</exception>
    public static void CheckTime(Network network, EstimatePlan plan, int batches, double batch, double once)
    {
        if (plan.TimeBudget is not TimeSpan budget)
            return;
        double rest = once + AuditSeconds(plan, batch) + WritingSeconds(network, plan), all = (batches * batch) + rest;
        if (all <= budget.TotalSeconds)
            return;
        int affordable = (int)Math.Min(int.MaxValue, Math.Max(0, (budget.TotalSeconds - rest) / batch * plan.MostProbes / batches));
        throw TooLong(plan.MostProbes, all, budget, affordable >= 4 ? $"use --probes {affordable}, or a larger budget" : "use a larger budget");
    }

    /// <summary>That a number of probes does not fit the time left.</summary>
    public static BudgetException TooLong(int probes, double seconds, TimeSpan budget, string mend) => new(string.Create(CultureInfo.InvariantCulture,
        $"{probes} probes would take about {seconds:N1} s, and {budget.TotalSeconds:N1} s of --time-budget are left; {mend}"));
}
