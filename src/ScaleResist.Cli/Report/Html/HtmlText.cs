// Text that is safe inside HTML, written as an interpolated string: what is literal or a string is escaped, what is a number becomes
// <data value="...">shown</data>, so that a reader sees the rounded figure and a program the whole one.
// Invariant: nothing enters unescaped but other HtmlText; the result is well-formed XML too.

using System.Globalization;
using System.Runtime.CompilerServices;
using System.Text;

namespace ScaleResist.Cli.Report.Html;

/// <summary>A number and how it is shown.</summary>
/// <param name="Value">The whole number.</param>
/// <param name="Shown">What a person reads.</param>
internal readonly record struct Figure(double Value, string Shown)
{
    /// <summary>A measured value.</summary>
    public static Figure Of(double value, int digits) => new(value, Show(value, digits));

    /// <summary>A number as a page shows it: powers of ten are written as such.</summary>
    public static string Show(double value, int digits)
    {
        string text = Numbers.Value(value, digits);
        int power = double.IsFinite(value) ? text.IndexOf('e') : -1;
        return power < 0
            ? text
            : $"{text[..power]}\u00a0×\u00a010{string.Concat(text[(power + 1)..].Select(digit => digit == '-' ? '⁻' : "⁰¹²³⁴⁵⁶⁷⁸⁹"[digit - '0']))}";
    }

    /// <summary>A share in percent.</summary>
    public static Figure Percent(double share, int digits = 3) => new(share, Numbers.Value(100 * share, digits) + "\u00a0%");

    /// <summary>Seconds.</summary>
    public static Figure Duration(double seconds) => new(seconds, Numbers.Duration(seconds).Replace(' ', '\u00a0'));

    /// <summary>Bytes.</summary>
    public static Figure Bytes(double bytes) => new(bytes, Numbers.Bytes(bytes).Replace(' ', '\u00a0'));
}

/// <summary>A label from the user's data: its direction is its own, and it is cut where it is long.</summary>
internal readonly record struct Label(string Text);

/// <summary>Escaped text.</summary>
[InterpolatedStringHandler]
internal readonly struct HtmlText
{
    private const int LongestLabel = 44;
    private const int LabelTail = 12;
    private const int LongestTitle = 200;
    private readonly StringBuilder html;

    public HtmlText(int literalLength, int formattedCount) => html = new StringBuilder(literalLength + (16 * formattedCount));

    private HtmlText(string safe) => html = new StringBuilder(safe);

    /// <summary>What a writer wrote: safe already.</summary>
    public static HtmlText Trusted(HtmlWriter writer) => new(writer.ToString());

    public void AppendLiteral(string text) => Escape(html, text);

    public void AppendFormatted(string? text) => Escape(html, text ?? "");

    public void AppendFormatted(HtmlText text) => html.Append(text.html);

    public void AppendFormatted(long count) => AppendFormatted(new Figure(count, Numbers.Count(count)));

    public void AppendFormatted(double value) => AppendFormatted(Figure.Of(value, 6));

    public void AppendFormatted(Figure figure) => html
        .Append("<data value=\"").Append(figure.Value.ToString("R", CultureInfo.InvariantCulture)).Append("\">")
        .Append(figure.Shown).Append("</data>");

    public void AppendFormatted(Label label)
    {
        int length = new StringInfo(label.Text).LengthInTextElements;
        bool isLong = length > LongestLabel || label.Text.Length > 4 * LongestLabel;
        html.Append("<bdi class=\"label\"");
        if (isLong)
        {
            html.Append(" title=\"");
            Escape(html, Start(label.Text, LongestTitle));
            if (label.Text.Length > LongestTitle)
                html.Append("… (").Append(Numbers.Count(label.Text.Length)).Append(" characters)");
            html.Append('"');
        }
        html.Append('>');
        if (isLong)
        {
            Escape(html, Start(label.Text, LongestLabel - LabelTail));
            html.Append('…');
            Escape(html, End(label.Text, LabelTail));
        }
        else
        {
            Escape(html, string.IsNullOrWhiteSpace(label.Text) ? $"\"{label.Text}\"" : label.Text);
        }
        html.Append("</bdi>");
    }

    public override string ToString() => html?.ToString() ?? "";

    // Characters that neither HTML nor XML allows show as U+FFFD, as do control characters; half a surrogate pair becomes that too.
    public static void Escape(StringBuilder html, string text)
    {
        foreach (Rune rune in text.EnumerateRunes())
        {
            switch (rune.Value)
            {
                case '&':
                    html.Append("&amp;");
                    break;
                case '<':
                    html.Append("&lt;");
                    break;
                case '>':
                    html.Append("&gt;");
                    break;
                case '"':
                    html.Append("&quot;");
                    break;
                case '\'':
                    html.Append("&#39;");
                    break;
                case < ' ' or (>= 0x7f and < 0xa0) or 0xfffe or 0xffff:
                    html.Append('\ufffd');
                    break;
                default:
                    html.Append(rune.ToString());
                    break;
            }
        }
    }

    // A cut between the halves of a surrogate pair would leave half of it: the half goes too.
    private static string Start(string text, int length)
    {
        length = Math.Min(length, text.Length);
        return text[..(char.IsHighSurrogate(text[length - 1]) ? length - 1 : length)];
    }

    private static string End(string text, int length) =>
        text[(char.IsLowSurrogate(text[^length]) ? text.Length - length + 1 : text.Length - length)..];
}
