// What a network is and what an estimate of it would take, before one is made. Invariant: nothing is estimated; the forecast of the exact route
// comes from counts, that of the probed route from one panel, set up and solved.

using System.Diagnostics;
using ScaleResist.Estimating;
using ScaleResist.Graphs;
using ScaleResist.Solving;

namespace ScaleResist.Runs;

/// <summary>What the probed route would take.</summary>
/// <param name="Probes">How many.</param>
/// <param name="Preconditioner">Of the largest component.</param>
/// <param name="Reason">Why it was chosen.</param>
/// <param name="Eliminated">Nodes eliminated exactly before anything iterates.</param>
/// <param name="Iterations">Of the panel that was tried.</param>
/// <param name="Seconds">Of the whole run after reading.</param>
/// <param name="Bytes">Peak resident memory.</param>
public sealed record ProbeForecast(
    int Probes, string Preconditioner, string Reason, long Eliminated, int Iterations, double Seconds, long Bytes);

/// <summary>The survey of a network.</summary>
public sealed record NetworkSurvey
{
    /// <summary>Least number of neighbours of a node.</summary>
    public required int LeastDegree { get; init; }

    /// <summary>Most neighbours of a node.</summary>
    public required int MostDegree { get; init; }

    /// <summary>Smallest conductance of a link; 0 without links.</summary>
    public required double LeastConductance { get; init; }

    /// <summary>Largest conductance of a link; 0 without links.</summary>
    public required double MostConductance { get; init; }

    /// <summary>Blocks that are no bridges.</summary>
    public required int Blocks { get; init; }

    /// <summary>Bridges.</summary>
    public required int Bridges { get; init; }

    /// <summary>Nodes whose loss splits their component.</summary>
    public required int CutNodes { get; init; }

    /// <summary>Nodes of the block of most links.</summary>
    public required int LargestBlockNodes { get; init; }

    /// <summary>Links of the block of most links.</summary>
    public required int LargestBlockLinks { get; init; }

    /// <summary>Blocks that the automatic route leaves to the probes.</summary>
    public required int ProbedBlocks { get; init; }

    /// <summary>What the exact part would take; null where no block but bridges is affordable.</summary>
    public required ExactForecast? Exact { get; init; }

    /// <summary>What the probed route would take.</summary>
    public required ProbeForecast Probe { get; init; }

    /// <summary>Whether the automatic route leaves nothing to the probes.</summary>
    public bool IsExact => ProbedBlocks == 0;

    /// <summary>Surveys a network.</summary>
    /// <param name="network">The network.</param>
    /// <param name="plan">The estimate to foresee; its route is taken for automatic.</param>
    /// <param name="observer">Follows the phases.</param>
    /// <param name="cancel">Ends the survey.</param>
    public static NetworkSurvey Of(Network network, EstimatePlan plan, IRunObserver observer, CancellationToken cancel)
    {
        observer.Begin("finding blocks", network.LinkCount, "links");
        Blocks blocks = Graphs.Blocks.Find(network);
        observer.End();
        observer.Begin("choosing a route", network.LinkCount, "links");
        RouteChoice route = RouteChoice.Of(blocks, plan with { Route = Route.Auto }, cancel);
        observer.End();
        observer.Begin("trying a panel", ProbePanel.Width, "probes");
        ProbeForecast probe = Try(network, blocks, plan, cancel);
        observer.End();
        int largest = 0, several = 0;
        for (int b = 0; b < blocks.Count; b++)
        {
            largest = blocks.LinksOf(b) > blocks.LinksOf(largest) ? b : largest;
            several += blocks.IsBridge(b) ? 0 : 1;
        }
        (double least, double most) = Range(network);
        return new NetworkSurvey
        {
            LeastDegree = Enumerable.Range(0, network.NodeCount).Min(network.Degree),
            MostDegree = Enumerable.Range(0, network.NodeCount).Max(network.Degree),
            LeastConductance = least,
            MostConductance = most,
            Blocks = several,
            Bridges = blocks.Bridges.Count,
            CutNodes = blocks.CutNodes,
            LargestBlockNodes = blocks.Count == 0 ? 0 : blocks.NodesOf(largest),
            LargestBlockLinks = blocks.Count == 0 ? 0 : blocks.LinksOf(largest),
            ProbedBlocks = route.Probed.Count(left => left),
            Exact = route.Forecast,
            Probe = probe,
        };
    }

    private static (double Least, double Most) Range(Network network)
    {
        if (network.LinkCount == 0)
            return (0, 0);
        return network.Conductances is { } c ? (c.Min(), c.Max()) : (1, 1);
    }

    // One panel on one thread, with all that is done with it; the run has a panel a thread.
    private static ProbeForecast Try(Network network, Blocks blocks, EstimatePlan plan, CancellationToken cancel)
    {
        long begin = Stopwatch.GetTimestamp();
        LaplacianSolver solver = new(network, plan.ForeseenProbes, plan.Seed, cancel);
        double prepared = Stopwatch.GetElapsedTime(begin).TotalSeconds;
        begin = Stopwatch.GetTimestamp();
        ProbedEstimates.Run(
            blocks, plan with { Probes = ProbePanel.Width, ModeError = plan.ModeErrorOf(0), TimeBudget = null }, new EstimateInputs(), null, null,
            true, null, solver, new Silent(), cancel);
        double panel = Stopwatch.GetElapsedTime(begin).TotalSeconds;
        int panels = ProbePanel.CountFor(plan.ForeseenProbes), rounds = (panels + plan.Threads - 1) / plan.Threads;
        return new ProbeForecast(
            plan.ForeseenProbes, solver.Preconditioner, solver.Reason, solver.Eliminated, solver.Statistics.MostIterations,
            prepared + (rounds * panel) + RunCost.WritingSeconds(network, plan), RunCost.ProbedBytes(network, plan, plan.ForeseenProbes));
    }

    private sealed class Silent : IRunObserver
    {
        public void Begin(string phase, double? total, string unit)
        {
        }

        public void Report(double done)
        {
        }

        public void End()
        {
        }
    }
}
