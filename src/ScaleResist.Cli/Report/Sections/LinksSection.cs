// How resistance and spanning probability spread over the links. Invariant: a distribution of one value is a sentence, not a plot.

using ScaleResist.Cli.Report.Findings;
using ScaleResist.Cli.Report.Html;

namespace ScaleResist.Cli.Report.Sections;

/// <summary>Distributions over links.</summary>
internal sealed class LinksSection(LinkFindings? links) : IReportSection
{
    public string Id => "links";

    public string Title => "What the links carry";

    public HtmlText Note => $"The spanning probability of a link is the chance that a random spanning tree needs it: near 0 there are many ways "
        + $"around, 1 is a bridge. The resistance of a link is that between its ends, over every route at once.";

    public bool HasContent => links is not null && links.Methods.Values.Sum() > 0;

    public void Write(HtmlWriter html)
    {
        bool bridges = links!.SpanningProbability.Bins.Any(bin => bin.Marked > 0);
        bool others = links.SpanningProbability.Bins.Any(bin => bin.Count > bin.Marked);
        Distribution(html, "probability", "Links by spanning probability", "Spanning probability", links.SpanningProbability, bridges && others);
        Distribution(html, "resistance", "Links by resistance", "Resistance between the ends", links.Resistance, bridges && others);
        html.Element("p", Methods(), ("class", "beside"));
    }

    private static void Distribution(HtmlWriter html, string id, string title, string axis, Histogram histogram, bool marked)
    {
        if (histogram is not { Least: double least, Most: double most })
            return;
        if (least == most || histogram.Bins.Count < 2)
        {
            html.Element("h3", title);
            html.Element("p", least == most
                ? (HtmlText)$"Every link has {axis.ToLowerInvariant()} {least}."
                : $"{axis} of all links lies from {least} to {most}.");
            return;
        }
        IReadOnlyList<Bin> bins = histogram.Bins;
        Bin tallest = bins.MaxBy(bin => bin.Count);
        long all = bins.Sum(bin => bin.Count);
        bool isLog = histogram.Scale == "log";
        Axis x = isLog
            ? Axis.Log(bins[0].From, bins[^1].To, axis + ", logarithmic")
            : Axis.Linear(bins[0].From, bins[^1].To, axis);
        using (html.Open("figure"))
        {
            html.Element("h3", title, ("id", $"links-{id}"));
            if (marked)
                html.Key([("bridges", "second"), ("other links", "first")]);
            Plot.Histogram(html, new PlotText($"links-{id}-plot", title, $"{axis} from {Numbers.Value(least, 3)} to {Numbers.Value(most, 3)}. The fullest "
                + $"of {bins.Count} bins, {Numbers.Value(tallest.From, 3)} to {Numbers.Value(tallest.To, 3)}, holds {Numbers.Count(tallest.Count)} of "
                + $"{Numbers.Count(all)} links."), x, [.. bins.Select(bin => new Bar(bin.From, bin.To, bin.Count, bin.Marked))]);
            html.Element("figcaption", $"From {Figure.Of(least, 4)} to {Figure.Of(most, 4)}; heights count links.");
            html.Behind("The same in figures", () => html.Table($"{title}, in bins", bins.Where(bin => bin.Count > 0),
            [
                new("#From", bin => $"{Figure.Of(bin.From, 4)}"),
                new("#To", bin => $"{Figure.Of(bin.To, 4)}"),
                new("#Links", bin => $"{bin.Count}"),
                new("#Of them bridges", bin => $"{bin.Marked}", marked),
            ]));
        }
    }

    private HtmlText Methods()
    {
        HtmlText text = $"";
        string separator = "";
        foreach ((string method, long count) in links!.Methods)
        {
            string how = method switch
            {
                "bridge" => $"bridge{EstimateReport.Plural(count)}, exact",
                "exact" => "exact",
                "probe" => "estimated by probes",
                _ => method,
            };
            text = $"{text}{separator}{count} {how}";
            separator = "; ";
        }
        return $"Links by method: {text}.";
    }
}
