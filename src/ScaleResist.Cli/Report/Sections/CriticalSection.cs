// The links to look at first: bridges by what they cut off, others by spanning probability, and by the rise of the index where that is known.

using ScaleResist.Cli.Report.Findings;
using ScaleResist.Cli.Report.Html;

namespace ScaleResist.Cli.Report.Sections;

/// <summary>The most critical links.</summary>
internal sealed class CriticalSection(RunRecord record) : IReportSection
{
    private readonly LinkFindings? links = record.Findings.Links;

    public string Id => "critical";

    public string Title => "Links to look at first";

    public HtmlText Note => $"Bridges stand by what they cut off. Of the other links those stand first that have the fewest ways around, with "
        + $"intervals of {Figure.Percent(record.Confidence, 4)} where they are estimated.";

    public bool HasContent => links is not null && links.Bridges.Count + links.Others.Count > 0;

    public void Write(HtmlWriter html)
    {
        if (links!.Bridges.Count > 0)
        {
            long most = Math.Max(1, links.Bridges[0].NodesCutOff ?? 1);
            html.Element("h3", "Bridges that cut off most");
            html.Table(CaptionOf(links.Bridges.Count, record.Network.Bridges, "bridge"), ["Link", "#Nodes cut off", "Share", "#Resistance"],
                links.Bridges.Select(link => (IReadOnlyList<HtmlText>)
                [
                    Phrases.Ends(link.Source, link.Target), $"{link.NodesCutOff ?? 0}",
                    Plot.CellBar((link.NodesCutOff ?? 0) / (double)most, marked: true), $"{Figure.Of(link.Resistance.Value, 4)}",
                ]));
        }
        if (links.Losses.Count > 0)
        {
            html.Element("h3", "Losses that raise the Kirchhoff index most");
            double most = links.Losses.Max(link => link.LossImpact ?? 0);
            html.Table(CaptionOf(links.Losses.Count, null, "link"), ["Link", "#Rise of the index", "Share", "#Standard error"],
                links.Losses.Select(link => (IReadOnlyList<HtmlText>)
                [
                    Phrases.Ends(link.Source, link.Target), $"{Figure.Of(link.LossImpact!.Value, 4)}",
                    Plot.CellBar(most > 0 ? Math.Max(0, link.LossImpact.Value / most) : 0),
                    link.LossImpactSe is > 0 and double error ? (HtmlText)$"{Figure.Of(error, 2)}" : $"exact",
                ]));
        }
        if (links.Others.Count > 0)
        {
            html.Element("h3", "Links with the fewest ways around");
            html.Table(CaptionOf(links.Others.Count, record.Network.Links - record.Network.Bridges, "link that is no bridge", "links that are no bridges"),
                ["Link", "#Spanning probability", "From 0 to 1", "#Resistance", "#Interval"],
                links.Others.Select(link => (IReadOnlyList<HtmlText>)
                [
                    Phrases.Ends(link.Source, link.Target), $"{Figure.Of(link.SpanningProbability, 4)}",
                    Plot.CellInterval(link.Conductance * link.Resistance.Lower, link.SpanningProbability, link.Conductance * link.Resistance.Upper),
                    $"{Figure.Of(link.Resistance.Value, 4)}", Phrases.Interval(link.Resistance, 4),
                ]));
        }
    }

    private static string CaptionOf(int shown, long? all, string one, string? many = null) =>
        shown == 1 ? $"The only {one}" : all is long total && total > shown ? $"The first {shown} of {Numbers.Count(total)} {many ?? one + "s"}"
            : $"{(all is null ? "The first" : "All")} {shown} {many ?? one + "s"}";
}
