// What a person reads after a run, in at most 25 lines: what was read, what came out and how far to trust it, where it is.

using ScaleResist.Cli.Lake;
using ScaleResist.Cli.Progress;
using ScaleResist.Estimating;
using ScaleResist.Graphs;
using ScaleResist.Runs;

namespace ScaleResist.Cli.Report;

/// <summary>The summary on standard output.</summary>
internal static class SummaryText
{
    private const int MostBridges = 3;
    private const int MostLosses = 5;

    /// <summary>The lines of the summary.</summary>
    /// <param name="record">The run's record.</param>
    /// <param name="published">The folder of the run as the user would name it.</param>
    public static IEnumerable<string> Of(RunRecord record, string published)
    {
        InputFacts input = record.Input;
        foreach (string line in OfInput(input, record.Cleaning, record.Network.Nodes, record.Network.Links))
            yield return line;
        IndexEntry? largest = record.Index.Count > 0 ? record.Index[0] : null;
        yield return Entry("components", Numbers.Count(record.Network.Components)
            + (largest is null
                ? ""
                : $", the largest with {Numbers.Many(largest.Nodes, "node")} and {Numbers.Many(largest.Links, "link")}")
            + $"; {Numbers.Many(record.Network.Bridges, "bridge")}");
        if (largest is not null)
        {
            Estimate index = largest.KirchhoffIndex;
            yield return Entry("Kirchhoff",
                (index.StandardError == 0
                    ? $"index {Numbers.Value(index.Value, 12)}, exact"
                    : $"index {Numbers.Value(index.Value)}, {Numbers.Value(100 * record.Confidence, 4)} % interval "
                        + $"{Numbers.Value(index.Lower)} to {Numbers.Value(index.Upper)}")
                + (record.Network.Components > 1 ? " (largest component)" : "")
                + $"; mean resistance {Numbers.Value(largest.MeanResistance, 5)}");
        }
        if (record.Connectivity is ConnectivityFacts cut)
        {
            yield return Entry("weak cut", $"{Numbers.Count(cut.SmallerSide)} and {Numbers.Many(cut.LargerSide, "node")}, "
                + $"{Numbers.Many(cut.LinksCut, "link")} of conductance {Numbers.Value(cut.ConductanceCut, 4)} between them; algebraic connectivity "
                + (cut.Settled ? Numbers.Value(cut.Value, 8) : $"at most {Numbers.Value(cut.Value, 3)}"));
        }
        if (record.Foster is FosterCheck foster)
        {
            yield return Entry("Foster", $"spanning probabilities sum to {Numbers.Value(foster.Sum, 7)}; nodes minus components "
                + $"{Numbers.Count(foster.Expected)} ({Signed(100 * foster.RelativeDifference)} %)");
        }
        foreach (string line in Critical(record.CriticalLinks))
            yield return line;
        if (record.Exact is ExactFacts exact)
        {
            yield return Entry("exact", $"{Numbers.Count(exact.Entries)} entries, {Numbers.Value(exact.Operations / 1e9, 3)} Gflop; foreseen "
                + $"{Numbers.Duration(exact.ForecastSeconds)} and {Numbers.Bytes(exact.ForecastBytes)}, took {Numbers.Duration(exact.Seconds)}"
                + (exact.ProbedBlocks > 0 ? $"; {Numbers.Many(exact.ProbedBlocks, "block")} left to the probes" : ""));
        }
        if (record.Solver is SolverFacts solver)
        {
            yield return Entry("solver", $"{Numbers.Count(solver.Eliminated)} nodes eliminated, {solver.Preconditioner}, "
                + $"{Numbers.Many(solver.Columns, "right-hand side")}, at most {Numbers.Many(solver.MostIterations, "iteration")}, "
                + $"error {Numbers.Value(solver.LargestEnergyError, 2)}, residual {Numbers.Value(solver.LargestResidual, 2)}"
                + (solver.Retried > 0 ? $", {Numbers.Count(solver.Retried)} again in doubles" : "")
                + (solver.DeflationSolves > 0 ? $"; {Numbers.Count(solver.DeflationSolves)} more, rough, to deflate the index and the nodes" : ""));
        }
        if (record.Probing is ProbingFacts probing)
            yield return Entry("probes", Probes(probing));
        if (record.Terminals is TerminalFacts terminals)
        {
            yield return Entry("terminals", $"{Numbers.Many(terminals.Terminals, "node")} shorted into one; "
                + (terminals.Method == "exact" ? "resistances to it exact" : $"resistances to it from {Numbers.Many(terminals.Probes, "probe")}")
                + (terminals.NodesWithout == 0 ? "" : $"; {Numbers.Many(terminals.NodesWithout, "node")} in "
                    + $"{Numbers.Many(terminals.ComponentsWithout, "component")} without a terminal: infinite"));
        }
        if (record.Audit is AuditFacts { Compared: > 0 } audit)
        {
            yield return Entry("audit", $"{Numbers.Many(audit.Compared, "random link")} and pairs solved: relative error "
                + $"{Numbers.Value(audit.MedianError!.Value, 2)} (median), {Numbers.Value(audit.Percentile95Error!.Value, 2)} (95 %), "
                + $"{Numbers.Value(audit.WorstError!.Value, 2)} (worst); {audit.Held} of {Numbers.Many(audit.Intervals, "interval")} held"
                + (audit.SolverError is double off ? $"; solves off by {Numbers.Value(off, 2)} where {Numbers.Value(audit.SolverErrorAllowed, 2)} is allowed" : ""));
        }
        if (record is { Audit: null, Probing.StoppedBy: "time" } && record.Rows.Keys.Intersect(["links", "pairs"]).Any())
            yield return Entry("audit", "none: the time budget left no time for it");
        yield return Entry("time", $"{Numbers.Duration((record.Finished - record.Started).TotalSeconds)}: "
            + string.Join(", ", ShortPhases(record.Phases).Select(p => $"{p.Name} {Numbers.Duration(p.Seconds)}")));
        yield return Entry("memory",
            $"{Numbers.Bytes(record.PeakResidentBytes)} at the peak, {Numbers.Many(record.Threads, "thread")}");
        yield return Entry("tables", published + ": "
            + string.Join(", ", record.Rows.Select(t => $"{t.Key} {Numbers.Count(t.Value)}")));
        yield return Entry("query", Query(published, record.Rows.Keys));
        yield return Entry("report", Path.Combine(published, RunFolder.ReportName));
        if (record.Audit?.Warning is string warning)
            yield return Entry("warning", $"{warning}; do not trust the error bars of this run, and report it");
    }

    // The first bridges and the first of the others.
    private static IEnumerable<string> Critical(IReadOnlyList<CriticalLink> links)
    {
        string heading = "critical";
        foreach (CriticalLink link in links.Where(link => link.NodesCutOff is not null).Take(MostBridges))
        {
            yield return Entry(heading, $"{Ends(link)}: bridge, cuts off {Numbers.Many(link.NodesCutOff!.Value, "node")}, resistance "
                + Numbers.Value(link.Resistance.Value, 5));
            heading = "";
        }
        heading = "loss";
        foreach (CriticalLink link in links.Where(link => link.LossImpact is not null).Take(MostLosses))
        {
            Estimate impact = link.LossImpact!.Value;
            yield return Entry(heading, $"{Ends(link)}: raises the Kirchhoff index by {Numbers.Value(impact.Value, 5)}"
                + (impact.StandardError > 0 ? $" +- {Numbers.Value(impact.StandardError, 2)}" : "")
                + $", rank {link.LossRank}"
                + (link.LossRankLower == link.LossRankUpper ? "" : $" ({link.LossRankLower} to {link.LossRankUpper})"));
            heading = "";
        }

        static string Ends(CriticalLink link) => $"{InputException.Show(link.Source)} - {InputException.Show(link.Target)}";
    }

    /// <summary>What was read and cleaned.</summary>
    public static IEnumerable<string> OfInput(InputFacts input, CleaningFacts cleaning, long nodes, long links)
    {
        yield return Entry("network", $"{input.Path} ({input.Form}, {Numbers.Bytes(input.Bytes)}): "
            + $"{Numbers.Many(nodes, "node")}, {Numbers.Many(links, "link")}");
        yield return Entry("cleaning", $"{Numbers.Many(cleaning.SelfLoops, "self-loop")} dropped, "
            + $"{Numbers.Many(cleaning.ParallelLinks, "parallel link")} merged; {Numbers.Many(input.Rows, "row")}, "
            + $"{Numbers.Many(input.CommentLines, "comment line")}, {(input.Header is null ? "no header" : "a header")}, "
            + $"columns {string.Join(',', input.Columns)}");
    }

    /// <summary>One line: a name and what it says.</summary>
    public static string Entry(string name, string text) => $"{name,-11}{text}";

    /// <summary>A query to paste into DuckDB.</summary>
    public static string Query(string published, IEnumerable<string> tables)
    {
        string[] names = [.. tables];
        string? table = names.Contains("links") ? "links" : names.FirstOrDefault();
        string files = Path.Combine(published, table ?? "*", "*.parquet").Replace("'", "''");
        return table == "links"
            ? $"FROM '{files}' ORDER BY spanning_probability DESC LIMIT 20;"
            : $"FROM '{files}' LIMIT 20;";
    }

    private static string Probes(ProbingFacts probing)
    {
        string target = probing is { TargetError: double wanted, RelativeStandardError: double reached }
            ? $"; relative standard errors: 95 % below {Numbers.Value(reached, 2)}, target {Numbers.Value(wanted, 3)}"
            : "";
        return $"{Numbers.Count(probing.Probes)}, stopped by {probing.StoppedBy}{target}";
    }

    // The tables' writing in one sum; run.json has them one by one.
    private static IEnumerable<PhaseTime> ShortPhases(IEnumerable<PhaseUse> phases) => phases
        .GroupBy(p => p.Name.StartsWith("writing ", StringComparison.Ordinal) ? "writing" : p.Name)
        .Select(g => new PhaseTime(g.Key, g.Sum(p => p.Seconds)));

    private static string Signed(double percent) =>
        percent.ToString("+0.000;-0.000;0", System.Globalization.CultureInfo.InvariantCulture);
}
