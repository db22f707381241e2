// report.html of whole runs: what it shows stands in run.json and the tables, sections follow the plan, and nothing in it reaches out.

using System.Globalization;
using System.Security.Cryptography;
using System.Text;
using System.Text.Json;
using System.Xml.Linq;
using ScaleResist.Tests.Cli;
using ScaleResist.Tests.Lake;

namespace ScaleResist.Tests.Report;

public sealed class Reports_of_runs
{
    private static readonly string[] Always = ["resources", "job", "caution"];

    [Theory]
    [InlineData("auto")]
    [InlineData("probe")]
    public void Every_figure_stands_in_run_json_and_is_shown_rounded(string route)
    {
        using Place place = new();
        string pairs = Path.Combine(place.Folder, "pairs.csv");
        File.WriteAllText(pairs, "0,5\n3,61\n");
        XElement page = ReportFile.Of(place, TestData.Path("dolphins.tsv"), "--route", route, "--want", "index,nodes,links,pairs", "--pairs", pairs);
        using JsonDocument json = JsonDocument.Parse(File.ReadAllBytes(Path.Combine(place.Run("a"), "run.json")));
        HashSet<double> known = [.. ReportFile.Numbers(json.RootElement)];
        // Two ratios are of figures that stand there.
        JsonElement index = json.RootElement.GetProperty("index")[0].GetProperty("kirchhoff_index");
        known.Add(index.GetProperty("standard_error").GetDouble() / index.GetProperty("value").GetDouble());
        (double Value, string Shown)[] figures = [.. page.Figures()];
        Assert.InRange(figures.Length, 100, 2000);
        foreach ((double value, string shown) in figures)
        {
            Assert.True(known.Contains(value), $"{value} is shown as {shown} and stands nowhere in run.json");
            if (shown.EndsWith('s') || shown.EndsWith('B'))
                continue; // times and sizes (seconds, bytes, MiB) come in several units
            double read = Read(shown) / (shown.EndsWith('%') ? 100 : 1);
            Assert.True(Math.Abs(read - value) <= 0.05 * Math.Abs(value), $"{value} is shown as {shown}");
        }
    }

    [Fact]
    public void Distributions_and_first_rows_are_those_of_the_tables()
    {
        using Place place = new();
        XElement page = ReportFile.Of(place, TestData.Path("power.tsv"), "--route", "probe", "--probes", "16");
        string links = DuckLake.Table(place.Lake, "links");
        foreach ((string plot, string column) in new[] { ("links-probability-plot", "spanning_probability"), ("links-resistance-plot", "resistance") })
        {
            XElement figure = page.Descendants("figure").Single(f => f.Descendants("title").Any(t => t.Attribute("id")!.Value == plot + "-title"));
            double[][] bins = [.. figure.Descendants("tbody").Elements("tr").Select(r => r.Figures().Select(f => f.Value).ToArray())];
            Assert.InRange(bins.Length, 10, 40);
            foreach (double[] bin in bins)
            {
                string from = bin[0].ToString("R", CultureInfo.InvariantCulture), to = bin[1].ToString("R", CultureInfo.InvariantCulture);
                string end = bin[1] == 1 && column != "resistance" ? "<=" : "<";
                object?[] counted = DuckLake.Query(
                    $"SELECT count(*), count(*) FILTER (is_bridge) FROM {links} WHERE {column} >= {from}::DOUBLE AND {column} {end} {to}::DOUBLE")[0];
                Assert.Equal([(long)bin[2], (long)bin[3]], counted.Cast<long>());
            }
            Assert.Equal(6594, bins.Sum(bin => bin[2]));
        }
        XElement critical = page.Section("critical");
        double[] first = [.. critical.Descendants("tbody").First().Elements("tr").Select(r => r.Figures().First().Value)];
        Assert.Equal(DuckLake.Query($"SELECT nodes_cut_off FROM {links} WHERE is_bridge ORDER BY 1 DESC LIMIT 10").Select(r => (double)(long)r[0]!), first);
        double[] second = [.. critical.Descendants("tbody").Last().Elements("tr").Select(r => r.Figures().First().Value)];
        Assert.Equal(DuckLake.Query($"SELECT spanning_probability FROM {links} WHERE NOT is_bridge ORDER BY 1 DESC LIMIT 10").Select(r => (double)r[0]!), second);
        string[] remote = [.. page.Section("nodes").Descendants("tbody").First().Descendants("bdi").Select(b => b.Value)];
        Assert.Equal(DuckLake.Query($"SELECT node FROM {DuckLake.Table(place.Lake, "nodes")} ORDER BY closeness_rank DESC LIMIT 8").Select(r => $"{r[0]}"), remote);
        Assert.Equal(16, page.Section("accuracy").Descendants("tbody").Last().Elements("tr").Count());
    }

    [Theory]
    [InlineData("auto", "index,components,nodes,links", "index,links,critical,nodes,accuracy,solver")]
    [InlineData("probe", "index,components,nodes,links", "index,links,critical,nodes,accuracy,solver")]
    [InlineData("auto", "components", "")]
    [InlineData("auto", "nodes", "nodes,accuracy,solver")]
    [InlineData("probe", "index", "index,accuracy,solver")]
    [InlineData("auto", "links", "links,critical,accuracy,solver")]
    public void Sections_are_those_the_plan_has_something_for(string route, string want, string sections)
    {
        using Place place = new();
        XElement page = ReportFile.Of(place, TestData.Path("karate.tsv"), "--route", route, "--want", want);
        Assert.Equal([.. sections.Split(',', StringSplitOptions.RemoveEmptyEntries), .. Always], page.Sections());
        Assert.Equal(page.Sections().Select(id => "#" + id), page.Descendants("nav").Single().Descendants("a").Select(a => a.Attribute("href")!.Value));
    }

    [Fact]
    public void Two_nodes_and_a_tree_have_sentences_where_a_plot_would_show_one_bar()
    {
        using Place place = new(), tree = new();
        File.WriteAllText(place.Network, "a,b\nx,y\n");
        XElement page = ReportFile.Of(place, place.Network);
        Assert.Equal(["index", "links", "critical", "nodes", "accuracy", "solver", .. Always], page.Sections());
        Assert.Contains("Every link has resistance between the ends 1.", page.Section("links").Value);
        Assert.Empty(page.Section("links").Descendants("svg"));
        Assert.Equal((1.0, "1"), page.Section("index").Figures().First()); // the Kirchhoff index of one unit link
        Assert.Equal("The only bridge", page.Section("critical").Descendants("caption").Single().Value);
        File.WriteAllText(tree.Network, "0,1,1\n0,2,2\n1,3,4\n1,4,1\n");
        page = ReportFile.Of(tree, tree.Network, "--weights", "conductance");
        Assert.Equal("All 4 bridges", page.Section("critical").Descendants("caption").Single().Value);
        Assert.Equal(["Bridges that cut off most"], page.Section("critical").Descendants("h3").Select(h => h.Value));
    }

    [Fact]
    public void Many_components_are_counted_and_the_largest_shown()
    {
        using Place place = new();
        XElement page = ReportFile.Of(place, TestData.Path("netscience.tsv"), "--weights", "none");
        XElement table = page.Section("index").Descendants("table").Single();
        Assert.Equal(20, table.Element("tbody")!.Elements("tr").Count());
        long components = (long)DuckLake.Query($"SELECT count(*) FROM {DuckLake.Table(place.Lake, "index")}")[0][0]!;
        Assert.Contains($"{components - 20} more components", page.Section("index").Value);
        Assert.Equal(148257.765, page.Section("index").Figures().First().Value, 3); // tests/data/README.md
    }

    [Fact]
    public void The_page_is_the_same_whatever_the_threads_but_for_times_and_memory()
    {
        using Place one = new(), two = new();
        string[] pages = [.. new[] { (one, "1"), (two, "2") }.Select(run =>
        {
            XElement page = ReportFile.Of(run.Item1, TestData.Path("power.tsv"), "--route", "probe", "--probes", "16", "--threads", run.Item2);
            page.Section("resources").Remove();
            foreach (XElement dated in page.Descendants("div").Where(div => div.Element("dt")?.Value is "Started" or "Finished").ToList())
                dated.Remove();
            return page.ToString();
        })];
        Assert.Equal(pages[0], pages[1]);
    }

    [Fact]
    public void The_page_reaches_out_to_nothing_and_its_policy_forbids_it()
    {
        using Place place = new();
        XElement page = ReportFile.Of(place, TestData.Path("power.tsv"), "--route", "probe", "--probes", "16");
        string text = File.ReadAllText(ReportFile.PathOf(place));
        Assert.True(new FileInfo(ReportFile.PathOf(place)).Length < 300_000);
        Assert.DoesNotContain("://", text);
        Assert.DoesNotContain("url(", text);
        Assert.DoesNotContain(page.Descendants(), e => e.Name.LocalName is "script" or "img" or "iframe" or "object" or "form");
        Assert.DoesNotContain(page.DescendantsAndSelf().Attributes(), a => a.Name.LocalName == "style" || a.Name.LocalName.StartsWith("on", StringComparison.Ordinal));
        foreach (XAttribute link in page.Descendants().Attributes("href"))
            Assert.True(link.Value == "data:," || page.Descendants().Any(e => "#" + e.Attribute("id")?.Value == link.Value), link.Value);
        string style = page.Descendants("style").Single().Value;
        string digest = Convert.ToBase64String(SHA256.HashData(Encoding.UTF8.GetBytes(style)));
        string policy = page.Descendants("meta").Single(m => m.Attribute("http-equiv") is not null).Attribute("content")!.Value;
        Assert.Equal($"default-src 'none'; style-src 'sha256-{digest}'; img-src data:; base-uri 'none'; form-action 'none'", policy);
    }

    [Fact]
    public void Landmarks_headings_plots_and_tables_are_told_to_those_who_do_not_see_them()
    {
        using Place place = new();
        XElement page = ReportFile.Of(place, TestData.Path("power.tsv"), "--route", "probe", "--probes", "16");
        Assert.Equal("en", page.Attribute("lang")!.Value);
        Assert.Equal(["a", "header", "nav", "main", "footer"], page.Element("body")!.Elements().Select(e => e.Name.LocalName));
        int[] levels = [.. page.Descendants().Where(e => e.Name.LocalName is "h1" or "h2" or "h3").Select(e => e.Name.LocalName[1] - '0')];
        Assert.Equal(1, levels.Count(level => level == 1));
        Assert.All(levels.Zip(levels.Skip(1)), pair => Assert.True(pair.Second <= pair.First + 1));
        string[] ids = [.. page.Descendants().Attributes("id").Select(a => a.Value)];
        Assert.Equal(ids.Length, ids.Distinct().Count());
        XElement[] plots = [.. page.Descendants("svg").Where(svg => svg.Attribute("aria-hidden") is null)];
        Assert.Equal(5, plots.Length); // the interval, two distributions, error against probes, the audit
        Assert.All(plots, plot =>
        {
            Assert.Equal("img", plot.Attribute("role")!.Value);
            Assert.All(plot.Attribute("aria-labelledby")!.Value.Split(' '), id => Assert.Contains(id, ids));
            Assert.All(new[] { plot.Element("title"), plot.Element("desc") }, text => Assert.NotEmpty(text!.Value));
        });
        Assert.All(page.Descendants("table"), table => Assert.NotEmpty(table.Element("caption")!.Value));
        Assert.All(page.Descendants("th"), th => Assert.Contains(th.Attribute("scope")!.Value, (string[])["col", "row"]));
        Assert.All(page.Descendants("table"), table =>
            Assert.Single(table.Descendants("tr").Select(tr => tr.Elements().Count()).Distinct()));
    }

    // "1,234.5" or "1.2 x 10 to the -5", with its exponent in superscript digits.
    private static double Read(string shown)
    {
        string[] parts = shown.TrimEnd('%', '\u00a0').Replace(",", "").Split("\u00a0×\u00a010");
        string power = parts.Length == 1 ? "0" : string.Concat(parts[1].Select(c => c == '⁻' ? '-' : (char)('0' + "⁰¹²³⁴⁵⁶⁷⁸⁹".IndexOf(c))));
        return double.Parse($"{parts[0]}e{power}", CultureInfo.InvariantCulture);
    }
}
