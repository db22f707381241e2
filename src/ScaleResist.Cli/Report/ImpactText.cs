// What a person reads after an impact run, in at most 25 lines.

using System.Globalization;
using ScaleResist.Graphs;
using ScaleResist.Runs;

namespace ScaleResist.Cli.Report;

/// <summary>The summary of an impact run on standard output.</summary>
internal static class ImpactText
{
    /// <summary>The lines of the summary.</summary>
    /// <param name="record">The run's record.</param>
    /// <param name="published">The folder of the run as the user would name it.</param>
    public static IEnumerable<string> Of(ImpactRecord record, string published)
    {
        ImpactSummary impact = record.Impact;
        foreach (string line in SummaryText.OfInput(record.Input, record.Cleaning, impact.Nodes, impact.Links))
            yield return line;
        (double index, double error) = (impact.KirchhoffIndex.Value, impact.KirchhoffIndex.StandardError);
        yield return SummaryText.Entry("Kirchhoff",
            (error == 0 ? $"index {Numbers.Value(index, 12)}, exact" : $"index {Numbers.Value(index)} +- {Numbers.Value(error, 2)}")
            + (impact.Components > 1 ? $" (largest of {Numbers.Count(impact.Components)} components)" : ""));
        if (impact.Cases > 0)
        {
            yield return SummaryText.Entry("cases", $"{Numbers.Many(impact.Cases, "case")}, of which {Numbers.Count(impact.Cutting)} cut nodes off");
            string heading = "worst";
            foreach (CaseLine line in impact.Worst)
            {
                yield return SummaryText.Entry(heading, Case(line));
                heading = "";
            }
            if (impact.Best is CaseLine best)
                yield return SummaryText.Entry("best", Case(best));
        }
        else
        {
            yield return SummaryText.Entry("candidates", Numbers.Count(impact.Candidates)
                + (impact.Suggestions.Count == 0 ? "; none fits" : ""));
            string heading = "add", which = record.Plan["node_weights"] is null ? "the index" : "the node-weighted index";
            foreach (SuggestionLine line in impact.Suggestions)
            {
                yield return SummaryText.Entry(heading, $"{InputException.Show(line.Source)} - {InputException.Show(line.Target)} with conductance "
                    + $"{Numbers.Value(line.Conductance, 4)}: {which} falls by {Numbers.Value(line.Gain)} to {Numbers.Value(line.IndexAfter)}"
                    + (line.Cost is double cost ? $", cost {Numbers.Value(cost, 4)}" : ""));
                heading = "";
            }
        }
        if (impact.Exact is ExactFacts exact)
        {
            yield return SummaryText.Entry("exact", $"{Numbers.Count(exact.Entries)} entries, {Numbers.Many(impact.Columns, "column")}; foreseen "
                + $"{Numbers.Duration(exact.ForecastSeconds)} and {Numbers.Bytes(exact.ForecastBytes)}, took {Numbers.Duration(exact.Seconds)}");
        }
        if (impact.Solver is SolverFacts solver)
        {
            yield return SummaryText.Entry("solver", $"{solver.Preconditioner}, {Numbers.Many(impact.Columns, "column")}, at most "
                + $"{Numbers.Many(solver.MostIterations, "iteration")}, error {Numbers.Value(solver.LargestEnergyError, 2)}; the index before by "
                + $"{Numbers.Many(impact.Probing?.Probes ?? 0, "probe")}");
        }
        yield return SummaryText.Entry("time", $"{Numbers.Duration((record.Finished - record.Started).TotalSeconds)}: "
            + string.Join(", ", record.Phases.Select(p => $"{p.Name} {Numbers.Duration(p.Seconds)}")));
        yield return SummaryText.Entry("memory", $"{Numbers.Bytes(record.PeakResidentBytes)} at the peak, {Numbers.Many(record.Threads, "thread")}");
        yield return SummaryText.Entry("tables", published + ": " + string.Join(", ", record.Rows.Select(t => $"{t.Key} {Numbers.Count(t.Value)}")));
        yield return SummaryText.Entry("query", SummaryText.Query(published, record.Rows.Keys));
        yield return SummaryText.Entry("caution", "a screening aid: linear and topological, without capacities or operating rules; it replaces no");
        yield return SummaryText.Entry("", "contingency analysis (N-1), no local code and no licensed engineer");
    }

    private static string Case(CaseLine line)
    {
        double share = line.Before > 0 ? line.Change.Value / line.Before : 0;
        string cut = line.NodesCutOff > 0
            ? $"cuts off {Numbers.Many(line.NodesCutOff, "node")}, {Numbers.Many(line.ComponentsAfter, "part")}; index of the largest "
            : "index ";
        return $"{InputException.Show(line.Case)}: {cut}"
            + $"{(line.Change.Value > 0 ? "+" : "")}{Numbers.Value(line.Change.Value)}"
            + $" ({share.ToString("+0.00 %;-0.00 %;0 %", CultureInfo.InvariantCulture)})"
            + (line.Change.StandardError > 0 ? $" +- {Numbers.Value(line.Change.StandardError, 2)}" : "");
    }
}
