// Writes HTML element by element. Invariant: every element that is opened is closed in its scope, every attribute is quoted and escaped,
// and empty elements close themselves, so that a page is well-formed XML as well.

using System.Text;

namespace ScaleResist.Cli.Report.Html;

/// <summary>A column of a table.</summary>
/// <param name="Head">Its head: after '#' a column of figures, after '~' of small pictures, which phones leave out.</param>
/// <param name="Cell">What a row says in it.</param>
/// <param name="Shown">Whether it is there at all.</param>
internal sealed record Column<T>(string Head, Func<T, HtmlText> Cell, bool Shown = true)
{
    /// <summary>Class of its cells.</summary>
    public string? Class => Head[0] switch
    {
        '#' => "figure",
        '~' => "picture",
        _ => null,
    };
}

/// <summary>A page in the making: <c>using (html.Open("ul")) html.Element("li", $"{count} nodes");</c>.</summary>
internal sealed class HtmlWriter
{
    private readonly StringBuilder page = new();
    private readonly Stack<string> open = [];

    /// <summary>Opens an element until the scope is disposed. Attributes without a value are left out.</summary>
    public Scope Open(string name, params ReadOnlySpan<(string Name, string? Value)> attributes)
    {
        Start(name, attributes);
        page.Append('>');
        open.Push(name);
        return new Scope(this);
    }

    /// <summary>An element without content.</summary>
    public void Empty(string name, params ReadOnlySpan<(string Name, string? Value)> attributes)
    {
        Start(name, attributes);
        page.Append("/>");
    }

    /// <summary>An element with text.</summary>
    public void Element(string name, HtmlText text, params ReadOnlySpan<(string Name, string? Value)> attributes)
    {
        using (Open(name, attributes))
            Text(text);
    }

    /// <summary>An element with plain text.</summary>
    public void Element(string name, string text, params ReadOnlySpan<(string Name, string? Value)> attributes) =>
        Element(name, (HtmlText)$"{text}", attributes);

    /// <summary>Text.</summary>
    public void Text(HtmlText text) => page.Append(text.ToString());

    /// <summary>A style sheet as it is; it holds neither &lt; nor &amp;.</summary>
    public void Style(string sheet) => page.Append("<style>").Append(sheet).Append("</style>");

    /// <summary>Names and what they say.</summary>
    public void Facts(IEnumerable<(string Name, HtmlText Text)> facts)
    {
        using (Open("dl", ("class", "facts")))
        {
            foreach ((string name, HtmlText text) in facts)
            {
                using (Open("div"))
                {
                    Element("dt", name);
                    Element("dd", text);
                }
            }
        }
    }

    /// <summary>A table with a caption; the first column heads its rows.</summary>
    public void Table<T>(string caption, IEnumerable<T> rows, IEnumerable<Column<T>> columns)
    {
        Column<T>[] shown = [.. columns.Where(column => column.Shown)];
        using (Open("div", ("class", "scroll"), ("role", "region"), ("aria-label", caption), ("tabindex", "0")))
        using (Open("table"))
        {
            Element("caption", caption);
            using (Open("thead"))
            using (Open("tr"))
            {
                foreach (Column<T> column in shown)
                    Element("th", column.Head.TrimStart('#', '~'), ("scope", "col"), ("class", column.Class));
            }
            using (Open("tbody"))
            {
                foreach (T row in rows)
                {
                    using (Open("tr"))
                    {
                        Element("th", shown[0].Cell(row), ("scope", "row"), ("class", shown[0].Class));
                        foreach (Column<T> column in shown.Skip(1))
                            Element("td", column.Cell(row), ("class", column.Class));
                    }
                }
            }
        }
    }

    /// <summary>What the colours of a plot stand for.</summary>
    public void Key(IEnumerable<(string Name, string Kind)> entries)
    {
        using (Open("p", ("class", "key")))
        {
            foreach ((string name, string kind) in entries)
                Element("span", name, ("class", kind));
        }
    }

    /// <summary>A table that opens on demand: what a plot shows, in figures.</summary>
    public void Behind(string summary, Action content)
    {
        using (Open("details"))
        {
            Element("summary", summary);
            content();
        }
    }

    /// <summary>The page. Everything must be closed.</summary>
    public override string ToString() => open.Count == 0
        ? page.ToString()
        : throw new InvalidOperationException($"<{open.Peek()}> is open.");

    private void Start(string name, ReadOnlySpan<(string Name, string? Value)> attributes)
    {
        // A line an element keeps pages readable, but text stays on its line.
        if (name is "section" or "div" or "table" or "tr" or "figure" or "p" or "h2" or "h3" or "svg" or "rect" or "line" or "circle" or "details")
            page.Append('\n');
        page.Append('<').Append(name);
        foreach ((string key, string? value) in attributes)
        {
            if (value is null)
                continue;
            page.Append(' ').Append(key).Append("=\"");
            HtmlText.Escape(page, value);
            page.Append('"');
        }
    }

    /// <summary>An open element.</summary>
    internal readonly struct Scope(HtmlWriter writer) : IDisposable
    {
        public void Dispose() => writer.page.Append("</").Append(writer.open.Pop()).Append('>');
    }
}
