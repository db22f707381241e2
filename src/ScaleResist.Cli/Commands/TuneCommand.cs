// The verb `tune`: measure, foresee, tell, and with a lake publish the table. Invariant: tables of the runs that are measured go to a folder of their own,
// outside every reader's pattern, and are gone when the command ends, however it ends.

using System.Text.Json.Nodes;
using ScaleResist.Cli.Lake;
using ScaleResist.Cli.Progress;
using ScaleResist.Cli.Report;
using ScaleResist.Runs;

namespace ScaleResist.Cli.Commands;

/// <summary>Runs a validated tuning.</summary>
internal sealed class TuneCommand(CliHost host)
{
    /// <summary>Runs the tuning.</summary>
    /// <returns>The exit code; errors of input, lake and engine are thrown.</returns>
    public int Run(TuneRequest request, CancellationToken interrupted)
    {
        DateTimeOffset started = host.Time.GetUtcNow();
        if (request.Lake is null)
        {
            using Scratch scratch = new(null);
            TuneOutcome found = Measure(request, scratch, out _, interrupted);
            foreach (string line in TuneText.Of(found, request))
                host.Out.WriteLine(line);
            return ExitCode.Done;
        }
        RunFolder folder = new(request.Lake, request.RunId!);
        JsonObject plan = RunPlan.Of(request);
        if (folder.IsPublished)
            return new FinishedRun(host, folder, request.Network, plan, restart: false).Answer(interrupted);
        using StagedRun staged = folder.Begin();
        // Another process may have finished it while we waited for the claim.
        if (folder.IsPublished)
            return new FinishedRun(host, folder, request.Network, plan, restart: false).Answer(interrupted);

        TuneOutcome outcome;
        IReadOnlyList<PhaseTime> phases;
        using (Scratch scratch = new(Path.Combine(staged.Path, "measured")))
            outcome = Measure(request, scratch, out phases, interrupted);
        interrupted.ThrowIfCancellationRequested();
        ParquetTableSink sink = new(staged.Path, EstimateCommand.Provenance(folder.RunId, outcome.Network.Input, request.Plan.Seed), request.Plan.Threads);
        ITableWriter writer = sink.Open(Tables.Frontier);
        writer.Write(FrontierPoint.ToBatch(outcome.Points, request.CommandOf));
        writer.Complete();
        string text = string.Join(Environment.NewLine, TuneText.Of(outcome, request, folder.Published));
        staged.Publish(TuneRecord.Of(request, plan, outcome, sink.CompleteRows(), phases, started, host.Time.GetUtcNow()).ToJson());
        host.Out.WriteLine(text);
        return ExitCode.Done;
    }

    private TuneOutcome Measure(TuneRequest request, Scratch scratch, out IReadOnlyList<PhaseTime> phases, CancellationToken interrupted)
    {
        TuneOutcome? outcome = null;
        PhaseClock? clock = null;
        ProgressView.Follow(host, view =>
        {
            clock = new PhaseClock(view, host.Time);
            outcome = host.Engine.Tune(request, host.SecondsBefore(), () => scratch.Open(request.Plan.Threads), clock, interrupted);
        });
        phases = clock!.Times;
        return outcome!;
    }

    // Where measured runs write; the tables of one go before the next writes its own.
    private sealed class Scratch : IDisposable
    {
        private readonly string folder;
        private ParquetTableSink? sink;

        public Scratch(string? folder)
        {
            try
            {
                this.folder = folder ?? Directory.CreateTempSubdirectory("scaleresist-tune-").FullName;
            }
            catch (Exception error) when (LakeException.IsFileSystemError(error))
            {
                throw LakeException.From(Path.GetTempPath(), error);
            }
        }

        public ITableSink Open(int threads)
        {
            Dispose();
            return sink = new ParquetTableSink(folder, new Dictionary<string, string>(), threads);
        }

        public void Dispose()
        {
            // Before the folder goes, nothing may write into it.
            sink?.WaitForIdle();
            if (Directory.Exists(folder))
                RunFolder.Quietly(() => Directory.Delete(folder, recursive: true));
        }
    }
}
