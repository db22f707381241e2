// What was asked of what data, by which program on which machine: enough to judge the run and to do it again.

using System.Text.Json;
using System.Text.Json.Nodes;
using ScaleResist.Cli.Report.Html;
using ScaleResist.Graphs;

namespace ScaleResist.Cli.Report.Sections;

/// <summary>Data, cleaning, plan, tables and machine.</summary>
internal sealed class JobSection(RunRecord record) : IReportSection
{
    public string Id => "job";

    public string Title => "The job and its data";

    public HtmlText Note => $"The same data, plan and seed give the same tables, whatever the threads, unless a time budget ended the probes. "
        + $"run.json beside this page has all of it for programs.";

    public bool HasContent => true;

    public void Write(HtmlWriter html)
    {
        html.Element("h3", "Data");
        html.Facts(Data(record.Input));
        html.Element("h3", "Cleaning");
        html.Facts(
        [
            ("Self-loops dropped", $"{record.Cleaning.SelfLoops}"),
            ("Parallel links merged", $"{record.Cleaning.ParallelLinks}"),
            ("Left", $"{record.Network.Nodes} node{EstimateReport.Plural(record.Network.Nodes)}, "
                + $"{record.Network.Links} link{EstimateReport.Plural(record.Network.Links)}, "
                + $"{(long)record.Network.Components} component{EstimateReport.Plural(record.Network.Components)}"),
        ]);
        html.Element("h3", "Plan");
        html.Facts(Plan());
        if (record.Rows.Count > 0)
        {
            html.Element("h3", "Tables");
            html.Facts(record.Rows.Select(table => (table.Key, (HtmlText)$"{table.Value} row{EstimateReport.Plural(table.Value)}")));
        }
        html.Element("h3", "Program and machine");
        html.Facts(
        [
            ("Program", record.ProgramCommit is string commit ? $"ScaleResist {record.ProgramVersion}, {commit}" : (HtmlText)$"ScaleResist {record.ProgramVersion}"),
            ("Started", $"{Time(record.Started)}"),
            ("Finished", $"{Time(record.Finished)}"),
            ("Processor", $"{record.Machine.Processor}, {(long)record.Machine.Cores} core{EstimateReport.Plural(record.Machine.Cores)}, "
                + $"{(long)record.Machine.SimdBits}-bit vectors"),
            ("Memory", $"{Figure.Bytes(record.Machine.MemoryBytes)}"),
            ("System", $"{record.Machine.Os}; {record.Machine.Runtime}"),
        ]);
    }

    private static IEnumerable<(string, HtmlText)> Data(InputFacts input)
    {
        yield return ("Network", $"{new Label(input.Path)}");
        yield return ("Form", $"{input.Form}, {Figure.Bytes(input.Bytes)}");
        HtmlText comments = input.CommentLines == 0 ? (HtmlText)$"" : $", {input.CommentLines} comment line{EstimateReport.Plural(input.CommentLines)}";
        yield return ("Rows", $"{input.Rows}, {(input.Header is null ? "no header" : "a header")}{comments}");
        HtmlText columns = $"";
        foreach (string column in input.Columns)
            columns = $"{columns}{(columns.ToString().Length == 0 ? "" : ", ")}{new Label(column)}";
        yield return ("Columns", columns);
        yield return ("SHA-256", $"{input.Sha256}");
    }

    // The plan's own names, which are those of the options; what was not given is not shown.
    private IEnumerable<(string, HtmlText)> Plan()
    {
        foreach ((string key, JsonNode? value) in record.Plan)
        {
            if (value is null || key == "verb")
                continue;
            yield return (key.Replace('_', ' '), value.GetValueKind() switch
            {
                JsonValueKind.String => $"{new Label(value.GetValue<string>().Replace(",", ", "))}",
                JsonValueKind.Number when value.ToJsonString().Contains('.') => $"{Figure.Of(value.GetValue<double>(), 4)}",
                _ => $"{value.ToJsonString()}",
            });
        }
    }

    private static string Time(DateTime time) => time.ToString("yyyy-MM-dd HH:mm:ss 'UTC'", System.Globalization.CultureInfo.InvariantCulture);
}
