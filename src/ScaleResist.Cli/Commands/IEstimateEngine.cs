// The one thing the command needs of the library: read a network, estimate, push rows.

using ScaleResist.Graphs;
using ScaleResist.Runs;

namespace ScaleResist.Cli.Commands;

/// <summary>What a finished estimate leaves beside its tables.</summary>
internal sealed record EstimateOutcome(InputFacts Input, CleaningFacts Cleaning, EstimateSummary Summary);

/// <summary>What a survey found.</summary>
internal sealed record SurveyOutcome(Network Network, NetworkSurvey Survey);

/// <summary>What a finished impact run leaves beside its tables.</summary>
internal sealed record ImpactOutcome(InputFacts Input, CleaningFacts Cleaning, ImpactSummary Summary);

/// <summary>The frontier that a tuning found.</summary>
internal sealed record TuneOutcome(Network Network, IReadOnlyList<FrontierPoint> Points);

/// <summary>Runs estimates, surveys, tunings and impacts.</summary>
internal interface IEstimateEngine
{
    /// <summary>Reads the network and estimates what the plan wants.</summary>
    /// <param name="request">The validated command.</param>
    /// <param name="openSink">Gives the tables' sink once the input is known; called once, before the first row.</param>
    /// <param name="observer">Follows the phases, reading included.</param>
    /// <param name="interrupted">Ends the run with an <see cref="OperationCanceledException"/>.</param>
    EstimateOutcome Run(EstimateRequest request, Func<InputFacts, ITableSink> openSink, IRunObserver observer,
        CancellationToken interrupted);

    /// <summary>Reads the network and foresees an estimate.</summary>
    /// <param name="request">The validated command.</param>
    /// <param name="observer">Follows the phases, reading included.</param>
    /// <param name="interrupted">Ends the survey with an <see cref="OperationCanceledException"/>.</param>
    SurveyOutcome Survey(SurveyRequest request, IRunObserver observer, CancellationToken interrupted);

    /// <summary>Reads the network and works off planned cases, or suggests additions.</summary>
    /// <inheritdoc cref="Run"/>
    ImpactOutcome Impact(ImpactRequest request, Func<InputFacts, ITableSink> openSink, IRunObserver observer,
        CancellationToken interrupted) => throw new NotSupportedException("this engine has no impact");

    /// <summary>Reads the network, measures it and foresees what estimates would give and take.</summary>
    /// <param name="request">The validated command.</param>
    /// <param name="before">Seconds that the process took before.</param>
    /// <param name="openTables">Takes the tables of runs that are done to be measured; nobody keeps them.</param>
    /// <param name="observer">Follows the phases, reading included.</param>
    /// <param name="interrupted">Ends the measurements with an <see cref="OperationCanceledException"/>.</param>
    TuneOutcome Tune(TuneRequest request, double before, Func<ITableSink> openTables, IRunObserver observer, CancellationToken interrupted);
}
