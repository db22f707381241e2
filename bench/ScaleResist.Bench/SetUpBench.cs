// The set-up of the sampled factor by phase, and what a factor of 1, 2 or 3 samples an entry is worth in iterations and in time.
// Times are the least of a few rounds.

using System.Diagnostics;
using ScaleResist.DataGen.Networks;
using ScaleResist.Graphs;
using ScaleResist.Kernels;
using ScaleResist.Solving;

namespace ScaleResist.Bench;

internal static class SetUpBench
{
    public static void Run(string family, int nodes, double decades, int most, int rounds)
    {
        Network network = SolverBench.Generate(new(Enum.Parse<Family>(family, ignoreCase: true), nodes, Decades: decades));
        int links = (int)Math.Max(1, network.LinkCount);
        for (int samples = 1; samples <= most; samples++)
        {
            double[] best = [9e9, 9e9, 9e9, 9e9];
            SampledFactor factor = null!;
            Laplacian core = null!, renumbered = null!;
            for (int round = 0; round < rounds; round++)
            {
                GC.Collect();
                long t0 = Stopwatch.GetTimestamp();
                Elimination elimination = Elimination.Of(network.Laplacian, network.Components[0]);
                long t1 = Stopwatch.GetTimestamp();
                core = elimination.BuildCore();
                long t2 = Stopwatch.GetTimestamp();
                factor = SampledFactor.Of(core, samples, 1);
                long t3 = Stopwatch.GetTimestamp();
                renumbered = ComponentSolver.Renumbered(core, factor.Order);
                long t4 = Stopwatch.GetTimestamp();
                long[] at = [t0, t1, t2, t3, t4];
                for (int i = 0; i < 4; i++)
                    best[i] = Math.Min(best[i], Stopwatch.GetElapsedTime(at[i], at[i + 1]).TotalSeconds);
            }
            (int iterations, double ms) = Iterate(renumbered, factor, 1e-4, rounds);
            (int deep, _) = Iterate(renumbered, factor, 1e-10, 1);
            Console.WriteLine($"{family} n {network.NodeCount} m {links} core {core.NodeCount}: {samples} samples: eliminate {best[0]:0.000} core {best[1]:0.000} "
                + $"factor {best[2]:0.000} renumber {best[3]:0.000} all {best.Sum():0.00} s = {best.Sum() / links * 1e6:0.00} us a link; "
                + $"entries/node {factor.Successors.Length / (double)core.NodeCount:0.00}; {iterations} iterations, {ms:0.0} ms a rhs; {deep} iterations to 1e-10");
        }
    }

    private static (int, double) Iterate(Laplacian core, SampledFactor factor, double energy, int rounds)
    {
        int n = core.NodeCount;
        if (n == 1)
            return (0, 0);
        using Panel<float> b = new(n), x = new(n);
        using GradientWorkspace<float> workspace = new(n);
        SolveReport report = new();
        for (int u = 0; u < n; u++)
        {
            Bits128 bits = Philox.Block((uint)u, 0, 0, 1, 5);
            for (int lane = 0; lane < 16; lane++)
                b.Row(u)[lane] = (bits.Low >> lane & 1) == 0 ? 1 : -1;
        }
        PanelKernels.Centre(b, 0, n);
        double best = 9e9;
        for (int round = 0; round < rounds; round++)
        {
            long begin = Stopwatch.GetTimestamp();
            ConjugateGradient.Solve(core, new SampledElimination<float>(factor), b, x, workspace, 0, n, default, new SolveLimits(0, 500, energy), report, default);
            best = Math.Min(best, Stopwatch.GetElapsedTime(begin).TotalMilliseconds / 16);
        }
        return (report.Iterations, best);
    }
}
