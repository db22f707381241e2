// How the exact part and the solves went.

using ScaleResist.Cli.Report.Html;
using ScaleResist.Runs;

namespace ScaleResist.Cli.Report.Sections;

/// <summary>Exact and solver facts.</summary>
internal sealed class SolverSection(RunRecord record) : IReportSection
{
    public string Id => "solver";

    public string Title => "How it was solved";

    public HtmlText Note => (record.Exact, record.Solver) switch
    {
        (not null, null) => $"A sparse factor and its selected inverse give every number that was asked for.",
        (null, _) => $"Random right-hand sides are solved by conjugate gradient, and every residual is recomputed at the end.",
        _ => $"Blocks with an affordable factor are exact; conjugate gradient solves the rest, and every residual is recomputed at the end.",
    };

    public bool HasContent => record.Exact is not null || record.Solver is not null;

    public void Write(HtmlWriter html)
    {
        if (record.Exact is ExactFacts exact)
        {
            html.Element("h3", "Exact part");
            html.Facts(
            [
                ("Entries of the factor", $"{exact.Entries}"),
                ("Operations", $"{Figure.Of(exact.Operations, 3)}"),
                ("Foreseen", $"{Figure.Duration(exact.ForecastSeconds)}, {Figure.Bytes(exact.ForecastBytes)}"),
                ("Took", $"{Figure.Duration(exact.Seconds)}"),
                ("Blocks left to the probes", $"{(long)exact.ProbedBlocks}"),
            ]);
        }
        if (record.Solver is SolverFacts solver)
        {
            html.Element("h3", "Iterative part");
            html.Facts(
            [
                ("Nodes eliminated before", $"{solver.Eliminated}"),
                ("Preconditioner", $"{solver.Preconditioner}"),
                ("Chosen because", $"{solver.Reason}"),
                ("Right-hand sides", $"{solver.Columns}"),
                ("Most iterations", $"{(long)solver.MostIterations}"),
                ("Largest energy error", $"{Figure.Of(solver.LargestEnergyError, 2)}"),
                ("Largest residual", $"{Figure.Of(solver.LargestResidual, 2)}"),
                ("Solved again in doubles", $"{solver.Retried}"),
                ("Solves for deflation", $"{(long)solver.DeflationSolves}"),
            ]);
        }
    }
}
