// Joins the command to the library: read, build, estimate. The rows as read are given up before the estimate begins.

using System.Diagnostics;
using ScaleResist.Cli.Commands;
using ScaleResist.Cli.Lake;
using ScaleResist.Graphs;
using ScaleResist.Runs;
using ScaleResist.Solving;

namespace ScaleResist.Cli;

/// <summary>Estimates with the library.</summary>
internal sealed class LibraryEngine : IEstimateEngine
{
    public EstimateOutcome Run(EstimateRequest request, Func<InputFacts, ITableSink> openSink, IRunObserver observer,
        CancellationToken interrupted)
    {
        long begin = Stopwatch.GetTimestamp();
        Network network = Load(request.Network, request.Reading, observer, interrupted);
        EstimateInputs inputs = new()
        {
            Pairs = request.Pairs is string pairs ? NetworkInput.ReadPairs(pairs, network.Labels, ct: interrupted) : null,
            NodeWeights = request.NodeWeights is string weights
                ? NetworkInput.ReadNodeWeights(weights, network.Labels, ct: interrupted)
                : null,
            Terminals = request.Terminals is string terminals
                ? NetworkInput.ReadTerminals(terminals, network.Labels, ct: interrupted)
                : null,
        };
        try
        {
            EstimateSummary summary =
                EstimateRun.Execute(network, Left(request.Plan, begin), inputs, openSink(network.Input), observer, interrupted);
            return new EstimateOutcome(network.Input, network.Cleaning, summary);
        }
        catch (SolveException unsolved)
        {
            throw Unsolved(request.Network, unsolved);
        }
    }

    // Of a time budget, what reading and building have left.
    private static EstimatePlan Left(EstimatePlan plan, long begin) => plan.TimeBudget is not TimeSpan budget ? plan
        : plan with { TimeBudget = TimeSpan.FromSeconds(Math.Max(0, (budget - Stopwatch.GetElapsedTime(begin)).TotalSeconds)) };

    public SurveyOutcome Survey(SurveyRequest request, IRunObserver observer, CancellationToken interrupted)
    {
        Network network = Load(request.Network, request.Reading, observer, interrupted);
        return new SurveyOutcome(network, NetworkSurvey.Of(network, request.Plan, observer, interrupted));
    }

    public ImpactOutcome Impact(ImpactRequest request, Func<InputFacts, ITableSink> openSink, IRunObserver observer,
        CancellationToken interrupted)
    {
        Network network = Load(request.Network, request.Reading, observer, interrupted);
        ImpactInputs inputs = new()
        {
            Cases = request.Changes is string changes ? NetworkInput.ReadChanges(changes, network, interrupted) : null,
            Candidates = request.Candidates is string candidates ? NetworkInput.ReadCandidates(candidates, network, interrupted) : null,
            Pairs = request.Pairs is string pairs ? NetworkInput.ReadPairs(pairs, network.Labels, ct: interrupted) : null,
            NodeWeights = request.NodeWeights is string weights
                ? NetworkInput.ReadNodeWeights(weights, network.Labels, ct: interrupted)
                : null,
        };
        if (request.Plan.Budget is not null && inputs.Candidates!.Any(candidate => candidate.Cost is null))
            throw new InputException(request.Candidates!, null, "there is no column 'cost', which --budget needs", "give every candidate a cost");
        try
        {
            ImpactSummary summary = ImpactRun.Execute(network, request.Plan, inputs, openSink(network.Input), observer, interrupted);
            return new ImpactOutcome(network.Input, network.Cleaning, summary);
        }
        catch (SolveException unsolved)
        {
            throw Unsolved(request.Network, unsolved);
        }
    }

    public TuneOutcome Tune(TuneRequest request, double before, Func<ITableSink> openTables, IRunObserver observer, CancellationToken interrupted)
    {
        long begin = Stopwatch.GetTimestamp();
        Network network = Load(request.Network, request.Reading, observer, interrupted);
        before += Stopwatch.GetElapsedTime(begin).TotalSeconds;
        try
        {
            return new TuneOutcome(network, Frontier.Of(network, request.Plan, before, openTables, observer, interrupted));
        }
        catch (SolveException unsolved)
        {
            throw Unsolved(request.Network, unsolved);
        }
    }

    // Doubles end where conductances of one component lie some fourteen decades apart; that is for the input to mend.
    private static InputException Unsolved(string network, SolveException unsolved) => new(network, null, unsolved.Message,
        "its conductances lie too far apart: merge nodes that nothing parts, or drop links that carry nothing", unsolved);

    internal static Network Load(string path, ReadOptions reading, IRunObserver observer, CancellationToken interrupted)
    {
        FileInfo file = new(path);
        observer.Begin("reading", file.Exists ? file.Length : null, "bytes");
        EdgeList rows = NetworkInput.Read(path, reading, bytes => observer.Report(bytes), interrupted);
        observer.End();
        interrupted.ThrowIfCancellationRequested();
        observer.Begin("building", rows.Links.Count, "rows");
        Network network = NetworkBuilder.Build(rows);
        observer.End();
        return network;
    }
}
