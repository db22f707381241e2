// Whole-job timing by phase.

using System.Diagnostics;
using ScaleResist.Graphs;
using ScaleResist.Runs;

long start = Stopwatch.GetTimestamp();
EdgeList list = EdgeListReader.Read(args[0], new ReadOptions { Weights = WeightMeaning.None });
Say("read");
Network network = NetworkBuilder.Build(list);
list = null!;
Say("build");
EstimateSummary summary = EstimateRun.Execute(
    network, new EstimatePlan { Probes = 16, Want = Want.Index | Want.Nodes | Want.Links }, new EstimateInputs(), new NullSink(), new Quiet(), default);
Say("run");
foreach (PhaseTime phase in summary.Phases)
    Console.WriteLine($"  {phase.Name} {phase.Seconds:0.00}");
Console.WriteLine(summary.Solver);
Console.WriteLine($"{summary.Index[0].KirchhoffIndex} foster {summary.FosterSum} of {summary.Nodes - summary.Components}");

void Say(string what)
{
    Console.WriteLine($"{what} {Stopwatch.GetElapsedTime(start).TotalSeconds:0.00} s, {Process.GetCurrentProcess().PeakWorkingSet64 / 1e9:0.00} GB peak");
    start = Stopwatch.GetTimestamp();
}

internal sealed class NullSink : ITableSink, ITableWriter
{
    public ITableWriter Open(TableDefinition table) => this;
    public void Write(RowBatch batch) { }
    public long Complete() => 0;
}

internal sealed class Quiet : IRunObserver
{
    public void Begin(string phase, double? total, string unit) { }
    public void Report(double done) { }
    public void End() { }
}
