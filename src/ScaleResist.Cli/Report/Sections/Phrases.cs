// How sections say what several of them say.

using ScaleResist.Cli.Report.Html;
using ScaleResist.Estimating;

namespace ScaleResist.Cli.Report.Sections;

/// <summary>Phrases of reports.</summary>
internal static class Phrases
{
    /// <summary>"0.88 to 0.93", or "exact".</summary>
    public static HtmlText Interval(Estimate estimate, int digits) => estimate.StandardError == 0 && estimate.Lower == estimate.Upper
        ? (HtmlText)$"exact"
        : $"{Figure.Of(estimate.Lower, digits)} to {Figure.Of(estimate.Upper, digits)}";

    /// <summary>Two ends.</summary>
    public static HtmlText Ends(string source, string target) => $"{new Label(source)} – {new Label(target)}";
}
