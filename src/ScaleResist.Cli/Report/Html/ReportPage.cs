// The frame of every report: head, masthead, contents, sections, foot. Invariant: the page needs nothing but itself: its policy forbids
// every request and every script, and allows the one style sheet that it carries by its digest.

using System.Security.Cryptography;
using System.Text;

namespace ScaleResist.Cli.Report.Html;

/// <summary>A part of a report: a record's facts as HTML.</summary>
internal interface IReportSection
{
    /// <summary>Anchor, unique in the page.</summary>
    string Id { get; }

    /// <summary>Heading.</summary>
    string Title { get; }

    /// <summary>What the heading's side says: how to read the section.</summary>
    HtmlText Note { get; }

    /// <summary>Whether there is anything to show.</summary>
    bool HasContent { get; }

    /// <summary>Writes what stands below the heading; headings inside are h3.</summary>
    void Write(HtmlWriter html);
}

/// <summary>What stands at the top of a report.</summary>
internal sealed record Masthead
{
    /// <summary>The verb that made it.</summary>
    public required string Verb { get; init; }

    /// <summary>The page's heading.</summary>
    public required string Title { get; init; }

    /// <summary>One or two sentences that say what came out.</summary>
    public required HtmlText Lede { get; init; }

    /// <summary>Which run, when, by what.</summary>
    public required IReadOnlyList<(string Name, HtmlText Text)> Stamp { get; init; }

    /// <summary>What the reader must know before anything else; null where all is well.</summary>
    public string? Warning { get; init; }
}

/// <summary>Renders reports.</summary>
internal static class ReportPage
{
    private static readonly string Sheet = ReadSheet();

    /// <summary>A page with the sections that have something to show.</summary>
    public static byte[] Render(Masthead head, IEnumerable<IReportSection> sections)
    {
        IReportSection[] shown = [.. sections.Where(section => section.HasContent)];
        HtmlWriter html = new();
        using (html.Open("html", ("lang", "en")))
        {
            using (html.Open("head"))
                Head(html, head);
            using (html.Open("body"))
            {
                html.Element("a", "Skip to the results", ("class", "skip"), ("href", "#results"));
                using (html.Open("header"))
                    Top(html, head);
                using (html.Open("nav", ("aria-label", "Contents")))
                using (html.Open("ol"))
                {
                    foreach (IReportSection section in shown)
                    {
                        using (html.Open("li"))
                            html.Element("a", section.Title, ("href", "#" + section.Id));
                    }
                }
                using (html.Open("main", ("id", "results"), ("tabindex", "-1")))
                {
                    foreach (IReportSection section in shown)
                        Section(html, section);
                }
                using (html.Open("footer"))
                {
                    html.Element("p", $"Written by ScaleResist {ProgramVersion.Number}. This page is one file: it loads nothing, runs no script and "
                        + $"sends nothing.");
                }
            }
        }
        return Encoding.UTF8.GetBytes("<!DOCTYPE html>\n" + html + "\n");
    }

    private static void Head(HtmlWriter html, Masthead head)
    {
        string digest = Convert.ToBase64String(SHA256.HashData(Encoding.UTF8.GetBytes(Sheet)));
        html.Empty("meta", ("charset", "utf-8"));
        html.Empty("meta", ("http-equiv", "Content-Security-Policy"),
            ("content", $"default-src 'none'; style-src 'sha256-{digest}'; img-src data:; base-uri 'none'; form-action 'none'"));
        html.Empty("meta", ("name", "viewport"), ("content", "width=device-width, initial-scale=1"));
        html.Empty("meta", ("name", "color-scheme"), ("content", "light dark"));
        html.Element("title", $"{Cut(head.Title)} · ScaleResist");
        html.Empty("link", ("rel", "icon"), ("href", "data:,"));
        html.Style(Sheet);
    }

    private static void Top(HtmlWriter html, Masthead head)
    {
        using (html.Open("p", ("class", "mark")))
        {
            // The mark: a resistor between two nodes.
            using (html.Open("svg", ("viewBox", "0 0 72 16"), ("width", "72"), ("height", "16"), ("aria-hidden", "true")))
            {
                html.Empty("circle", ("cx", "4"), ("cy", "8"), ("r", "3"));
                html.Empty("path", ("d", "M7 8h11l3-6 6 12 6-12 6 12 6-12 6 12 3-6h11"));
                html.Empty("circle", ("cx", "68"), ("cy", "8"), ("r", "3"));
            }
            html.Element("span", "ScaleResist", ("class", "name"));
            html.Element("span", head.Verb);
        }
        html.Element("h1", $"{new Label(head.Title)}");
        if (head.Warning is not null)
        {
            using (html.Open("p", ("class", "warning"), ("role", "note")))
                html.Text($"{head.Warning}");
        }
        html.Element("p", head.Lede, ("class", "lede"));
        using (html.Open("dl", ("class", "stamp")))
        {
            foreach ((string name, HtmlText text) in head.Stamp)
            {
                using (html.Open("div"))
                {
                    html.Element("dt", name);
                    html.Element("dd", text);
                }
            }
        }
    }

    private static void Section(HtmlWriter html, IReportSection section)
    {
        using (html.Open("section", ("id", section.Id), ("aria-labelledby", section.Id + "-heading")))
        {
            using (html.Open("div", ("class", "side")))
            {
                html.Element("h2", section.Title, ("id", section.Id + "-heading"));
                html.Element("p", section.Note);
            }
            using (html.Open("div", ("class", "content")))
                section.Write(html);
        }
    }

    private static string Cut(string title) => title.Length <= 80 ? title : title[..80] + "…";

    // Browsers digest the sheet with line feeds alone.
    private static string ReadSheet()
    {
        using Stream stream = typeof(ReportPage).Assembly.GetManifestResourceStream("report.css")!;
        using StreamReader reader = new(stream, Encoding.UTF8);
        return reader.ReadToEnd().Replace("\r\n", "\n");
    }
}
