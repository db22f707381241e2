// The parts a report is made of: escaping, axes, bins, the columns an estimate does not yet fill, and the warning.

using System.Xml.Linq;
using ScaleResist.Cli.Report.Findings;
using ScaleResist.Cli.Report.Html;
using ScaleResist.Tests.Cli;

namespace ScaleResist.Tests.Report;

public sealed class Report_parts
{
    [Theory]
    [InlineData("<script>alert(1)</script>")]
    [InlineData("\"quotes\" 'and' &amp; <b>")]
    [InlineData("שלום ‮ abc")]
    [InlineData("日本語")]
    public void A_label_comes_back_through_a_parser_as_it_went_in(string label)
    {
        XElement bdi = Element(label);
        Assert.Equal(label, bdi.Value);
        Assert.Equal("bdi", bdi.Name.LocalName);
        Assert.Empty(bdi.Elements());
    }

    [Fact]
    public void A_label_of_ten_thousand_characters_is_cut_and_its_beginning_is_the_title()
    {
        string label = string.Concat(Enumerable.Range(0, 2000).Select(i => $"{i:00000}"));
        XElement bdi = Element(label);
        Assert.Equal(label[..32] + "…" + label[^12..], bdi.Value);
        Assert.StartsWith(label[..200], bdi.Attribute("title")!.Value);
        Assert.EndsWith("… (10,000 characters)", bdi.Attribute("title")!.Value);
    }

    [Fact]
    public void What_HTML_forbids_becomes_a_replacement_character()
    {
        Assert.Equal("a\ufffdb\ufffd\ufffd\ufffdc", Element("a\0b\u0001\u001b\u0085c").Value);
        Assert.Equal("\ufffdx\ufffd", Element("\ud83dx\udd0c").Value);
    }

    [Fact]
    public void A_pair_of_surrogates_is_never_cut_in_two()
    {
        for (int lead = 0; lead < 3; lead++)
        {
            XElement bdi = Element(new string('x', lead) + string.Concat(Enumerable.Repeat("\U0001f50c", 300)));
            Assert.DoesNotContain('\ufffd', bdi.Value + bdi.Attribute("title")!.Value);
        }
    }

    [Fact]
    public void Odd_labels_come_back_in_the_report_of_a_run()
    {
        using Place place = new();
        string[] labels = ["<script>alert(1)</script>", "\"a\" & 'b'", "שלום עולם", new string('x', 1000)];
        File.WriteAllLines(place.Network, labels.Select((label, i) => $"{Quoted(label)},{Quoted(labels[(i + 1) % 4])}"));
        XElement page = ReportFile.Of(place, place.Network);
        string[] shown = [.. page.Section("nodes").Descendants("bdi").Select(b => b.Value)];
        Assert.Equal([.. labels[..3], new string('x', 32) + "…" + new string('x', 12)], shown.OrderBy(l => l.Length == 45).ThenBy(l => Array.IndexOf(labels, l)));
        Assert.Empty(page.Descendants("script"));

        static string Quoted(string label) => $"\"{label.Replace("\"", "\"\"")}\"";
    }

    [Fact]
    public void Bins_hold_what_lies_between_their_edges_and_join_by_twos()
    {
        Random random = new(5);
        double[] values = [.. Enumerable.Range(0, 2000).Select(_ => Math.Exp((random.NextDouble() - 0.5) * 60)), 1, 2, 4, 1e-300, double.Epsilon, 1e300];
        LogBins bins = new();
        foreach (double value in values)
            bins.Add(value, mark: value > 1);
        bins.Add(0);
        bins.Add(double.NaN);
        bins.Add(double.PositiveInfinity);
        Assert.Equal(values.Length, bins.Total);
        foreach (int most in (int[])[1, 7, 40, 100_000])
        {
            IReadOnlyList<Bin> shown = bins.Show(most);
            Assert.InRange(shown.Count, 1, most);
            Assert.All(shown.Zip(shown.Skip(1)), pair => Assert.Equal(pair.First.To, pair.Second.From));
            Assert.All(shown.Where(bin => bin.From > 1e-307), bin => Assert.Equal(
                (values.Count(v => v >= bin.From && v < bin.To), values.Count(v => v >= bin.From && v < bin.To && v > 1)),
                ((int)bin.Count, (int)bin.Marked)));
            Assert.Equal(values.Length, shown.Sum(bin => bin.Count));
        }
        foreach (double share in (double[])[0.5, 0.95])
        {
            double exact = values.Order().ElementAt((int)Math.Ceiling(share * values.Length) - 1);
            Assert.InRange(bins.Bound(share), exact, exact * 1.045);
        }
    }

    [Theory]
    [InlineData(0, 1, false)]
    [InlineData(0, 1611, false)]
    [InlineData(-23.5, 23.5, false)]
    [InlineData(0.178, 1, true)]
    [InlineData(0.5, 0.6, true)]
    [InlineData(1e-12, 1e15, true)]
    [InlineData(13, 1300, true)]
    [InlineData(1, 1e7, false)]
    public void Ticks_are_few_round_and_within(double from, double to, bool isLog)
    {
        Axis axis = isLog ? Axis.Log(from, to, "x") : Axis.Linear(from, to, "x");
        Assert.InRange(axis.Ticks.Count, 2, 8);
        Assert.All(axis.Ticks, tick => Assert.InRange(axis.Percent(tick), -1e-6, 100 + 1e-6));
        Assert.All(axis.Ticks, tick => Assert.True(decimal.Parse(tick.ToString("E2"), System.Globalization.NumberStyles.Float)
            == (decimal)tick || Math.Abs(tick) > 1e14, $"{tick}"));
        Assert.Equal((0, 100), (axis.Percent(from), axis.Percent(to)));
    }

    [Fact]
    public void The_impact_of_losses_is_shown_where_the_table_has_it()
    {
        using Place place = new();
        CliRun.InProcess(new FakeEngine(), place.Estimate());
        XElement critical = ReportFile.Read(place).Section("critical");
        // The fake engine writes row / 2 for even rows of 100: the largest is 49.
        XElement table = critical.Descendants("table").ElementAt(1);
        Assert.Equal("The first 10 links", table.Element("caption")!.Value);
        Assert.Equal([49.0, 48, 47, 46, 45, 44, 43, 42, 41, 40], table.Element("tbody")!.Elements("tr").Select(r => r.Figures().First().Value));
    }

    [Fact]
    public void A_warning_of_the_audit_stands_above_everything()
    {
        using Place place = new();
        CliRun.InProcess(new FakeEngine { Audit = FakeEngine.AuditOf(2, "2 of 16 audited links lie within their intervals") }, place.Estimate());
        XElement warning = ReportFile.Read(place).Descendants("header").Single().Descendants().Single(e => e.Attribute("class")?.Value == "warning");
        Assert.Contains("do not trust the error bars of this run", warning.Value);
        CliRun.InProcess(new FakeEngine { Audit = FakeEngine.AuditOf(16, null) }, place.Estimate("b"));
        Assert.DoesNotContain("class=\"warning\"", File.ReadAllText(Path.Combine(place.Run("b"), "report.html")));
    }

    [Fact]
    public void The_summary_ends_with_the_path_of_the_report()
    {
        using Place place = new();
        CliResult result = CliRun.InProcess(new FakeEngine(), place.Estimate());
        Assert.Equal("report     " + ReportFile.PathOf(place), result.OutLines[^1]);
        Assert.True(File.Exists(ReportFile.PathOf(place)));
    }

    [Fact]
    public void An_element_left_open_is_an_error_of_ours()
    {
        HtmlWriter html = new();
        html.Open("p");
        Assert.Throws<InvalidOperationException>(html.ToString);
    }

    private static XElement Element(string label)
    {
        HtmlText text = $"{new Label(label)}";
        return XElement.Parse(text.ToString());
    }
}
