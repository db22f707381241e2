// An axis of a plot: values to percent of its length, and the values to name on it.
// Invariant: ticks are round numbers within the axis, at most seven, never all at one place.

namespace ScaleResist.Cli.Report.Html;

/// <summary>A linear or logarithmic axis.</summary>
internal sealed class Axis
{
    private const int MostTicks = 7;
    private readonly double from;
    private readonly double to;
    private readonly bool isLog;

    private Axis(double from, double to, bool isLog, string title, IReadOnlyList<double>? ticks = null)
    {
        this.from = from;
        this.to = to > from ? to : from + (from == 0 ? 1 : Math.Abs(from));
        this.isLog = isLog;
        Title = title;
        Ticks = ticks ?? (isLog ? LogTicks() : LinearTicks());
    }

    /// <summary>What it measures, unit included; only axes across show it, of heights the caption tells.</summary>
    public string Title { get; }

    /// <summary>The values named on it.</summary>
    public IReadOnlyList<double> Ticks { get; }

    public static Axis Linear(double from, double to, string title = "") => new(from, to, false, title);

    /// <summary>Both ends must be positive; ticks stand where the caller says, or at round numbers.</summary>
    public static Axis Log(double from, double to, string title = "", IReadOnlyList<double>? ticks = null) => from > 0
        ? new Axis(from, to, true, title, ticks)
        : throw new ArgumentOutOfRangeException(nameof(from), from, "a logarithmic axis begins above 0");

    /// <summary>The place of a value, in percent of the length.</summary>
    public double Percent(double value) => 100 * (isLog
        ? Math.Log(value / from) / Math.Log(to / from)
        : (value - from) / (to - from));

    private double[] LinearTicks()
    {
        double step = Math.Pow(10, Math.Floor(Math.Log10((to - from) / MostTicks)));
        foreach (double factor in (double[])[2, 2.5, 2, 2, 2.5, 2]) // 1, 2, 5, 10, 20, 50, 100
        {
            if ((to - from) / step <= MostTicks - 1)
                break;
            step *= factor;
        }
        double first = Math.Ceiling((from / step) - 1e-9);
        int count = (int)(Math.Floor((to / step) + 1e-9) - first) + 1;
        // Division and multiplication by turns keep 0.3 from becoming 0.30000000000000004.
        return [.. Enumerable.Range(0, count).Select(i => step < 1 ? (first + i) / Math.Round(1 / step, 6) : (first + i) * step)];
    }

    // Whole decades where there are enough of them, then 1-2-5, then the linear ones.
    private double[] LogTicks()
    {
        int low = (int)Math.Floor(Math.Log10(from)), high = (int)Math.Ceiling(Math.Log10(to));
        int stride = Math.Max(1, (high - low + MostTicks - 1) / MostTicks);
        double[] decades = Within([1], stride);
        if (decades.Length >= 3)
            return decades;
        double[] few = Within([1, 2, 5], 1);
        return few.Length is >= 3 and <= MostTicks ? few : few.Length > MostTicks ? Within([1, 3], 1) : LinearTicks();

        double[] Within(double[] leading, int every) =>
        [
            .. Enumerable.Range(low, high - low + 1).Where(power => power % every == 0)
                .SelectMany(power => leading.Select(lead => power < 0 ? lead / Math.Pow(10, -power) : lead * Math.Pow(10, power)))
                .Where(value => value >= from * (1 - 1e-9) && value <= to * (1 + 1e-9)),
        ];
    }
}
