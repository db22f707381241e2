// Plots as inline SVG: lengths across are percent of the width, lengths down and type are CSS pixels, so that a plot fills a phone as it
// fills a page and its text keeps its size. Colours come from the style sheet. Invariant: every plot has a title and a description.

using System.Globalization;

namespace ScaleResist.Cli.Report.Html;

/// <summary>What a plot says to those who do not see it.</summary>
/// <param name="Id">Unique in the page.</param>
/// <param name="Title">What it is.</param>
/// <param name="Description">What there is to see.</param>
internal sealed record PlotText(string Id, string Title, string Description);

/// <summary>A bar of a histogram; the marked part of its height stands apart by colour, at its foot.</summary>
internal readonly record struct Bar(double From, double To, double Height, double Marked);

/// <summary>A point, with an interval down and up where it has one.</summary>
internal readonly record struct Point(double X, double Y, double? Lower = null, double? Upper = null);

/// <summary>Points of one kind.</summary>
/// <param name="Kind">Class of the style sheet: <c>first</c>, <c>second</c> or <c>third</c>.</param>
/// <param name="Points">From left to right.</param>
/// <param name="Measured">Points that were measured: filled; the others are open.</param>
/// <param name="Line">Whether they are joined.</param>
internal sealed record Series(string Kind, IReadOnlyList<Point> Points, Func<Point, bool>? Measured = null, bool Line = true);

/// <summary>Writes plots.</summary>
internal static class Plot
{
    private const int Top = 14;
    private const int Height = 200;
    private const int Foot = 46;

    /// <summary>Bars over their bins; the height axis begins at 0.</summary>
    public static void Histogram(HtmlWriter html, PlotText text, Axis x, IReadOnlyList<Bar> bars)
    {
        Axis y = Axis.Linear(0, bars.Max(bar => bar.Height) * 1.02);
        using (Begin(html, text, Top + Height + Foot))
        {
            Grid(html, x, y);
            foreach (Bar bar in bars.Where(bar => bar.Height > 0))
            {
                double left = x.Percent(bar.From), width = x.Percent(bar.To) - left;
                double marked = Math.Min(bar.Marked, bar.Height);
                // The least bar is a hairline: a bin that holds one link of a million is not empty.
                double foot = marked > 0 ? Math.Max(1, Height - Down(y, marked)) : 0;
                double rest = bar.Height > marked ? Math.Max(1, Height - Down(y, bar.Height) - foot) : 0;
                if (foot > 0)
                    Rectangle(html, "bar second", left, width, Height - foot, foot);
                if (rest > 0)
                    Rectangle(html, "bar first", left, width, Height - foot - rest, rest);
            }
            Baseline(html);
        }
    }

    /// <summary>Series of points, joined or not, with error bars where they have them.</summary>
    public static void Points(HtmlWriter html, PlotText text, Axis x, Axis y, IReadOnlyList<Series> series)
    {
        using (Begin(html, text, Top + Height + Foot))
        {
            Grid(html, x, y);
            Baseline(html);
            foreach (Series one in series)
            {
                for (int i = 1; one.Line && i < one.Points.Count; i++)
                {
                    (Point a, Point b) = (one.Points[i - 1], one.Points[i]);
                    Line(html, one.Kind, x.Percent(a.X), Down(y, a.Y), x.Percent(b.X), Down(y, b.Y));
                }
                foreach (Point point in one.Points)
                {
                    double at = x.Percent(point.X);
                    if (point is { Lower: double lower, Upper: double upper })
                        Line(html, one.Kind, at, Down(y, lower), at, Down(y, upper));
                    html.Empty("circle", ("class", one.Kind + (one.Measured?.Invoke(point) == false ? " open" : "")), ("r", "4.5"),
                        ("cx", Percent(at)), ("cy", Pixels(Top + Down(y, point.Y))));
                }
            }
        }
    }

    /// <summary>Values along one axis with a line at 0, each a dot; dots of one place stack upwards.</summary>
    public static void Dots(HtmlWriter html, PlotText text, Axis x, IEnumerable<double> values)
    {
        IGrouping<double, double>[] places = [.. values.GroupBy(value => Math.Round(x.Percent(value) / 2) * 2).OrderBy(place => place.Key)];
        int height = Math.Max(48, (places.Max(place => place.Count()) * 11) + 10);
        using (Begin(html, text, Top + height + Foot))
        {
            Ticks(html, x, height);
            Line(html, "zero", x.Percent(0), 0, x.Percent(0), height);
            Line(html, "base", 0, height, 100, height);
            foreach (IGrouping<double, double> place in places)
            {
                for (int i = 0; i < place.Count(); i++)
                {
                    html.Empty("circle", ("class", "first"), ("r", "4.5"), ("cx", Percent(place.Key)),
                        ("cy", Pixels(Top + height - 8 - (11 * i))));
                }
            }
        }
    }

    /// <summary>A value between its bounds, as a draughtsman writes a dimension; the bounds are named at its ends.</summary>
    public static void Dimension(HtmlWriter html, PlotText text, double lower, double value, double upper)
    {
        double at = 100 * (value - lower) / (upper - lower);
        using (Begin(html, text, 44, "dimension"))
        {
            html.Empty("line", ("class", "span"), ("x1", "0%"), ("x2", "100%"), ("y1", "12"), ("y2", "12"));
            foreach (double end in (double[])[0, 100])
                html.Empty("line", ("class", "span"), ("x1", Percent(end)), ("x2", Percent(end)), ("y1", "4"), ("y2", "20"));
            html.Empty("circle", ("class", "second"), ("r", "5"), ("cx", Percent(at)), ("cy", "12"));
            html.Element("text", Figure.Show(lower, 6), ("x", "0%"), ("y", "38"));
            html.Element("text", Figure.Show(upper, 6), ("x", "100%"), ("y", "38"), ("text-anchor", "end"));
        }
    }

    /// <summary>A bar in a table's cell, beside the figure that it shows: nothing to read aloud.</summary>
    public static HtmlText CellBar(double share, bool marked = false) => Cell(marked ? "cell second" : "cell", 0, share, share);

    /// <summary>An interval in a table's cell, on an axis from 0 to 1.</summary>
    public static HtmlText CellInterval(double lower, double value, double upper) => Cell("cell within", lower, upper, value);

    private static HtmlText Cell(string kind, double from, double to, double value)
    {
        HtmlWriter html = new();
        using (html.Open("svg", ("class", kind), ("aria-hidden", "true"), ("height", "12")))
        {
            (from, to) = (Math.Clamp(from, 0, 1), Math.Clamp(to, 0, 1));
            html.Empty("line", ("class", "track"), ("x1", "0%"), ("x2", "100%"), ("y1", "6"), ("y2", "6"));
            html.Empty("rect", ("x", Percent(100 * from)), ("width", Percent(Math.Max(0.5, 100 * (to - from)))), ("y", "3"), ("height", "6"));
            if (kind == "cell within")
                html.Empty("circle", ("cx", Percent(100 * Math.Clamp(value, 0, 1))), ("cy", "6"), ("r", "3.5"));
        }
        return HtmlText.Trusted(html);
    }

    private static HtmlWriter.Scope Begin(HtmlWriter html, PlotText text, int height, string kind = "plot")
    {
        HtmlWriter.Scope scope = html.Open("svg", ("class", kind), ("role", "img"), ("height", Pixels(height)),
            ("aria-labelledby", $"{text.Id}-title {text.Id}-desc"));
        html.Element("title", text.Title, ("id", text.Id + "-title"));
        html.Element("desc", text.Description, ("id", text.Id + "-desc"));
        return scope;
    }

    private static void Grid(HtmlWriter html, Axis x, Axis y)
    {
        foreach (double tick in y.Ticks)
        {
            double down = Down(y, tick);
            Line(html, "grid", 0, down, 100, down);
            html.Element("text", Short(tick), ("class", "tick"), ("text-anchor", "end"), ("x", "-8"), ("y", Pixels(Top + down + 4)));
        }
        Ticks(html, x, Height);
    }

    private static void Ticks(HtmlWriter html, Axis x, int height)
    {
        foreach (double tick in x.Ticks)
        {
            double at = x.Percent(tick);
            Line(html, "base", at, height, at, height + 5);
            html.Element("text", Short(tick), ("class", "tick"), ("text-anchor", "middle"), ("x", Percent(at)), ("y", Pixels(Top + height + 19)));
        }
        html.Element("text", x.Title, ("class", "axis"), ("text-anchor", "middle"), ("x", "50%"), ("y", Pixels(Top + height + 39)));
    }

    private static void Baseline(HtmlWriter html) => Line(html, "base", 0, Height, 100, Height);

    private static void Rectangle(HtmlWriter html, string kind, double left, double width, double down, double height) =>
        html.Empty("rect", ("class", kind), ("x", Percent(left)), ("width", Percent(width)), ("y", Pixels(Top + down)), ("height", Pixels(height)));

    private static void Line(HtmlWriter html, string kind, double x1, double y1, double x2, double y2) => html.Empty("line", ("class", kind),
        ("x1", Percent(x1)), ("y1", Pixels(Top + y1)), ("x2", Percent(x2)), ("y2", Pixels(Top + y2)));

    private static double Down(Axis y, double value) => Height * (1 - (y.Percent(value) / 100));

    // Thousands and millions by letter: a phone's margin holds five characters.
    private static string Short(double value) => Math.Abs(value) switch
    {
        >= 1e6 and < 1e9 => Numbers.Value(value / 1e6, 3) + "M",
        >= 1e4 and < 1e6 => Numbers.Value(value / 1e3, 3) + "k",
        _ => Figure.Show(value, 4),
    };

    private static string Percent(double value) => value.ToString("0.###", CultureInfo.InvariantCulture) + "%";

    private static string Pixels(double value) => value.ToString("0.##", CultureInfo.InvariantCulture);
}
