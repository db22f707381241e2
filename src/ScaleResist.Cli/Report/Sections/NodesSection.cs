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
            Rows(html, "All nodes", nodes.Closest);
            return;
        }
        Rows(html, "The remotest", nodes.Remotest);
        Rows(html, "The closest", nodes.Closest);
    }

    private static void Rows(HtmlWriter html, string title, IReadOnlyList<NodeRow> rows)
    {
        html.Element("h3", title);
        html.Table($"{title}: rank and resistance", ["Node", "#Rank", "#From – to", "#Links", "#Closeness", "#Total resistance", "#Diagonal of L⁺"],
            rows.Select(row => (IReadOnlyList<HtmlText>)
            [
                $"{new Label(row.Node)}", $"{row.ClosenessRank}", Range(row), $"{row.Degree}", $"{Figure.Of(row.Closeness, 4)}",
                $"{Figure.Of(row.TotalResistance, 5)}",
                row.ResistanceDiagonalSe > 0
                    ? (HtmlText)$"{Figure.Of(row.ResistanceDiagonal, 4)} ± {Figure.Of(row.ResistanceDiagonalSe, 2)}"
                    : $"{Figure.Of(row.ResistanceDiagonal, 4)}",
            ]));
    }

    private static HtmlText Range(NodeRow row) => row.RankLower == row.RankUpper
        ? (HtmlText)$"exact"
        : $"{row.RankLower} – {row.RankUpper}";
}
