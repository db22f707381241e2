// The true error of probed links in a large network: random ones among them, solved to certified bounds.
// Invariant: links are drawn by a fixed seed from those that are no bridges, after the estimate and independently of it.

using System.Diagnostics;
using ScaleResist.Estimating;
using ScaleResist.Graphs;
using ScaleResist.Runs;
using ScaleResist.Solving;

namespace ScaleResist.Bench;

internal static class LinkErrorBench
{
    private const int Seed = 3;

    public static void Run(string file, int probes, int links)
    {
        Network network = NetworkBuilder.Build(EdgeListReader.Read(file, new ReadOptions { Weights = WeightMeaning.None }));
        Blocks blocks = Blocks.Find(network);
        Random random = new(Seed);
        SortedSet<long> drawn = [];
        while (drawn.Count < links)
        {
            long link = random.NextInt64(network.LinkCount);
            if (!blocks.Bridges.Contains(link))
                drawn.Add(link);
        }
        EstimatePlan plan = new() { Route = Route.Probe, Probes = probes, Want = Want.Links };
        LaplacianSolver solver = new(network, probes, plan.Seed);
        ProbedEstimates sums = ProbedEstimates.Run(
            blocks, plan, new EstimateInputs(), null, null, true, null, solver, new NoObserver(), default);
        using (ProbePanel panel = new(network, plan.Seed))
        using (SolverWorkspace<float> workspace = solver.NewWorkspace<float>())
        {
            panel.Draw(0, probes, plan.Threads);
            long first = Stopwatch.GetTimestamp();
            panel.Solve(solver, plan.ModeErrorOf(0), workspace, default);
            long second = Stopwatch.GetTimestamp();
            double error = SolveCheck.ModeError(network, panel, solver, workspace, plan.Threads, default);
            Console.WriteLine($"a panel: {Stopwatch.GetElapsedTime(first, second).TotalSeconds:0.00} s on one thread; its check: "
                + $"{Stopwatch.GetElapsedTime(second).TotalSeconds:0.00} s, mode error {error:0.0e+0}, allowed {plan.ModeErrorOf(0):0.0e+0}");
        }
        LinkResistances resistances = new(network, blocks.Bridges, sums.Links!, plan.Confidence);
        LinkResult[] found = [.. drawn.Select(link => One(resistances, link))];
        long begin = Stopwatch.GetTimestamp();
        CertifiedPairs truth = CertifiedPairs.Solve(network, solver, [.. found.Select(link => (link.Source, link.Target))], plan.Threads, default, 1e-5);
        double squares = 0, claimed = 0, widest = 0;
        int held = 0;
        for (int i = 0; i < found.Length; i++)
        {
            Estimate r = found[i].Resistance;
            squares += Math.Pow((r.Value / truth[i].Middle) - 1, 2);
            claimed += Math.Pow(r.StandardError / r.Value, 2);
            widest = Math.Max(widest, truth[i].RelativeWidth);
            held += truth[i].Middle >= r.Lower && truth[i].Middle <= r.Upper ? 1 : 0;
        }
        Console.WriteLine($"{Path.GetFileName(file)}: {network.NodeCount:N0} nodes, {network.LinkCount:N0} links, {probes} probes; {links} random links that are "
            + $"no bridges, certified to {widest:0.0e+0} in {Stopwatch.GetElapsedTime(begin).TotalSeconds:0} s: root-mean-square relative error "
            + $"{100 * Math.Sqrt(squares / links):0.00} %, claimed {100 * Math.Sqrt(claimed / links):0.00} %, {100.0 * held / links:0.0} % of 95 % intervals hold");
    }

    private static LinkResult One(LinkResistances resistances, long link)
    {
        Span<LinkResult> one = stackalloc LinkResult[1];
        resistances.Fill(link, one);
        return one[0];
    }
}
