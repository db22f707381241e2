// How well connected the network is: the Kirchhoff index of its largest component, large, and all components in a table.

using ScaleResist.Cli.Report.Html;
using ScaleResist.Estimating;
using ScaleResist.Runs;

namespace ScaleResist.Cli.Report.Sections;

/// <summary>The indices.</summary>
internal sealed class IndexSection(RunRecord record) : IReportSection
{
    public string Id => "index";

    public string Title => "How well connected";

    public HtmlText Note => $"The Kirchhoff index adds up the resistance distance of every pair of nodes, each link a conductor. "
        + $"Less is better connected; compare it with other states of the same network.";

    public bool HasContent => record.Index.Count > 0;

    public void Write(HtmlWriter html)
    {
        IndexEntry largest = record.Index[0];
        Estimate index = largest.KirchhoffIndex;
        bool isExact = index.StandardError == 0;
        html.Element("h3", record.Network.Components > 1 ? "Kirchhoff index, largest component" : "Kirchhoff index");
        html.Element("p", $"{Figure.Of(index.Value, isExact ? 9 : 6)}", ("class", "headline"));
        if (isExact)
        {
            html.Element("p", "Exact: no error but rounding.", ("class", "beside"));
        }
        else if (index.Upper > index.Lower)
        {
            string confidence = $"{Numbers.Value(100 * record.Confidence, 4)} % interval";
            using (html.Open("div", ("class", "interval")))
            {
                Plot.Dimension(html, new PlotText("index-interval", confidence, $"The Kirchhoff index is {Numbers.Value(index.Value)}; the {confidence} "
                    + $"reaches from {Numbers.Value(index.Lower)} to {Numbers.Value(index.Upper)}."), index.Lower, index.Value, index.Upper);
            }
            html.Element("p", $"{Figure.Percent(record.Confidence, 4)} interval {index.Lower} to {index.Upper}; one standard error is "
                + $"{Figure.Of(index.StandardError, 3)}, {Figure.Percent(index.StandardError / index.Value, 2)} of the value.", ("class", "beside"));
        }
        html.Facts(Facts(largest));
        if (record.Network.Components > 1)
            Components(html);
    }

    private static IEnumerable<(string, HtmlText)> Facts(IndexEntry entry)
    {
        yield return ("Mean resistance of a pair", $"{entry.MeanResistance}");
        yield return ("Kemeny’s constant", $"{entry.KemenyConstant}");
        yield return ("Degree-Kirchhoff index", $"{entry.DegreeKirchhoffIndex}");
        if (entry.NodeWeightedKirchhoffIndex is double weighted)
            yield return ("Node-weighted Kirchhoff index", $"{weighted}");
        if (entry.AlgebraicConnectivity is double connectivity)
            yield return ("Algebraic connectivity", $"{connectivity}");
        if (entry.LogSpanningTrees is double trees)
            yield return ("Logarithm of the spanning trees", $"{trees}");
        yield return ("Total conductance", $"{entry.TotalConductance}");
    }

    private void Components(HtmlWriter html)
    {
        long more = record.Network.Components - record.Index.Count;
        html.Table(more > 0 ? "The largest components" : "All components", record.Index,
        [
            new("Component", entry => $"{(long)entry.ComponentId}"),
            new("#Nodes", entry => $"{entry.Nodes}"),
            new("#Links", entry => $"{entry.Links}"),
            new("#Kirchhoff index", entry => $"{Figure.Of(entry.KirchhoffIndex.Value, entry.KirchhoffIndex.StandardError == 0 ? 9 : 6)}"),
            new("#Interval", entry => Phrases.Interval(entry.KirchhoffIndex, 6), record.Index.Any(entry => entry.KirchhoffIndex.StandardError > 0)),
            new("#Mean resistance", entry => $"{entry.MeanResistance}"),
        ]);
        if (more > 0)
            html.Element("p", $"{more} more component{EstimateReport.Plural(more)} in the table index.", ("class", "beside"));
    }
}
