// Joins the command to the library's estimate run.

using ScaleResist.Cli.Commands;
using ScaleResist.Graphs;
using ScaleResist.Runs;

namespace ScaleResist.Cli;

/// <summary>Estimates with the library.</summary>
internal sealed class LibraryEngine : IEstimateEngine
{
    public EstimateOutcome Run(EstimateRequest request, Func<InputFacts, ITableSink> openSink, IRunObserver observer,
        CancellationToken interrupted) =>
        throw new NotSupportedException("The estimators are not wired to the command line yet.");
}
