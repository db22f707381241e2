// Time and memory, phase by phase. Invariant: the only section, with the job's dates, that differs between two runs of one command.

using ScaleResist.Cli.Report.Html;

namespace ScaleResist.Cli.Report.Sections;

/// <summary>What the run took.</summary>
internal sealed class ResourcesSection(RunRecord record) : IReportSection
{
    public string Id => "resources";

    public string Title => "Time and memory";

    public HtmlText Note => $"Wall time of each phase, and the most memory that was resident by its end.";

    public bool HasContent => record.Phases.Count > 0;

    public void Write(HtmlWriter html)
    {
        double longest = Math.Max(1e-9, record.Phases.Max(phase => phase.Seconds));
        double largest = Math.Max(1, record.PeakResidentBytes);
        html.Facts(
        [
            ("Altogether", $"{Numbers.Duration((record.Finished - record.Started).TotalSeconds)}"),
            ("Peak memory", $"{Figure.Bytes(record.PeakResidentBytes)}"),
            ("Threads", $"{(long)record.Threads}"),
        ]);
        html.Table("Phases in order", record.Phases,
        [
            new("Phase", phase => $"{phase.Name}"),
            new("#Time", phase => $"{Figure.Duration(phase.Seconds)}"),
            new("~Beside the longest", phase => Plot.CellBar(phase.Seconds / longest)),
            new("#Memory", phase => $"{Figure.Bytes(phase.PeakResidentBytes)}"),
            new("~Beside the peak", phase => Plot.CellBar(phase.PeakResidentBytes / largest)),
        ]);
    }
}
