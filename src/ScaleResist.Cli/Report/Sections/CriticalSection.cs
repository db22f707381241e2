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
            Bridges(html, links.Bridges);
        if (links.Losses.Count > 0)
            Losses(html, links.Losses);
        if (links.Others.Count > 0)
            Others(html, links.Others);
    }

    private void Bridges(HtmlWriter html, IReadOnlyList<LinkRow> rows)
    {
        double most = rows.Max(link => link.NodesCutOff ?? 0);
        html.Element("h3", "Bridges that cut off most");
        html.Table(CaptionOf(rows.Count, record.Network.Bridges, "bridge"), rows,
        [
            new("Link", link => Phrases.Ends(link.Source, link.Target)),
            new("#Nodes cut off", link => $"{link.NodesCutOff ?? 0}"),
            new("~Beside the first", link => Plot.CellBar((link.NodesCutOff ?? 0) / Math.Max(1, most), marked: true)),
            new("#Resistance", link => $"{Figure.Of(link.Resistance.Value, 4)}"),
        ]);
    }

    private static void Losses(HtmlWriter html, IReadOnlyList<LinkRow> rows)
    {
        double most = rows.Max(link => link.LossImpact ?? 0);
        html.Element("h3", "Losses that raise the Kirchhoff index most");
        html.Table(CaptionOf(rows.Count, null, "link"), rows,
        [
            new("Link", link => Phrases.Ends(link.Source, link.Target)),
            new("#Rise of the index", link => $"{Figure.Of(link.LossImpact!.Value, 4)}"),
            new("~Beside the first", link => Plot.CellBar(most > 0 ? link.LossImpact!.Value / most : 0)),
            new("#Standard error", link => $"{Figure.Of(link.LossImpactSe ?? 0, 2)}", rows.Any(link => link.LossImpactSe > 0)),
        ]);
    }

    // Intervals share an axis from a round number below the lowest to 1.
    private void Others(HtmlWriter html, IReadOnlyList<LinkRow> rows)
    {
        bool estimated = rows.Any(link => link.Resistance.StandardError > 0);
        double from = Math.Floor(rows.Min(link => link.Conductance * link.Resistance.Lower) * 20) / 20;
        from = Math.Clamp(from, 0, 0.95);
        html.Element("h3", "Links with the fewest ways around");
        html.Table(
            CaptionOf(rows.Count, record.Network.Links - record.Network.Bridges, "link that is no bridge", "links that are no bridges"), rows,
        [
            new("Link", link => Phrases.Ends(link.Source, link.Target)),
            new("#Spanning probability", link => $"{Figure.Of(link.SpanningProbability, 4)}"),
            new($"~From {Numbers.Value(from, 2)} to 1", link => Plot.CellInterval(
                Place(link.Conductance * link.Resistance.Lower), Place(link.SpanningProbability), Place(link.Conductance * link.Resistance.Upper)), estimated),
            new("#Resistance", link => $"{Figure.Of(link.Resistance.Value, 4)}"),
            new("#Interval", link => Phrases.Interval(link.Resistance, 4), estimated),
        ]);

        double Place(double probability) => (probability - from) / (1 - from);
    }

    private static string CaptionOf(int shown, long? all, string one, string? many = null) =>
        shown == 1 ? $"The only {one}" : all is long total && total > shown ? $"The first {shown} of {Numbers.Count(total)} {many ?? one + "s"}"
            : $"{(all is null ? "The first" : "All")} {shown} {many ?? one + "s"}";
}
