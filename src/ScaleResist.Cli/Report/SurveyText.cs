// What `survey` prints: what is in the network, what each route would take, and the command to go on with.

using ScaleResist.Cli.Commands;
using ScaleResist.Graphs;
using ScaleResist.Runs;

namespace ScaleResist.Cli.Report;

/// <summary>The lines of a survey.</summary>
internal static class SurveyText
{
    /// <summary>The lines.</summary>
    public static IEnumerable<string> Of(SurveyOutcome outcome, EstimatePlan plan)
    {
        (Network network, NetworkSurvey survey) = outcome;
        foreach (string line in SummaryText.OfInput(network.Input, network.Cleaning, network.NodeCount, network.LinkCount))
            yield return line;
        Component largest = network.Components[0];
        yield return SummaryText.Entry("components", $"{Numbers.Count(network.Components.Count)}, the largest with "
            + $"{Numbers.Many(largest.Nodes, "node")} and {Numbers.Many(network.LinksOf(largest), "link")}");
        yield return SummaryText.Entry("degrees", $"{Numbers.Count(survey.LeastDegree)} to {Numbers.Count(survey.MostDegree)}, mean "
            + $"{Numbers.Value(2.0 * network.LinkCount / network.NodeCount, 3)}; conductances "
            + (network.Conductances is null
                ? "all 1"
                : $"{Numbers.Value(survey.LeastConductance, 3)} to {Numbers.Value(survey.MostConductance, 3)}"));
        yield return SummaryText.Entry("blocks", $"{Numbers.Many(survey.Bridges, "bridge")}, {Numbers.Many(survey.Blocks, "larger block")}, "
            + $"{Numbers.Many(survey.CutNodes, "cut node")}"
            + (survey.Blocks == 0
                ? ""
                : $"; the largest with {Numbers.Many(survey.LargestBlockNodes, "node")} and {Numbers.Many(survey.LargestBlockLinks, "link")}"));
        yield return SummaryText.Entry("exact", survey.Exact is null
            ? "no factor within the budget"
            : $"{Numbers.Count(survey.Exact.Entries)} entries, {Numbers.Value(survey.Exact.Operations / 1e9, 3)} Gflop: about "
                + $"{Numbers.Duration(survey.Exact.Seconds)}, {Numbers.Bytes(survey.Exact.Bytes)}"
                + (survey.IsExact ? "" : $"; {Numbers.Many(survey.ProbedBlocks, "block")} too large for it"));
        ProbeForecast probe = survey.Probe;
        yield return SummaryText.Entry("probe", $"{Numbers.Count(probe.Probes)} probes: about {Numbers.Duration(probe.Seconds)}, "
            + $"{Numbers.Bytes(probe.Bytes)}; {Numbers.Count(probe.Eliminated)} nodes eliminated, {probe.Preconditioner} ({probe.Reason}), "
            + $"{Numbers.Many(probe.Iterations, "iteration")}");
        yield return SummaryText.Entry("route", survey.IsExact
            ? "--route auto is exact: no error bars"
            : $"--route auto probes {(survey.Exact is null ? "all but the bridges" : "what the exact part leaves")}: "
                + $"{Numbers.Count(plan.ForeseenProbes)} probes unless --probes or --target-error says otherwise");
    }
}
