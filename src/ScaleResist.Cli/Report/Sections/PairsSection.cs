// The first of the pairs that were asked for.

using ScaleResist.Cli.Report.Findings;
using ScaleResist.Cli.Report.Html;

namespace ScaleResist.Cli.Report.Sections;

/// <summary>Requested pairs.</summary>
internal sealed class PairsSection(PairFindings? pairs) : IReportSection
{
    public string Id => "pairs";

    public string Title => "Pairs asked for";

    public HtmlText Note => $"Resistance distance between given nodes, in the order of the request; between components it is infinite.";

    public bool HasContent => pairs is not null && pairs.Rows > 0;

    public void Write(HtmlWriter html)
    {
        long more = pairs!.Rows - pairs.First.Count;
        html.Table(more > 0 ? $"The first {pairs.First.Count} of {Numbers.Count(pairs.Rows)} pairs" : "All pairs",
            pairs.First,
        [
            new("Pair", pair => Phrases.Ends(pair.Source, pair.Target)),
            new("#Resistance", pair => $"{pair.Resistance.Value}"),
            new("#Interval", pair => Phrases.Interval(pair.Resistance, 6)),
            new("Method", pair => $"{pair.Method}"),
        ]);
    }
}
