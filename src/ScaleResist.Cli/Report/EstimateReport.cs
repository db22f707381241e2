// report.html of an estimate: which sections, in which order, under which masthead. Invariant: a function of the run's record, so that
// everything it shows is in run.json or the tables.

using ScaleResist.Cli.Report.Html;
using ScaleResist.Cli.Report.Sections;

namespace ScaleResist.Cli.Report;

/// <summary>The report of an estimate.</summary>
internal static class EstimateReport
{
    /// <summary>The page, UTF-8.</summary>
    public static byte[] Render(RunRecord record) => ReportPage.Render(Head(record),
    [
        new IndexSection(record),
        new LinksSection(record.Findings.Links),
        new CriticalSection(record),
        new NodesSection(record),
        new PairsSection(record.Findings.Pairs),
        new AccuracySection(record),
        new SolverSection(record),
        new ResourcesSection(record),
        new JobSection(record),
        new CautionSection(),
    ]);

    private static Masthead Head(RunRecord record)
    {
        HtmlWriter cautions = new();
        cautions.Element("a", "a screening aid", ("href", "#caution"));
        return new Masthead
        {
            Verb = "estimate",
            Title = Path.GetFileName(Path.TrimEndingDirectorySeparator(record.Input.Path)),
            Lede = Lede(record),
            Stamp =
            [
                ("Run", $"{new Label(record.RunId)}"),
                ("Finished", $"{record.Finished.ToString("d MMMM yyyy, HH:mm", System.Globalization.CultureInfo.InvariantCulture)} UTC"),
                ("Method", Method(record)),
                ("Use", $"{HtmlText.Trusted(cautions)}"),
            ],
            Warning = record.Audit?.Warning is string warning
                ? $"{warning}; do not trust the error bars of this run, and report it"
                : null,
        };
    }

    private static HtmlText Lede(RunRecord record)
    {
        NetworkCounts network = record.Network;
        HtmlText parts = network.Components == 1 ? (HtmlText)$"in one piece" : $"in {(long)network.Components} pieces";
        HtmlText bridges = network.Bridges switch
        {
            0 => $"No link is a bridge: the loss of any one of them parts nothing.",
            1 => $"{1L} link is a bridge: its loss parts the network.",
            _ => $"{network.Bridges} links are bridges: the loss of any one of them parts the network.",
        };
        return $"{network.Nodes} node{Plural(network.Nodes)} and {network.Links} link{Plural(network.Links)}, {parts}. {bridges}";
    }

    private static HtmlText Method(RunRecord record)
    {
        if (record.Probing is not Runs.ProbingFacts probing)
            return record.Exact is null ? (HtmlText)$"exact where computed" : $"exact, no error bars";
        return record.Exact is null
            ? (HtmlText)$"{(long)probing.Probes} random probes"
            : $"{(long)probing.Probes} random probes, exact where affordable";
    }

    /// <summary>The s of a plural.</summary>
    public static string Plural(long count) => count == 1 ? "" : "s";
}
