// One table over network families: set-up apart, then milliseconds a right-hand side at a relative residual, 16 float columns at a time,
// against the same preconditioner one column at a time.

using System.Diagnostics;
using ScaleResist.DataGen.Networks;
using ScaleResist.Estimating;
using ScaleResist.Graphs;
using ScaleResist.Solving;

namespace ScaleResist.Bench;

internal static class SolverBench
{
    private static readonly (string Name, FamilyPlan Plan)[] Families =
    [
        ("grid 1000 x 1000", new(Family.Grid, 1_000_000)),
        ("road-like 10^6", new(Family.Road, 1_000_000)),
        ("cube 100^3", new(Family.Cube, 1_000_000)),
        ("small world 10^6", new(Family.SmallWorld, 1_000_000)),
        ("preferential 10^6, 8M links", new(Family.Preferential, 1_000_000, 8_000_000)),
        ("power law 10M links", new(Family.PowerLaw, 1_000_000, 10_000_000)),
    ];

    public static void Run(double tolerance, string? only)
    {
        Console.WriteLine("| network | nodes | links | core | set-up s | us a link | preconditioner | iterations | ms a right-hand side | 2 threads |");
        Console.WriteLine("| --- | --- | --- | --- | --- | --- | --- | --- | --- | --- |");
        foreach ((string name, FamilyPlan plan) in Families)
        {
            if (only is not null && !name.StartsWith(only, StringComparison.Ordinal))
                continue;
            EdgeListBuilder builder = new(weighted: plan.Decades > 0);
            NetworkGenerator.Generate(plan, new Sink(builder));
            Network network = NetworkBuilder.Build(
                builder.Finish(new InputFacts { Path = name, Form = "memory", Sha256 = "", Columns = ["1", "2"] }));
            long start = Stopwatch.GetTimestamp();
            LaplacianSolver solver = new(network);
            double setUp = Stopwatch.GetElapsedTime(start).TotalSeconds;
            double one = Time(network, solver, tolerance, 1), two = Time(network, solver, tolerance, 2);
            Console.WriteLine(
                $"| {name} | {network.NodeCount:N0} | {network.LinkCount:N0} | {network.NodeCount - solver.Eliminated:N0} | {setUp:0.00} | "
                + $"{setUp / network.LinkCount * 1e6:0.00} | {solver.Preconditioner} | {solver.Statistics.MostIterations} | {one:0.0} | {two:0.0} |");
        }
    }

    // The median over five solves of a panel a thread, in milliseconds a right-hand side.
    private static double Time(Network network, LaplacianSolver solver, double tolerance, int threads)
    {
        List<double> times = [];
        ProbePanel[] panels = [.. Enumerable.Range(0, threads).Select(_ => new ProbePanel(network, 7))];
        SolverWorkspace<float>[] workspaces = [.. panels.Select(_ => solver.NewWorkspace<float>())];
        for (int i = 0; i < threads; i++)
            panels[i].Draw(i, 16 * threads, 2);
        for (int round = 0; round < 5; round++)
        {
            long start = Stopwatch.GetTimestamp();
            Parallel.For(0, threads, new ParallelOptions { MaxDegreeOfParallelism = threads }, i =>
                solver.Solve(panels[i].B, panels[i].Z, 16, tolerance, workspaces[i], default));
            times.Add(Stopwatch.GetElapsedTime(start).TotalMilliseconds / (16 * threads));
        }
        foreach (ProbePanel panel in panels)
            panel.Dispose();
        foreach (SolverWorkspace<float> workspace in workspaces)
            workspace.Dispose();
        return times.Order().ElementAt(2);
    }

    private sealed class Sink(EdgeListBuilder builder) : ILinkSink
    {
        public void Link(long source, long target, double conductance) => builder.Add(source, target, conductance);
    }
}
