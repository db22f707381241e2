// How far to trust the numbers: standard errors and what more probes would make of them, the audit, Foster's sum.
// Invariant: what is foreseen is told apart from what was measured.

using ScaleResist.Cli.Report.Findings;
using ScaleResist.Cli.Report.Html;
using ScaleResist.Runs;

namespace ScaleResist.Cli.Report.Sections;

/// <summary>Accuracy.</summary>
internal sealed class AccuracySection(RunRecord record) : IReportSection
{
    public string Id => "accuracy";

    public string Title => "How far to trust it";

    public HtmlText Note => record.Probing is null
        ? (HtmlText)$"Nothing was estimated. Spanning probabilities must sum to nodes minus components (Foster 1949): the check of every run."
        : (HtmlText)($"Standard errors fall as the square root of the number of probes. An audit solves random links and pairs to certified "
            + $"bounds and holds the estimates against them.");

    public bool HasContent => record.Foster is not null || record.Probing is not null;

    public void Write(HtmlWriter html)
    {
        html.Facts(Facts());
        if (record.Probing is ProbingFacts probing)
            ErrorAgainstProbes(html, probing.Probes);
        if (record.Audit is { Compared: > 0 } && record.Findings.Audit is { Count: > 0 } rows)
            Audited(html, record.Audit, rows);
    }

    private IEnumerable<(string, HtmlText)> Facts()
    {
        if (record.Probing is ProbingFacts probing)
        {
            yield return ("Probes", $"{(long)probing.Probes}, stopped by {probing.StoppedBy}");
            if (probing is { TargetError: double target, RelativeStandardError: double reached })
                yield return ("Target error", $"{Figure.Percent(target)}; reached {Figure.Percent(reached)}");
        }
        if (record.Findings.Links?.RelativeError is ErrorBounds bounds)
        {
            yield return ("Relative standard error of links", $"half below {Figure.Percent(bounds.HalfBelow, 2)}, "
                + $"{Figure.Percent(0.95)} below {Figure.Percent(bounds.Percent95Below, 2)} ({bounds.Rows} estimated links)");
        }
        if (record.Audit is { Compared: > 0 } audit)
        {
            yield return ("Observed error", $"median {Figure.Percent(audit.MedianError!.Value, 2)}, {Figure.Percent(0.95)} below "
                + $"{Figure.Percent(audit.Percentile95Error!.Value, 2)}, worst {Figure.Percent(audit.WorstError!.Value, 2)}");
            yield return ("Intervals that held", $"{(long)audit.Held} of {(long)audit.Intervals}, where {Figure.Percent(record.Confidence, 4)} should");
            if (audit.TooWide > 0)
                yield return ("Not compared", $"{(long)audit.TooWide}, whose bounds are too wide");
        }
        if (record.Foster is FosterCheck foster)
        {
            yield return ("Foster’s sum", $"{Figure.Of(foster.Sum, 9)}, nodes minus components {foster.Expected}");
        }
    }

    private void ErrorAgainstProbes(HtmlWriter html, int probes)
    {
        List<(string Name, string Kind, double Error)> errors = [];
        if (record.Findings.Links?.RelativeError is ErrorBounds bounds)
        {
            errors.Add(("95 % of links", "second", bounds.Percent95Below));
            errors.Add(("half of links", "first", bounds.HalfBelow));
        }
        if (record.Index.Count > 0 && record.Index[0].KirchhoffIndex is { StandardError: > 0 } index)
            errors.Add(("Kirchhoff index", "third", index.StandardError / index.Value));
        if (errors.Count == 0)
            return;
        double[] counts = [.. new[] { probes / 4.0, probes, probes * 4.0, probes * 16.0 }.Where(count => count == probes || count is >= 4 and <= 4096)];
        Series[] series =
        [
            .. errors.Select(one => new Series(one.Kind, [.. counts.Select(count => new Point(count, At(one.Error, count)))],
                point => point.X == probes)),
        ];
        IEnumerable<double> all = series.SelectMany(one => one.Points).Select(point => point.Y);
        using (html.Open("figure"))
        {
            html.Element("h3", "Error against probes");
            html.Key(errors.Select(one => (one.Name, one.Kind)));
            Plot.Points(html, new PlotText("accuracy-probes", "Relative standard error against the number of probes",
                    string.Join("; ", errors.Select(one => $"{one.Name}: {Numbers.Value(100 * one.Error, 2)} % at {probes} probes"))
                    + ". It halves with four times the probes."),
                Axis.Log(counts[0] / 1.25, counts[^1] * 1.25, "Probes, logarithmic", counts),
                Axis.Log(all.Min() * 70, all.Max() * 150), [.. series.Select(Percent)]);
            html.Element("figcaption", $"Relative standard error in percent, logarithmic. Filled: this run, {(long)probes} probes. Open: foreseen "
                + $"from it by the square root; time grows with the probes.");
            html.Behind("The same in figures", () => html.Table("Relative standard error by number of probes",
                counts,
                [
                    new("#Probes", count => $"{Numbers.Count((long)count)}"),
                    .. errors.Select(one =>
                        new Column<double>("#" + one.Name, count => $"{Numbers.Value(100 * At(one.Error, count), 2)} %")),
                    new("Which", count => count == probes ? (HtmlText)$"this run" : $"foreseen"),
                ]));
        }

        double At(double error, double count) => error * Math.Sqrt(probes / count);

        static Series Percent(Series series) =>
            series with { Points = [.. series.Points.Select(point => new Point(point.X, 100 * point.Y))] };
    }

    private static void Audited(HtmlWriter html, AuditFacts facts, IReadOnlyList<AuditRow> rows)
    {
        double reach = 100 * Math.Max(1e-6, facts.WorstError!.Value) * 1.08;
        using (html.Open("figure"))
        {
            html.Element("h3", "What the audit found");
            Plot.Dots(html, new PlotText("accuracy-audit", "Errors of audited links and pairs", $"{rows.Count} errors in percent of the certified "
                    + $"value, from {Numbers.Value(100 * rows.Min(row => row.RelativeError), 2)} to {Numbers.Value(100 * rows.Max(row => row.RelativeError), 2)}."),
                Axis.Linear(-reach, reach, "Error in percent of the certified value"), rows.Select(row => 100 * row.RelativeError));
            html.Element("figcaption", $"Each dot is a link or pair drawn at random: right of the line the estimate is too high, left of it too low.");
            html.Behind("The same in figures", () => html.Table("Audited links and pairs",
                rows,
                [
                    new("Link or pair", row => Phrases.Ends(row.Source, row.Target)),
                    new("#Estimate", row => $"{Figure.Of(row.Resistance, 5)}"),
                    new("#Certified from", row => $"{Figure.Of(row.ReferenceLower, 7)}"),
                    new("#To", row => $"{Figure.Of(row.ReferenceUpper, 7)}"),
                    new("#Error", row => $"{Figure.Percent(row.RelativeError, 2)}"),
                ]));
        }
    }
}
