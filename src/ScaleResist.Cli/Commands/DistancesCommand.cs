// The verb `distances`: claim the run, search into staging, publish, tell, as `estimate` does.

using System.Text.Json.Nodes;
using ScaleResist.Cli.Lake;
using ScaleResist.Cli.Progress;
using ScaleResist.Cli.Report;
using ScaleResist.Graphs;
using ScaleResist.Runs;

namespace ScaleResist.Cli.Commands;

/// <summary>Runs a validated distances command.</summary>
internal sealed class DistancesCommand(CliHost host)
{
    // Squares of sums of costs stay far from the end of doubles.
    private const double LargestTotal = 1e100;

    /// <summary>Runs it.</summary>
    /// <returns>The exit code; errors of input and lake are thrown.</returns>
    public int Run(DistancesRequest request, CancellationToken interrupted)
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
        (Network Network, DistanceSummary Summary)? outcome = null;
        PhaseClock? clock = null;
        try
        {
            ProgressView.Follow(host, view =>
            {
                clock = new PhaseClock(view, host.Time);
                Network network = LibraryEngine.Load(request.Network, request.Reading, clock, interrupted);
                DistanceInputs inputs = Inputs(request, network, interrupted);
                sink = OpenSink(staged.Path, request, network.Input);
                outcome = (network, DistanceRun.Execute(network, request.Plan, inputs, sink, clock, interrupted));
            });
        }
        finally
        {
            // Before the staging folder goes, nothing may write into it.
            sink?.WaitForIdle();
        }
        interrupted.ThrowIfCancellationRequested();
        DistancesRecord record = DistancesRecord.Of(request, plan, outcome!.Value.Network, outcome.Value.Summary, sink!.CompleteRows(),
            clock!.Times, started, host.Time.GetUtcNow());
        string summary = string.Join(Environment.NewLine, DistancesText.Of(record, folder.Published));
        staged.Publish(record.ToJson());
        host.Out.WriteLine(summary);
        return ExitCode.Done;
    }

    private static DistanceInputs Inputs(DistancesRequest request, Network network, CancellationToken interrupted)
    {
        double[]? weights = request.NodeWeights is string weightFile
            ? NetworkInput.ReadNodeWeights(weightFile, network.Labels, ct: interrupted)
            : null;
        if (weights?.Sum() > LargestTotal)
        {
            throw new InputException(request.NodeWeights!, null, $"the weights add up to more than {LargestTotal:0e0}",
                "give all weights in a larger unit");
        }
        List<(int, int)>? pairs = request.Pairs is string pairFile ? NetworkInput.ReadPairs(pairFile, network.Labels, ct: interrupted) : null;
        return new DistanceInputs
        {
            NodeWeights = weights,
            Pairs = pairs,
            Resistances = request.Beside is string run ? BesideRun.Resistances(request.Lake, run, network.Labels, pairs!, interrupted) : null,
            Sources = request.Sources is string sources ? NetworkInput.ReadNodes(sources, network.Labels, interrupted) : null,
        };
    }

    // Everything that can change a number in the tables.
    private static JsonObject PlanOf(DistancesRequest request, CancellationToken interrupted)
    {
        JsonObject plan = new()
        {
            ["verb"] = "distances",
            ["want"] = string.Join(',', DistancesRequest.NamesOf(request.Plan.Want)),
            ["lengths"] = request.Reading.Weights == WeightMeaning.Length,
            ["columns"] = request.Reading.Columns is { } columns ? string.Join(',', columns) : null,
            ["target_error"] = request.Plan.TargetError,
            ["confidence"] = request.Plan.Confidence,
            ["seed"] = request.Plan.Seed,
            ["beside"] = request.Beside,
        };
        foreach ((string name, string? file) in new[]
        {
            ("pairs", request.Pairs), ("node_weights", request.NodeWeights), ("sources", request.Sources),
        })
        {
            plan[name + "_sha256"] = file is null ? null : InputDigest.Sha256(file, interrupted);
        }
        return plan;
    }

    private static ParquetTableSink OpenSink(string staging, DistancesRequest request, InputFacts facts) =>
        new(staging, EstimateCommand.Provenance(request.RunId, facts, request.Plan.Seed), request.Plan.Threads);
}
