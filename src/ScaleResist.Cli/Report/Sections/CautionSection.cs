// What the numbers do not say.

using ScaleResist.Cli.Report.Html;

namespace ScaleResist.Cli.Report.Sections;

/// <summary>Cautions, the same in every report.</summary>
internal sealed class CautionSection : IReportSection
{
    public string Id => "caution";

    public string Title => "Before you act on it";

    public HtmlText Note => $"Resistance measures are linear and topological.";

    public bool HasContent => true;

    public void Write(HtmlWriter html)
    {
        html.Element("p", "For power, water and other critical networks this is a screening aid: it points at links and nodes worth a closer look. "
            + "It knows no capacities, no voltages, no hydraulics, no protection and no operating rules. It replaces no contingency analysis (N-1) by "
            + "licensed practice under local codes.");
        html.Element("p", "Intervals hold for the stated quantity on the network as given. They say nothing about errors in that network.");
    }
}
