// The estimate from file to rows, by phase, with a sink that drops the rows: what is left of a run when nothing is written.

using System.Diagnostics;
using ScaleResist.Graphs;
using ScaleResist.Runs;

namespace ScaleResist.Bench;

internal static class WholeJob
{
    public static void Run(string file, int probes)
    {
        EdgeList list = Timed("reading", () => EdgeListReader.Read(file, new ReadOptions { Weights = WeightMeaning.None }));
        Network network = Timed("building", () => NetworkBuilder.Build(list));
        EstimatePlan plan = new() { Route = Route.Probe, Probes = probes, Want = Want.Index | Want.Nodes | Want.Links };
        EstimateSummary summary = EstimateRun.Execute(network, plan, new EstimateInputs(), new NoSink(), new NoObserver(), default);
        foreach (PhaseTime phase in summary.Phases)
            Console.WriteLine($"{phase.Name,-16} {phase.Seconds,8:0.00} s");
        Console.WriteLine($"{network.NodeCount:N0} nodes, {network.LinkCount:N0} links, {probes} probes, {summary.Solver}");
        Console.WriteLine($"peak memory {Process.GetCurrentProcess().PeakWorkingSet64 / 1e9:0.00} GB, {RuntimeDescription}");
    }

    private static string RuntimeDescription =>
        $"{System.Runtime.InteropServices.RuntimeInformation.FrameworkDescription}, {Environment.ProcessorCount} cores";

    private static T Timed<T>(string phase, Func<T> work)
    {
        long start = Stopwatch.GetTimestamp();
        T result = work();
        Console.WriteLine($"{phase,-16} {Stopwatch.GetElapsedTime(start).TotalSeconds,8:0.00} s");
        return result;
    }

    private sealed class NoSink : ITableSink, ITableWriter
    {
        private long rows;

        public ITableWriter Open(TableDefinition table) => new NoSink();

        public void Write(RowBatch batch) => rows += batch.Count;

        public long Complete() => rows;
    }
}
