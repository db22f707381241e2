// Both ends of the ranking of nodes by current-flow closeness, with the ranks that their intervals allow.

using ScaleResist.Cli.Report.Findings;
using ScaleResist.Cli.Report.Html;

namespace ScaleResist.Cli.Report.Sections;

/// <summary>The closest and the remotest nodes of the largest component.</summary>
internal sealed class NodesSection(RunRecord record) : IReportSection
{
    private readonly NodeFindings? nodes = record.Findings.Nodes;

    public string Id => "nodes";

    public string Title => "Nodes, close and remote";

    public HtmlText Note => $"Nodes rank by total resistance to all others of the {(record.Network.Components > 1 ? "largest component" : "network")}, "
        + $"the closest first. Remote nodes hang on by little. Ranks from and to are those that intervals of {Figure.Percent(record.Confidence, 4)} allow.";

    public bool HasContent => nodes is not null && nodes.Closest.Count > 1;

    public void Write(HtmlWriter html)
    {
        bool few = nodes!.Closest.Count == nodes.Remotest.Count && nodes.Closest[^1].Node == nodes.Remotest[0].Node;
        if (few)
        {
            Rows(html, "All nodes", "By closeness", nodes.Closest);
            return;
        }
        string all = Numbers.Count(nodes.Remotest[0].ClosenessRank);
        Rows(html, "The remotest", $"The last {nodes.Remotest.Count} of {all} by closeness, the last first", nodes.Remotest);
        Rows(html, "The closest", $"The first {nodes.Closest.Count} of {all} by closeness", nodes.Closest);
    }

    private static void Rows(HtmlWriter html, string title, string caption, IReadOnlyList<NodeRow> rows)
    {
        html.Element("h3", title);
        html.Table(caption, rows,
        [
            new("Node", row => $"{new Label(row.Node)}"),
            new("#Rank", row => $"{row.ClosenessRank}"),
            new("#From – to", Range, rows.Any(row => row.ResistanceDiagonalSe > 0)),
            new("#Links", row => $"{row.Degree}"),
            new("#Total resistance", row => $"{Figure.Of(row.TotalResistance, 5)}"),
            new("#Closeness", row => $"{Figure.Of(row.Closeness, 4)}"),
            new("#Diagonal of L⁺", Diagonal),
        ]);
    }

    private static HtmlText Diagonal(NodeRow row) => row.ResistanceDiagonalSe > 0
        ? (HtmlText)$"{Figure.Of(row.ResistanceDiagonal, 4)} ± {Figure.Of(row.ResistanceDiagonalSe, 2)}"
        : $"{Figure.Of(row.ResistanceDiagonal, 4)}";

    private static HtmlText Range(NodeRow row) => row.RankLower == row.RankUpper
        ? (HtmlText)$"{row.RankLower}"
        : $"{row.RankLower} – {row.RankUpper}";
}
