// The table of coverage: for every family and number of probes, how many 95 % intervals hold, and how large errors are.
// Invariant: the exact route is held against closed forms and Foster's sum before anything is held against it.

using System.Diagnostics;
using System.Runtime.InteropServices;
using ScaleResist.DataGen.Networks;

namespace ScaleResist.Bench.Coverage;

internal static class CoverageBench
{
    /// <summary>Nodes of every family but the complete one, which has fewer for the sake of its links.</summary>
    public const int Nodes = 1000;

    /// <summary>Nodes of the complete network.</summary>
    public const int CompleteNodes = 200;

    /// <summary>Random pairs: more than probes, so that none is solved.</summary>
    public const int Pairs = 300;

    private const double ClosedFormError = 1e-9;
    private static readonly int[] Probes = [16, 32, 64, 256];

    /// <summary>A family's network of the table.</summary>
    public static FamilyPlan PlanOf(Family family) => new(family, family == Family.Complete ? CompleteNodes : Nodes);

    public static void Run(string? only, int seeds)
    {
        Console.WriteLine($"{RuntimeInformation.FrameworkDescription}, {Environment.ProcessorCount} cores; {seeds} seeds. Each cell: share of 95 % "
            + "intervals that hold, in %, with its standard error from the spread between seeds; then the root-mean-square relative error in %.\n");
        Console.WriteLine("| network | nodes / links | probes | links | nodes | nodes +- 1.96 se | ranks within bounds (rms width / n) | pairs "
            + "| Kirchhoff index | total resistance | s |");
        Console.WriteLine(string.Concat(Enumerable.Repeat("| --- ", 11)) + "|");
        List<string> checks = [];
        foreach (Family family in Enum.GetValues<Family>())
        {
            if (only is null || only == FamilyPlan.NameOf(family))
                checks.Add(Rows(family, seeds));
        }
        Console.WriteLine();
        foreach (string check in checks)
            Console.WriteLine(check);
    }

    private static string Rows(Family family, int seeds)
    {
        CoverageTrial trial = new(SolverBench.GenerateWhole(PlanOf(family)), Pairs);
        int n = trial.Network.Components[0].Nodes;
        double? closed = ClosedForms.Kirchhoff(family, n);
        double foster = Math.Abs((trial.Foster / (n - 1)) - 1), form = closed is double value ? Math.Abs((trial.Kirchhoff / value) - 1) : 0;
        if (foster > ClosedFormError || form > ClosedFormError)
            throw new InvalidOperationException($"The exact route is wrong on {family}: Foster's sum by {foster:0e+0}, the index by {form:0e+0}.");
        foreach (int probes in Probes)
        {
            long begin = Stopwatch.GetTimestamp();
            Dictionary<Quantity, Count> cell = trial.Measure(probes, seeds, Environment.ProcessorCount);
            string Of(Quantity quantity) => !cell[quantity].Any ? "exact" : $"{Share(cell[quantity])}; {100 * cell[quantity].Error:0.00}";
            Console.WriteLine($"| {FamilyPlan.NameOf(family)} | {trial.Network.NodeCount:N0} / {trial.Network.LinkCount:N0} | {probes} "
                + $"| {Of(Quantity.Links)} | {Of(Quantity.Nodes)} | {(cell[Quantity.NodesByError].Any ? Share(cell[Quantity.NodesByError]) : "exact")} "
                + $"| {Of(Quantity.Ranks)} | {Of(Quantity.Pairs)} | {Of(Quantity.Index)} "
                + $"| {(cell[Quantity.Totals].Any ? $"{100 * cell[Quantity.Totals].Error:0.00}" : "exact")} "
                + $"| {Stopwatch.GetElapsedTime(begin).TotalSeconds:0} |");
            Console.Out.Flush();
        }
        return $"- {FamilyPlan.NameOf(family)}: index of the exact route off its closed form by "
            + $"{(closed is null ? "(none)" : $"{form:0.0e+0}")}, Foster's sum by {foster:0.0e+0}; what is not probed off the exact route by {trial.WorstUnprobed:0.0e+0}";
    }

    private static string Share(Count count) => $"{100 * count.Share:0.0} +- {100 * count.ShareError:0.0}";
}
