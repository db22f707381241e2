// The exact route by phase on networks whose factor is affordable: order, analysis, factorisation, selected inverse, then panel solves.
// Invariant: a phase's times are the least of the rounds, with the first round, when memory and code are new, in brackets; every phase takes what
// the one before made in the same round. The resistances of the links add up to n - 1 (Foster 1949), or the bench ends with an error.

using System.Diagnostics;
using System.Runtime.InteropServices;
using ScaleResist.DataGen.Networks;
using ScaleResist.Graphs;
using ScaleResist.Kernels;
using ScaleResist.Solving;

namespace ScaleResist.Bench;

internal static class ExactBench
{
    private const int Order = 0, Analysis = 1, Factorisation = 2, Inverse = 3, Doubles = 4, Floats = 5, Phases = 6;

    private static readonly (string Key, string Name, FamilyPlan Plan, int Rounds)[] Families =
    [
        ("grid", "grid 1000 x 1000", new(Family.Grid, 1_000_000), 3),
        ("torus", "torus 1000 x 1000", new(Family.Torus, 1_000_000), 3),
        ("road", "road-like 10^6", new(Family.Road, 1_000_000), 3),
        ("road5", "road-like 5*10^6", new(Family.Road, 5_000_000), 1),
    ];

    public static void Run(string? only)
    {
        Console.WriteLine($"{RuntimeInformation.FrameworkDescription}, {Environment.ProcessorCount} cores. Seconds and milliseconds, the least of the "
            + "rounds (in brackets the first); one thread / two threads. Memory is the peak of the process so far.\n");
        Console.WriteLine("| network | nodes | links | order s | analysis s | factorisation s | selected inverse s | entries a node "
            + "| Gflop, factorisation + inverse | Gflop/s | 8 doubles, ms a rhs | 16 floats, ms a rhs | peak resident MB |");
        Console.WriteLine(string.Concat(Enumerable.Repeat("| --- ", 13)) + "|");
        foreach ((string key, string name, FamilyPlan plan, int rounds) in Families)
        {
            if (only is null || only == key)
                Row(name, SolverBench.Generate(plan), rounds);
        }
    }

    private static void Row(string name, Network network, int rounds)
    {
        double[][] one = [.. Enumerable.Range(0, rounds).Select(round => Round(network, 1, out _))];
        SymbolicCholesky symbolic = null!;
        double[][] two = [.. Enumerable.Range(0, rounds).Select(round => Round(network, 2, out symbolic))];
        double flop = symbolic.Operations / 1e9, all = flop + (symbolic.InversionOperations / 1e9);
        Console.WriteLine($"| {name} | {network.NodeCount:N0} | {network.LinkCount:N0} | {Both(Order)} | {One(Analysis)} | {Both(Factorisation)} "
            + $"| {Both(Inverse)} | {symbolic.Entries / (double)network.NodeCount:0.0} | {flop:0.0} + {all - flop:0.0} "
            + $"| {flop / Least(one, Factorisation):0.0} | {One(Doubles)} | {One(Floats)} "
            + $"| {Process.GetCurrentProcess().PeakWorkingSet64 / 1e6:N0} |");

        string One(int phase) => $"{Least(one, phase):0.00} ({one[0][phase]:0.00})";
        string Both(int phase) => $"{One(phase)} / {Least(two, phase):0.00} ({two[0][phase]:0.00})";
    }

    private static double Least(double[][] rounds, int phase) => rounds.Min(round => round[phase]);

    private static double[] Round(Network network, int threads, out SymbolicCholesky symbolic)
    {
        GC.Collect();
        double[] times = new double[Phases];
        long begin = Stopwatch.GetTimestamp();
        int[] order = FillReducingOrder.Of(network.Laplacian, threads, default);
        Lap(Order);
        symbolic = SymbolicCholesky.Of(network.Laplacian, order);
        Lap(Analysis);
        using CholeskyFactor factor = CholeskyFactor.Of(symbolic, network.Laplacian, threads, default);
        Lap(Factorisation);
        SelectedInverse inverse = factor.Invert(threads, default);
        Lap(Inverse);
        CheckFoster(network, inverse);
        using (Panel<double> b = new(network.NodeCount), x = new(network.NodeCount))
        using (SubstitutionWorkspace workspace = factor.NewWorkspace(Panel<double>.Width))
        {
            for (int u = 0; u < network.NodeCount; u++)
                b.Row(u).Fill(u % 2 == 0 ? 1 : -1);
            factor.Solve(b, x, workspace);
            begin = Stopwatch.GetTimestamp();
            factor.Solve(b, x, workspace);
            Lap(Doubles, 1e3 / Panel<double>.Width);
        }
        using (Panel<float> b = new(network.NodeCount), x = new(network.NodeCount))
        using (SubstitutionWorkspace workspace = factor.NewWorkspace(Panel<float>.Width))
        {
            for (int u = 0; u < network.NodeCount; u++)
                b.Row(u).Fill(u % 2 == 0 ? 1 : -1);
            factor.Solve(b, x, workspace);
            begin = Stopwatch.GetTimestamp();
            factor.Solve(b, x, workspace);
            Lap(Floats, 1e3 / Panel<float>.Width);
        }
        return times;

        void Lap(int phase, double scale = 1)
        {
            times[phase] = Stopwatch.GetElapsedTime(begin).TotalSeconds * scale;
            begin = Stopwatch.GetTimestamp();
        }
    }

    private static void CheckFoster(Network network, SelectedInverse inverse)
    {
        double sum = 0;
        for (int u = 0; u < network.NodeCount; u++)
        {
            for (long k = network.FirstLaterArc(u); k < network.RowStart[u + 1]; k++)
            {
                int v = network.Neighbours[k];
                sum += network.Conductance(k) * (inverse.Diagonal(u) + inverse.Diagonal(v) - (2 * inverse.Between(u, v)));
            }
        }
        if (Math.Abs((sum / (network.NodeCount - 1)) - 1) > 1e-9)
            throw new InvalidOperationException($"Foster's sum is {sum}, not {network.NodeCount - 1}");
    }
}
