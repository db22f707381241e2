// One table over network families: set-up apart, then milliseconds a right-hand side at one relative residual: 16 float columns at a
// time on one thread and two, 8 double columns, and the same method one column at a time.
// Invariant: every time stands beside the true residual that was reached, |b - L z| / |b| in doubles, the worst of the columns. Times
// are the least of a few rounds, for every contender alike: other work on the machine only ever adds.

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
    private const int Rounds = 4;
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
            + $"Times in ms a right-hand side, the least of {Rounds} rounds, "
            + "in brackets iterations and the true relative residual.\n");
        Console.WriteLine("| network | nodes | links | core | set-up s | us a link | preconditioner | 16 floats | 2 threads | gain "
            + "| one at a time, float | gain of 16 | one at a time, double | gain of 16 | 8 doubles to 1e-6 "
            + "| 16 refined to 1e-6 | gain |");
        Console.WriteLine(string.Concat(Enumerable.Repeat("| --- ", 17)) + "|");
        foreach ((string name, FamilyPlan plan) in Families)
        {
            if (only is not null && !name.StartsWith(only, StringComparison.Ordinal))
                continue;
            Row(name, Generate(plan), solves);
        }
    }

    /// <summary>The largest component of a generated network.</summary>
    public static Network Generate(FamilyPlan plan) => LargestComponent(GenerateWhole(plan));

    /// <summary>A generated network.</summary>
    public static Network GenerateWhole(FamilyPlan plan)
    {
        EdgeListBuilder builder = new(weighted: plan.Decades > 0);
        NetworkGenerator.Generate(plan, new Sink(builder));
        return NetworkBuilder.Build(builder.Finish(new InputFacts { Path = "generated", Form = "memory", Sha256 = "", Columns = ["1", "2"] }));
    }

    private static Network LargestComponent(Network network)
    {
        if (network.Components.Count == 1)
            return network;
        Laplacian laplacian = network.Laplacian;
        EdgeListBuilder builder = new(weighted: laplacian.Conductances is not null);
        for (int u = 0; u < network.Components[0].End; u++)
        {
            for (long k = laplacian.RowStart[u]; k < laplacian.RowStart[u + 1]; k++)
            {
                if (laplacian.Neighbours[k] > u)
                    builder.Add(u, laplacian.Neighbours[k], laplacian.Conductance(k));
            }
        }
        return NetworkBuilder.Build(
            builder.Finish(new InputFacts { Path = "largest", Form = "memory", Sha256 = "", Columns = ["1", "2", "3"] }));
    }

    private static void Row(string name, Network network, int solves)
    {
        long begin = Stopwatch.GetTimestamp();
        LaplacianSolver solver = new(network, solves);
        double setUp = Stopwatch.GetElapsedTime(begin).TotalSeconds;
        using ProbePanel first = new(network, 7), second = new(network, 7);
        first.Draw(0, 32, 2);
        second.Draw(1, 32, 2);
        double tolerance = ToleranceFor(Single, 1e-3, t => Solve(network, solver, [first.B], [first.Z], t, true).Residual);
        Timing one = Least(round => Solve(network, solver, [first.B], [first.Z], tolerance, round == 0));
        Timing two = Least(round => Solve(network, solver, [first.B, second.B], [first.Z, second.Z], tolerance, round == 0));
        (Timing floats, Timing doubles) = OneAtATime(network, solver, first.B);
        Timing twice = InDoubles(network, solver, first.B);
        Timing refined = Refined(network, solver, first.B);
        Console.WriteLine(
            $"| {name} | {network.NodeCount:N0} | {network.LinkCount:N0} | {network.NodeCount - solver.Eliminated:N0} "
            + $"| {setUp:0.00} | {setUp / network.LinkCount * 1e6:0.00} | {solver.Preconditioner} "
            + $"| {one} | {two} | {one.Milliseconds / two.Milliseconds:0.00} "
            + $"| {floats} | {floats.Milliseconds / one.Milliseconds:0.0} "
            + $"| {doubles} | {doubles.Milliseconds / one.Milliseconds:0.0} | {twice} "
            + $"| {refined} | {twice.Milliseconds / refined.Milliseconds:0.00} |");
    }

    // The panels' solver stops by the error in the energy norm: a tolerance for that whose residual is small enough, but not by much.
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
    private static Timing Solve<T>(
        Network network, LaplacianSolver solver, Panel<T>[] b, Panel<T>[] z, double tolerance, bool check)
        where T : unmanaged, INumber<T>
    {
        SolverWorkspace<T>[] workspaces = [.. b.Select(_ => solver.NewWorkspace<T>())];
        int width = Panel<T>.Width;
        long begin = Stopwatch.GetTimestamp();
        Parallel.For(0, b.Length, new ParallelOptions { MaxDegreeOfParallelism = b.Length }, i =>
        {
            object right = b[i], left = z[i], workspace = workspaces[i];
            if (right is Panel<float> single)
                solver.Solve(single, (Panel<float>)left, width, tolerance, (SolverWorkspace<float>)workspace, default);
            else
                solver.Solve((Panel<double>)right, (Panel<double>)left, width, tolerance, (SolverWorkspace<double>)workspace, default);
        });
        double time = Stopwatch.GetElapsedTime(begin).TotalMilliseconds / (b.Length * width);
        int iterations = workspaces.Max(workspace => workspace.Report.Iterations);
        foreach (SolverWorkspace<T> workspace in workspaces)
            workspace.Dispose();
        double residual = check ? b.Zip(z).Max(pair => Residual(network, pair.First, pair.Second)) : 0;
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
        double tolerance = ToleranceFor(Twice, 1e-5, t => Solve(network, solver, [b2], [z2], t, true).Residual);
        return Least(round => Solve(network, solver, [b2], [z2], tolerance, round == 0));
    }

    private static Timing Refined(Network network, LaplacianSolver solver, Panel<float> b)
    {
        using PanelPair b2 = new(network.NodeCount), z2 = new(network.NodeCount);
        using RefinedWorkspace workspace = solver.NewRefinedWorkspace();
        for (int u = 0; u < network.NodeCount; u++)
        {
            for (int column = 0; column < PanelPair.Width; column++)
                b2.At(u, column) = b.Row(u)[column];
        }
        double tolerance = ToleranceFor(Twice, 1e-5, t => Time(t, true).Residual);
        return Least(round => Time(tolerance, round == 0));

        Timing Time(double tolerance, bool check)
        {
            long begin = Stopwatch.GetTimestamp();
            solver.Solve(b2, z2, PanelPair.Width, tolerance, workspace, default);
            double time = Stopwatch.GetElapsedTime(begin).TotalMilliseconds / PanelPair.Width;
            double residual = check ? Math.Max(Residual(network, b2.First, z2.First), Residual(network, b2.Second, z2.Second)) : 0;
            return new(time, residual, workspace.Report.Iterations);
        }
    }

    private static (Timing Floats, Timing Doubles) OneAtATime(Network network, LaplacianSolver solver, Panel<float> b)
    {
        Elimination elimination = Elimination.Of(network.Laplacian, network.Components[0]);
        string name = solver.Preconditioner;
        bool seidel = name == "gauss-seidel";
        if (!seidel && !name.StartsWith("sampled elimination", StringComparison.Ordinal))
            throw new InvalidOperationException($"no yardstick for '{name}'");
        bool inPlace = seidel && elimination.Steps.Count == 0; // unweighted links stay unweighted
        Laplacian core = inPlace ? network.Laplacian : elimination.BuildCore();
        SampledFactor? factor = seidel ? null : SampledFactor.Of(core, int.Parse(name.Split(' ')[2]), seed: 1);
        OneColumn<float> single = new(elimination, core, factor);
        OneColumn<double> twice = new(elimination, core, factor);
        return (Least(column => Time<float>(single.Solve, () => single.Iterations, column)),
            Least(column => Time<double>(twice.Solve, () => twice.Iterations, column)));

        Timing Time<T>(Action<T[], T[], double> solve, Func<int> iterations, int column)
            where T : unmanaged, INumber<T>
        {
            T[] right = Column<float, T>(b, column), z = new T[right.Length];
            long begin = Stopwatch.GetTimestamp();
            solve(right, z, Single);
            double time = Stopwatch.GetElapsedTime(begin).TotalMilliseconds;
            return new(time, Residual(network, right, z, 1), iterations());
        }
    }

    // The least time, the worst residual and the most iterations.
    private static Timing Least(Func<int, Timing> measure)
    {
        Timing[] rounds = [.. Enumerable.Range(0, Rounds).Select(measure)];
        return new(
            rounds.Min(round => round.Milliseconds), rounds.Max(round => round.Residual), rounds.Max(round => round.Iterations));
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

    private static unsafe double Residual<T>(Network network, Panel<T> b, Panel<T> z)
        where T : unmanaged, INumber<T> =>
        Residual<T>(network, new(b.Pointer, b.Rows * Panel<T>.Width), new(z.Pointer, z.Rows * Panel<T>.Width), Panel<T>.Width);

    // The worst column's.
    private static double Residual<T>(Network network, ReadOnlySpan<T> b, ReadOnlySpan<T> z, int width)
        where T : unmanaged, INumber<T>
    {
        Laplacian l = network.Laplacian;
        double[] size = new double[width], error = new double[width], left = new double[width];
        for (int u = 0; u < l.NodeCount; u++)
        {
            for (int j = 0; j < width; j++)
            {
                double right = double.CreateTruncating(b[(u * width) + j]);
                size[j] += right * right;
                left[j] = right - (l.Strengths[u] * double.CreateTruncating(z[(u * width) + j]));
            }
            for (long k = l.RowStart[u]; k < l.RowStart[u + 1]; k++)
            {
                double c = l.Conductance(k);
                ReadOnlySpan<T> row = z.Slice(l.Neighbours[k] * width, width);
                for (int j = 0; j < row.Length; j++)
                    left[j] += c * double.CreateTruncating(row[j]);
            }
            for (int j = 0; j < width; j++)
                error[j] += left[j] * left[j];
        }
        return size.Zip(error).Max(pair => Math.Sqrt(pair.Second / pair.First));
    }

    private sealed class Sink(EdgeListBuilder builder) : ILinkSink
    {
        public void Link(long source, long target, double conductance) => builder.Add(source, target, conductance);
    }
}
