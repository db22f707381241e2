// What a person reads after a distances run.

using ScaleResist.Graphs;
using ScaleResist.Runs;

namespace ScaleResist.Cli.Report;

/// <summary>The summary on standard output.</summary>
internal static class DistancesText
{
    /// <summary>The lines of the summary.</summary>
    /// <param name="record">The run's record.</param>
    /// <param name="published">The folder of the run as the user would name it.</param>
    public static IEnumerable<string> Of(DistancesRecord record, string published)
    {
        DistanceSummary found = record.Distances;
        foreach (string line in SummaryText.OfInput(record.Input, record.Cleaning, found.Nodes, found.Links))
            yield return line;
        bool lengths = record.Plan["lengths"]?.GetValue<bool>() == true, weights = record.Plan["node_weights_sha256"] is not null;
        yield return SummaryText.Entry("costs", (weights ? "weights of the nodes entered" : lengths ? "" : "one a step")
            + (lengths ? (weights ? " and " : "") + "lengths of links" : "")
            + $"; searched by {found.Search}; {Numbers.Many(found.Components, "component")}");
        if (found.Entries.Count > 0)
        {
            DistanceEntry largest = found.Entries[0];
            string which = found.Components > 1 ? $" (component {largest.ComponentId}, {Numbers.Many(largest.Nodes, "node")})" : "";
            yield return SummaryText.Entry("diameter", $"{Numbers.Value(largest.Diameter, 9)}, from {InputException.Show(largest.PeripherySource)} to "
                + $"{InputException.Show(largest.PeripheryTarget)}{which}");
            yield return SummaryText.Entry("radius", $"{Numbers.Value(largest.Radius, 9)}, at {InputException.Show(largest.Centre)}"
                + (largest.CentreNodes > 1 ? $" and {Numbers.Many(largest.CentreNodes - 1, "other node")}" : "")
                + (found.EccentricitySearches is long searches ? $"; {Numbers.Count(searches)} searches for all nodes" : ""));
            yield return SummaryText.Entry("Wiener", $"index {Numbers.Value(largest.WienerIndex, 12)}"
                + (largest.WienerIndexSe > 0
                    ? $", interval {Numbers.Value(largest.WienerIndexLower)} to {Numbers.Value(largest.WienerIndexUpper)}, "
                        + $"{Numbers.Count(largest.Sources)} sources"
                    : ", exact")
                + $"; mean distance {Numbers.Value(largest.MeanDistance)}");
        }
        yield return SummaryText.Entry("time", $"{Numbers.Duration((record.Finished - record.Started).TotalSeconds)}: "
            + string.Join(", ", record.Phases.Select(p => $"{p.Name} {Numbers.Duration(p.Seconds)}")));
        yield return SummaryText.Entry("memory",
            $"{Numbers.Bytes(record.PeakResidentBytes)} at the peak, {Numbers.Many(record.Threads, "thread")}");
        yield return SummaryText.Entry("tables", published + ": "
            + string.Join(", ", record.Rows.Select(t => $"{t.Key} {Numbers.Count(t.Value)}")));
        yield return SummaryText.Entry("query", SummaryText.Query(published, record.Rows.Keys));
    }
}
