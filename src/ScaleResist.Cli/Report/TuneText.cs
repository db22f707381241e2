// What `tune` prints: what was read, the points in order of time, and the command of each that is on the frontier.

using ScaleResist.Cli.Commands;
using ScaleResist.Runs;

namespace ScaleResist.Cli.Report;

/// <summary>The lines of a tuning.</summary>
internal static class TuneText
{
    /// <summary>The lines.</summary>
    /// <param name="outcome">What was found.</param>
    /// <param name="request">The command.</param>
    /// <param name="published">The run's folder; null where nothing was written.</param>
    public static IEnumerable<string> Of(TuneOutcome outcome, TuneRequest request, string? published = null)
    {
        foreach (string line in SummaryText.OfInput(
            outcome.Network.Input, outcome.Network.Cleaning, outcome.Network.NodeCount, outcome.Network.LinkCount))
        {
            yield return line;
        }
        yield return SummaryText.Entry("errors", "relative standard errors: 95 % of the rows of each table below; of the Kirchhoff index. In brackets: measured");
        foreach (FrontierPoint point in outcome.Points)
        {
            yield return SummaryText.Entry(point.OnFrontier ? "point" : "(point)",
                (point.Probes is int probes ? Numbers.Many(probes, "probe") : "exact")
                + $": rows {Error(point.PredictedError, point.AchievedError)}, index {Error(point.PredictedIndexError, point.AchievedIndexError)}, "
                + $"{Numbers.Duration(point.PredictedSeconds)}"
                + (point.AchievedSeconds is double seconds ? $" ({Numbers.Duration(seconds)})" : "")
                + $", {Numbers.Bytes(point.PredictedBytes)}");
        }
        foreach (FrontierPoint point in outcome.Points.Where(point => point.OnFrontier))
            yield return SummaryText.Entry("command", request.CommandOf(point));
        if (published is not null)
            yield return SummaryText.Entry("tables", $"{published}: frontier {Numbers.Count(outcome.Points.Count)}");
    }

    private static string Error(double? predicted, double? achieved) => predicted is not double value ? "-"
        : value == 0 ? "0" : $"{Numbers.Value(100 * value, 3)} %" + (achieved is double found ? $" ({Numbers.Value(100 * found, 3)} %)" : "");
}
