// Panel kernels beside the bandwidth limit: bytes that must move at least once (panels in and out, adjacency once) over the bandwidth that
// a copy of a panel shows in the same run. Rows that a kernel gathers again and again count once, so a share of 1 means perfect reuse.
// Invariant: every time is the least of the same number of rounds, the copy's too.

using System.Diagnostics;
using ScaleResist.DataGen.Networks;
using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Bench;

internal static class TrafficTable
{
    private const int Rounds = 12;

    public static void Run()
    {
        Console.WriteLine("| network | nodes | links | kernel | ms | GB | share of the limit |");
        Console.WriteLine("| --- | --- | --- | --- | --- | --- | --- |");
        Rows("grid 1000 x 1000", new(Family.Grid, 1_000_000));
        Rows("small world 10^6, 3M links", new(Family.SmallWorld, 1_000_000));
        Rows("preferential 10^6, 8M links", new(Family.Preferential, 1_000_000, 8_000_000));
        Rows("power law 10M links", new(Family.PowerLaw, 1_000_000, 10_000_000));
    }

    private static void Rows(string name, FamilyPlan plan)
    {
        Network network = SolverBench.Generate(plan);
        Laplacian laplacian = network.Laplacian;
        SplitLaplacian split = SplitLaplacian.Of(laplacian);
        int n = network.Components[0].End;
        using Panel<float> b = new(n), x = new(n), r = new(n), p = new(n), q = new(n);
        ProbeKernels.Fill(network, 1, 0, 0xFFFF, b, 0, n);
        double panel = n * 64.0, arcs = (n * 16.0) + (4.0 * laplacian.RowStart[n]); // offsets, strengths, neighbours
        double split1 = (n * 20.0) + (2.0 * laplacian.RowStart[n]); // half of the neighbours, and where they part
        double copy = Least(() => Copy(b, r));
        double bandwidth = 2 * panel / copy;
        Print("copy", copy, 2 * panel);
        Print("multiply", Least(() => PanelKernels.Multiply(laplacian, b, q, 0, n)), (2 * panel) + arcs);
        Print("residual", Least(() => PanelKernels.Residual(laplacian, b, x, r, 0, n)), (3 * panel) + arcs);
        Print("Gauss-Seidel start", Least(() => GaussSeidelKernels.Start(split, b, r, 0, n, out _, out _)), (2 * panel) + split1);
        Print("Gauss-Seidel back", Least(() => GaussSeidelKernels.Back(split, r, p, q, default, 0, n)), (4 * panel) + split1);
        Print("Gauss-Seidel forward", Least(() => GaussSeidelKernels.Forward(split, x, r, p, q, default, 0, n)), (7 * panel) + split1);

        void Print(string kernel, double time, double bytes) => Console.WriteLine(
            $"| {name} | {n:N0} | {laplacian.RowStart[n] / 2:N0} | {kernel} | {time * 1e3:0.0} | {bytes / 1e9:0.000} "
            + $"| {bytes / bandwidth / time:0.00} |");
    }

    private static unsafe void Copy(Panel<float> from, Panel<float> to) =>
        Buffer.MemoryCopy(from.Pointer, to.Pointer, to.Rows * 64L, from.Rows * 64L);

    private static double Least(Action kernel)
    {
        double least = double.PositiveInfinity;
        for (int round = 0; round < Rounds; round++)
        {
            long begin = Stopwatch.GetTimestamp();
            kernel();
            least = Math.Min(least, Stopwatch.GetElapsedTime(begin).TotalSeconds);
        }
        return least;
    }
}
