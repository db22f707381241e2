// The verb `estimate`: claim the run, estimate into staging, publish, tell. Invariant: a finished run is never changed, and
// an unfinished one leaves nothing that a reader of the lake could see.

using System.Globalization;
using System.Text.Json;
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
        if (folder.IsPublished)
            return AnswerFinished(folder, request, plan, interrupted);
        using StagedRun staged = folder.Begin();
        // Another process may have finished it while we waited for the claim.
        if (folder.IsPublished)
            return AnswerFinished(folder, request, plan, interrupted);

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

    private static ParquetTableSink OpenSink(string staging, EstimateRequest request, InputFacts facts) => new(staging,
        new Dictionary<string, string>
        {
            ["scaleresist.schema_version"] = Tables.SchemaVersion.ToString(CultureInfo.InvariantCulture),
            ["scaleresist.program_version"] = ProgramVersion.Number,
            ["scaleresist.run_id"] = request.RunId,
            ["scaleresist.input_sha256"] = facts.Sha256,
            ["scaleresist.seed"] = request.Plan.Seed.ToString(CultureInfo.InvariantCulture),
        },
        request.Plan.Threads);

    private int AnswerFinished(RunFolder folder, EstimateRequest request, JsonObject plan, CancellationToken interrupted)
    {
        string mend = "a finished run is never overwritten: choose another --run-id, or remove the folder yourself";
        if (request.Restart)
            return CommandLine.Refuse(host, $"--restart discards an unfinished run, and '{request.RunId}' is finished; {mend}");
        JsonObject? record = ReadRecord(folder.PublishedRecord);
        if (record?["plan"] is not JsonObject finished || record["input"]?["sha256"]?.ToString() is not string digest)
            return CommandLine.Refuse(host,
                $"{folder.Published}: a run is there, but its {RunFolder.RecordName} cannot be read; {mend}");
        string? difference = RunPlan.Difference(finished, plan);
        if (difference is null && InputDigest.Sha256(request.Network, interrupted) != digest)
            difference = "a network of other content";
        if (difference is not null)
            return CommandLine.Refuse(host, $"run '{request.RunId}' is finished with another plan ({difference}); {mend}");
        host.Out.WriteLine($"run '{request.RunId}' is already done, with this plan and this network: {folder.Published}");
        host.Out.WriteLine(SummaryText.Query(folder.Published, (record["rows"] as JsonObject)?.Select(r => r.Key) ?? []));
        return ExitCode.Done;
    }

    private static JsonObject? ReadRecord(string path)
    {
        try
        {
            return JsonNode.Parse(File.ReadAllBytes(path)) as JsonObject;
        }
        catch (Exception error) when (error is JsonException or IOException or UnauthorizedAccessException)
        {
            return null;
        }
    }
}
