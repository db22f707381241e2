// The set-up of the sampled factor by phase, and what a factor of 1, 2 or 3 samples an entry is worth: steps and time of a solve on the core.
// Invariant: set-up is measured the first time, when memory is new, and again; solves are the least of a few rounds. The trial is not in it.

using System.Diagnostics;
using ScaleResist.DataGen.Networks;
using ScaleResist.Graphs;
using ScaleResist.Kernels;
using ScaleResist.Solving;

namespace ScaleResist.Bench;

internal static class SetUpBench
{
    private const int Rounds = 3;
    private const double Reduction = 1e-4; // of r'M r: an energy-norm error of about 1e-2

    private static readonly (string Name, FamilyPlan Plan)[] Families =
    [
        ("grid 1000 x 1000", new(Family.Grid, 1_000_000)),
        ("road-like 10^6", new(Family.Road, 1_000_000)),
        ("cube 100^3", new(Family.Cube, 1_000_000)),
    ];

    public static void Run(string? only)
    {
        Console.WriteLine("| network | samples | first s | again s | us a link | eliminate | core | factor | renumber | entries a node | steps | ms a rhs |");
        Console.WriteLine(string.Concat(Enumerable.Repeat("| --- ", 12)) + "|");
        foreach ((string name, FamilyPlan plan) in Families)
        {
            if (only is not null && !name.StartsWith(only, StringComparison.Ordinal))
                continue;
            Network network = SolverBench.Generate(plan);
            for (int samples = 1; samples <= 3; samples++)
                Row(name, network, samples);
        }
    }

    private static void Row(string name, Network network, int samples)
    {
        GC.Collect();
        double first = SetUp(network, samples, out _, out _).Sum();
        GC.Collect();
        double[] again = SetUp(network, samples, out Laplacian core, out SampledFactor factor);
        (int steps, double time) = Solve(core, factor);
        Console.WriteLine($"| {name} | {samples} | {first:0.00} | {again.Sum():0.00} | {again.Sum() / network.LinkCount * 1e6:0.00} "
            + $"| {string.Join(" | ", again.Select(seconds => $"{seconds:0.00}"))} "
            + $"| {factor.Successors.Length / (double)core.NodeCount:0.0} | {steps} | {time:0.0} |");
    }

    // Seconds by phase.
    private static double[] SetUp(Network network, int samples, out Laplacian core, out SampledFactor factor)
    {
        long begin = Stopwatch.GetTimestamp();
        Elimination elimination = Elimination.Of(network.Laplacian, network.Components[0]);
        long eliminated = Stopwatch.GetTimestamp();
        core = elimination.BuildCore();
        long built = Stopwatch.GetTimestamp();
        factor = SampledFactor.Of(core, samples, seed: 1);
        long factorised = Stopwatch.GetTimestamp();
        core = ComponentSolver.Renumbered(core, factor.Order);
        long end = Stopwatch.GetTimestamp();
        long[] at = [begin, eliminated, built, factorised, end];
        return [.. Enumerable.Range(0, 4).Select(i => Stopwatch.GetElapsedTime(at[i], at[i + 1]).TotalSeconds)];
    }

    private static (int Steps, double Milliseconds) Solve(Laplacian core, SampledFactor factor)
    {
        int n = core.NodeCount;
        using Panel<float> b = new(n), x = new(n);
        using GradientWorkspace<float> workspace = new(n);
        SolveReport report = new();
        for (int u = 0; u < n; u++)
        {
            Bits128 bits = Philox.Block((uint)u, 0, 0, 1, 5);
            for (int lane = 0; lane < Panel<float>.Width; lane++)
                b.Row(u)[lane] = (bits.Low >> lane & 1) == 0 ? 1 : -1;
        }
        PanelKernels.Centre(b, 0, n);
        double least = double.PositiveInfinity;
        for (int round = 0; round < Rounds; round++)
        {
            long begin = Stopwatch.GetTimestamp();
            ConjugateGradient.Solve(
                new SampledElimination<float>(core, factor), b, x, workspace, 0, n, default, new SolveLimits(0, 500, Reduction), report, default);
            least = Math.Min(least, Stopwatch.GetElapsedTime(begin).TotalMilliseconds / Panel<float>.Width);
        }
        return (report.Iterations, least);
    }
}
