// The verb `impact`: claim the run, compute into staging, publish, tell, as `estimate` does.

using System.Text.Json.Nodes;
using ScaleResist.Cli.Lake;
using ScaleResist.Cli.Progress;
using ScaleResist.Cli.Report;
using ScaleResist.Graphs;

namespace ScaleResist.Cli.Commands;

/// <summary>Runs a validated impact.</summary>
internal sealed class ImpactCommand(CliHost host)
{
    /// <summary>Runs it.</summary>
    /// <returns>The exit code; errors of input, lake and engine are thrown.</returns>
    public int Run(ImpactRequest request, CancellationToken interrupted)
    {
        DateTimeOffset started = host.Time.GetUtcNow();
        RunFolder folder = new(request.Lake, request.RunId);
        JsonObject plan = PlanOf(request, interrupted);
        FinishedRun finished = new(host, folder, request.Network, plan, request.Restart);
        if (folder.IsPublished)
            return finished.Answer(interrupted);
        using StagedRun staged = folder.Begin();
        // Another process may have finished it while we waited for the claim.
        if (folder.IsPublished)
            return finished.Answer(interrupted);

        ParquetTableSink? sink = null;
        ImpactOutcome? outcome = null;
        PhaseClock? clock = null;
        try
        {
            ProgressView.Follow(host, view =>
            {
                clock = new PhaseClock(view, host.Time);
                outcome = host.Engine.Impact(request, facts => sink = OpenSink(staged.Path, request, facts), clock, interrupted);
            });
        }
        finally
        {
            sink?.WaitForIdle();
        }
        interrupted.ThrowIfCancellationRequested();
        ImpactRecord record = ImpactRecord.Of(request, plan, outcome!, sink?.CompleteRows() ?? new Dictionary<string, long>(),
            clock!.Times, started, host.Time.GetUtcNow());
        string summary = string.Join(Environment.NewLine, ImpactText.Of(record, folder.Published));
        staged.Publish(record.ToJson());
        host.Out.WriteLine(summary);
        return ExitCode.Done;
    }

    // Everything that can change a number in the tables, as RunPlan has it for an estimate.
    private static JsonObject PlanOf(ImpactRequest request, CancellationToken interrupted)
    {
        JsonObject plan = new()
        {
            ["verb"] = "impact",
            ["suggest"] = request.Plan.Suggest,
            ["budget"] = request.Plan.Budget,
            ["route"] = request.Plan.Route.ToString().ToLowerInvariant(),
            ["confidence"] = request.Plan.Confidence,
            ["seed"] = request.Plan.Seed,
            ["memory_budget"] = request.Plan.MemoryBudget,
            // Without --weights a third column is refused, so a run that finished had none.
            ["weights"] = request.Reading.Weights is WeightMeaning.Unsaid ? "none" : request.Reading.Weights.ToString().ToLowerInvariant(),
            ["columns"] = request.Reading.Columns is { } columns ? string.Join(',', columns) : null,
        };
        foreach ((string name, string? file) in new[]
        {
            ("changes", request.Changes), ("candidates", request.Candidates), ("pairs", request.Pairs), ("node_weights", request.NodeWeights),
        })
        {
            plan[name] = file;
            plan[name + "_sha256"] = file is null ? null : InputDigest.Sha256(file, interrupted);
        }
        return plan;
    }

    private static ParquetTableSink OpenSink(string staging, ImpactRequest request, InputFacts facts) =>
        new(staging, EstimateCommand.Provenance(request.RunId, facts, request.Plan.Seed), request.Plan.Threads);
}
