// One table over network families: set-up apart, then milliseconds a right-hand side at one relative residual: 16 float columns at a time on one
// thread and two, 8 double columns, and the same method one column at a time.
// Invariant: every time stands beside the true residual that was reached, |b - L z| / |b| in doubles, the worst of the columns.

using System.Diagnostics;
using System.Numerics;
using System.Runtime.InteropServices;
using ScaleResist.DataGen.Networks;
using ScaleResist.Estimating;
using ScaleResist.Graphs;
using ScaleResist.Kernels;
using ScaleResist.Solving;

namespace ScaleResist.Bench;

internal static class SolverBench
{
    private const int Rounds = 5;
    private const double Single = 1e-4, Twice = 1e-6; // relative residuals

    private static readonly (string Name, FamilyPlan Plan)[] Families =
    [
        ("grid 1000 x 1000", new(Family.Grid, 1_000_000)),
        ("road-like 10^6", new(Family.Road, 1_000_000)),
        ("cube 100^3", new(Family.Cube, 1_000_000)),
        ("small world 10^6, 3M links", new(Family.SmallWorld, 1_000_000)),
        ("preferential 10^6, 8M links", new(Family.Preferential, 1_000_000, 8_000_000)),
        ("power law 10M links", new(Family.PowerLaw, 1_000_000, 10_000_000)),
    ];

    private readonly record struct Timing(double Milliseconds, double Residual, int Iterations)
    {
        public override string ToString() => $"{Milliseconds:0.0} ({Iterations}, {Residual:0.0e+0})";
    }

    public static void Run(string? only, int solves)
    {
        Console.WriteLine($"{RuntimeInformation.FrameworkDescription}, {Environment.ProcessorCount} cores, set up for {solves} solves. "
            + "Times in ms a right-hand side, in brackets iterations and the true relative residual.\n");
        Console.WriteLine("| network | nodes | links | core | set-up s | us a link | preconditioner | 16 floats | 2 threads | gain "
            + "| one at a time, float | gain of 16 | one at a time, double | gain of 16 | 8 doubles to 1e-6 |");
        Console.WriteLine(string.Concat(Enumerable.Repeat("| --- ", 15)) + "|");
        foreach ((string name, FamilyPlan plan) in Families)
        {
            if (only is not null && !name.StartsWith(only, StringComparison.Ordinal))
                continue;
            EdgeListBuilder builder = new(weighted: plan.Decades > 0);
            NetworkGenerator.Generate(plan, new Sink(builder));
            Network network = NetworkBuilder.Build(
                builder.Finish(new InputFacts { Path = name, Form = "memory", Sha256 = "", Columns = ["1", "2"] }));
            Row(name, network, solves);
        }
    }

    private static void Row(string name, Network network, int solves)
    {
        long begin = Stopwatch.GetTimestamp();
        LaplacianSolver solver = new(network, solves);
        double setUp = Stopwatch.GetElapsedTime(begin).TotalSeconds;
        using ProbePanel first = new(network, 7), second = new(network, 7);
        first.Draw(0, 32, 2);
        second.Draw(1, 32, 2);
        double tolerance = ToleranceFor(Single, 1e-3, t => Solve(network, solver, [first.B], [first.Z], t).Residual);
        Timing one = Median(_ => Solve(network, solver, [first.B], [first.Z], tolerance));
        Timing two = Median(_ => Solve(network, solver, [first.B, second.B], [first.Z, second.Z], tolerance));
        (Timing floats, Timing doubles) = OneAtATime(network, solver, first.B);
        Timing twice = InDoubles(network, solver, first.B);
        Console.WriteLine(
            $"| {name} | {network.NodeCount:N0} | {network.LinkCount:N0} | {network.NodeCount - solver.Eliminated:N0} | {setUp:0.00} "
            + $"| {setUp / network.LinkCount * 1e6:0.00} | {solver.Preconditioner} | {one} | {two} | {one.Milliseconds / two.Milliseconds:0.00} "
            + $"| {floats} | {floats.Milliseconds / one.Milliseconds:0.0} | {doubles} | {doubles.Milliseconds / one.Milliseconds:0.0} | {twice} |");
    }

    // The panels' solver stops by the error in the energy norm: the loosest such tolerance, within a tenth or so, whose residual is small enough.
    private static double ToleranceFor(double residual, double guess, Func<double, double> reach)
    {
        double loosest = 0, tolerance = guess;
        for (int i = 0; i < 6; i++)
        {
            double reached = reach(tolerance);
            if (reached <= residual)
                loosest = Math.Max(loosest, tolerance);
            if (reached <= residual && reached > 0.6 * residual)
                break;
            tolerance *= 0.85 * residual / reached;
        }
        return loosest > 0 ? loosest : throw new InvalidOperationException("no tolerance reaches the residual");
    }

    // Each panel on its own thread.
    private static Timing Solve<T>(Network network, LaplacianSolver solver, Panel<T>[] b, Panel<T>[] z, double tolerance)
        where T : unmanaged, INumber<T>
    {
        SolverWorkspace<T>[] workspaces = [.. b.Select(_ => solver.NewWorkspace<T>())];
        int width = Panel<T>.Width;
        long begin = Stopwatch.GetTimestamp();
        Parallel.For(0, b.Length, new ParallelOptions { MaxDegreeOfParallelism = b.Length }, i =>
        {
            if (b[i] is Panel<float> single)
                solver.Solve(single, (Panel<float>)(object)z[i], width, tolerance, (SolverWorkspace<float>)(object)workspaces[i], default);
            else
                solver.Solve((Panel<double>)(object)b[i], (Panel<double>)(object)z[i], width, tolerance, (SolverWorkspace<double>)(object)workspaces[i], default);
        });
        double time = Stopwatch.GetElapsedTime(begin).TotalMilliseconds / (b.Length * width);
        int iterations = workspaces.Max(workspace => workspace.Report.Iterations); // of the last component
        foreach (SolverWorkspace<T> workspace in workspaces)
            workspace.Dispose();
        double residual = 0;
        for (int i = 0; i < b.Length; i++)
        {
            for (int column = 0; column < width; column++)
                residual = Math.Max(residual, Residual(network, Column<T, double>(b[i], column), Column<T, double>(z[i], column)));
        }
        return new(time, residual, iterations);
    }

    private static Timing InDoubles(Network network, LaplacianSolver solver, Panel<float> b)
    {
        using Panel<double> b2 = new(network.NodeCount), z2 = new(network.NodeCount);
        for (int u = 0; u < network.NodeCount; u++)
        {
            for (int column = 0; column < Panel<double>.Width; column++)
                b2.Row(u)[column] = b.Row(u)[column];
        }
        double tolerance = ToleranceFor(Twice, 1e-5, t => Solve(network, solver, [b2], [z2], t).Residual);
        return Median(_ => Solve(network, solver, [b2], [z2], tolerance));
    }

    // The first component alone, where nearly all of a network is.
    private static (Timing Floats, Timing Doubles) OneAtATime(Network network, LaplacianSolver solver, Panel<float> b)
    {
        Elimination elimination = Elimination.Of(network.Laplacian, network.Components[0]);
        string name = solver.Preconditioner;
        bool jacobi = name == "jacobi";
        if (!jacobi && !name.StartsWith("sampled elimination", StringComparison.Ordinal))
            throw new InvalidOperationException($"no yardstick for '{name}'");
        bool inPlace = jacobi && elimination.Steps.Count == 0 && network.Components.Count == 1; // unweighted links stay unweighted
        Laplacian core = inPlace ? network.Laplacian : elimination.BuildCore();
        SampledFactor? factor = jacobi ? null : SampledFactor.Of(core, int.Parse(name.Split(' ')[2]), seed: 1);
        OneColumn<float> single = new(elimination, core, factor);
        OneColumn<double> twice = new(elimination, core, factor);
        return (Median(column => Time<float>(single.Solve, () => single.Iterations, column)),
            Median(column => Time<double>(twice.Solve, () => twice.Iterations, column)));

        Timing Time<T>(Action<T[], T[], double> solve, Func<int> iterations, int column)
            where T : unmanaged, INumber<T>
        {
            T[] right = Column<float, T>(b, column), z = new T[right.Length];
            Array.Clear(right, network.Components[0].End, right.Length - network.Components[0].End);
            long begin = Stopwatch.GetTimestamp();
            solve(right, z, Single);
            double time = Stopwatch.GetElapsedTime(begin).TotalMilliseconds;
            return new(time, Residual(network, [.. right.Select(double.CreateTruncating)], [.. z.Select(double.CreateTruncating)]), iterations());
        }
    }

    // The median time after one round to warm up; the worst residual and the most iterations.
    private static Timing Median(Func<int, Timing> measure)
    {
        measure(0);
        Timing[] rounds = [.. Enumerable.Range(0, Rounds).Select(measure)];
        return new(
            rounds.Select(round => round.Milliseconds).Order().ElementAt(Rounds / 2), rounds.Max(round => round.Residual),
            rounds.Max(round => round.Iterations));
    }

    private static TTo[] Column<T, TTo>(Panel<T> panel, int column)
        where T : unmanaged, INumber<T>
        where TTo : INumber<TTo>
    {
        TTo[] values = new TTo[panel.Rows];
        for (int u = 0; u < values.Length; u++)
            values[u] = TTo.CreateTruncating(panel.Row(u)[column]);
        return values;
    }

    private static double Residual(Network network, double[] b, double[] z)
    {
        Laplacian l = network.Laplacian;
        double size = 0, error = 0;
        for (int u = 0; u < b.Length; u++)
        {
            double left = b[u] - (l.Strengths[u] * z[u]);
            for (long k = l.RowStart[u]; k < l.RowStart[u + 1]; k++)
                left += l.Conductance(k) * z[l.Neighbours[k]];
            size += b[u] * b[u];
            error += left * left;
        }
        return Math.Sqrt(error / size);
    }

    private sealed class Sink(EdgeListBuilder builder) : ILinkSink
    {
        public void Link(long source, long target, double conductance) => builder.Add(source, target, conductance);
    }
}
