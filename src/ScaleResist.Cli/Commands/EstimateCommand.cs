// The verb `estimate`: claim the run, estimate into staging, publish, tell. Invariant: a finished run is never changed, and
// an unfinished one leaves nothing that a reader of the lake could see.

using System.Globalization;
using System.Text.Json.Nodes;
using ScaleResist.Cli.Lake;
using ScaleResist.Cli.Progress;
using ScaleResist.Cli.Report;
using ScaleResist.Cli.Report.Findings;
using ScaleResist.Graphs;
using ScaleResist.Runs;

namespace ScaleResist.Cli.Commands;

/// <summary>Runs a validated estimate.</summary>
internal sealed class EstimateCommand(CliHost host)
{
    /// <summary>Runs the estimate.</summary>
    /// <returns>The exit code; errors of input, lake and engine are thrown.</returns>
    public int Run(EstimateRequest request, CancellationToken interrupted)
    {
        DateTimeOffset started = host.Time.GetUtcNow();
        RunFolder folder = new(request.Lake, request.RunId);
        JsonObject plan = RunPlan.Of(request, interrupted);
        FinishedRun finished = new(host, folder, request.Network, plan, request.Restart);
        if (folder.IsPublished)
            return finished.Answer(interrupted);
        using StagedRun staged = folder.Begin();
        // Another process may have finished it while we waited for the claim.
        if (folder.IsPublished)
            return finished.Answer(interrupted);

        ParquetTableSink? sink = null;
        FindingsSink? findings = null;
        EstimateOutcome? outcome = null;
        PhaseClock? clock = null;
        try
        {
            ProgressView.Follow(host, view =>
            {
                clock = new PhaseClock(view, host.Time);
                outcome = host.Engine.Run(request, Open, clock, interrupted);
            });
        }
        finally
        {
            // Before the staging folder goes, nothing may write into it.
            sink?.WaitForIdle();
        }
        interrupted.ThrowIfCancellationRequested();
        RunRecord record = RunRecord.Of(request, plan, outcome!, sink?.CompleteRows() ?? new Dictionary<string, long>(),
            clock!.Phases, findings?.Findings ?? RunFindings.None, started, host.Time.GetUtcNow());
        string summary = string.Join(Environment.NewLine, SummaryText.Of(record, folder.Published));
        staged.Write(RunFolder.ReportName, EstimateReport.Render(record));
        staged.Publish(record.ToJson());
        host.Out.WriteLine(summary);
        return ExitCode.Done;

        FindingsSink Open(InputFacts facts) => findings = new FindingsSink(sink = OpenSink(staged.Path, request, facts));
    }

    private static ParquetTableSink OpenSink(string staging, EstimateRequest request, InputFacts facts) =>
        new(staging, Provenance(request.RunId, facts, request.Plan.Seed), request.Plan.Threads);

    /// <summary>What every part of a run's tables says of its rows.</summary>
    internal static Dictionary<string, string> Provenance(string runId, InputFacts facts, ulong seed) => new()
    {
        ["scaleresist.schema_version"] = Tables.SchemaVersion.ToString(CultureInfo.InvariantCulture),
        ["scaleresist.program_version"] = ProgramVersion.Number,
        ["scaleresist.run_id"] = runId,
        ["scaleresist.input_sha256"] = facts.Sha256,
        ["scaleresist.seed"] = seed.ToString(CultureInfo.InvariantCulture),
    };
}
