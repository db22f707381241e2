// Counts of positive numbers in fixed bins, 16 to a factor of two, whatever their size: half a megabyte, no logarithm a value.
// Invariant: the bin of a number depends on its bits alone; bins do not depend on what was counted before.

namespace ScaleResist.Cli.Report.Findings;

/// <summary>A bin of a histogram.</summary>
/// <param name="From">Lower edge, within.</param>
/// <param name="To">Upper edge.</param>
/// <param name="Count">All that fell into it.</param>
/// <param name="Marked">Of them, those that are marked (bridges, for links).</param>
internal readonly record struct Bin(double From, double To, long Count, long Marked);

/// <summary>Logarithmic bins over all positive doubles.</summary>
internal sealed class LogBins
{
    private const int PerOctave = 16;
    private static readonly double[] Steps = [.. Enumerable.Range(0, PerOctave).Select(i => Math.Pow(2, i / (double)PerOctave))];
    private readonly long[] counts = new long[2048 * PerOctave];
    private readonly long[] marked = new long[2048 * PerOctave];

    /// <summary>All numbers counted.</summary>
    public long Total { get; private set; }

    /// <summary>The smallest of them, or infinity.</summary>
    public double Least { get; private set; } = double.PositiveInfinity;

    /// <summary>The largest of them, or 0.</summary>
    public double Most { get; private set; }

    /// <summary>Counts a number; what is not finite and positive has no place here and is left out.</summary>
    public void Add(double value, bool mark = false)
    {
        if (!(value > 0 && double.IsFinite(value)))
            return;
        int bin = BinOf(value);
        counts[bin]++;
        if (mark)
            marked[bin]++;
        Total++;
        Least = Math.Min(Least, value);
        Most = Math.Max(Most, value);
    }

    /// <summary>The bins from the first to the last that holds anything, joined by twos until there are at most so many.</summary>
    public IReadOnlyList<Bin> Show(int most)
    {
        if (Total == 0)
            return [];
        (int first, int last, int width) = (BinOf(Least), BinOf(Most), 1);
        while ((last / width) - (first / width) + 1 > most)
            width *= 2;
        List<Bin> bins = [];
        for (int start = first / width * width; start <= last; start += width)
            bins.Add(new Bin(Edge(start), Edge(start + width), counts.AsSpan(start, width).Sum(), marked.AsSpan(start, width).Sum()));
        return bins;
    }

    /// <summary>A bound that at least this share of the numbers lies below: the upper edge of a bin, so at most 4.5 % too wide.</summary>
    public double Bound(double share)
    {
        long wanted = (long)Math.Ceiling(share * Total), below = 0;
        for (int bin = 0; bin < counts.Length; bin++)
        {
            below += counts[bin];
            if (below >= wanted && below > 0)
                return Edge(bin + 1);
        }
        return 0;
    }

    // Subnormal numbers share the lowest bins, which no conductance from 1e-18 to 1e18 reaches.
    private static int BinOf(double value)
    {
        long bits = BitConverter.DoubleToInt64Bits(value);
        double mantissa = BitConverter.Int64BitsToDouble((bits & 0x000f_ffff_ffff_ffff) | 0x3ff0_0000_0000_0000);
        int step = 0;
        for (int half = PerOctave / 2; half > 0; half /= 2)
        {
            if (mantissa >= Steps[step + half])
                step += half;
        }
        return ((int)(bits >> 52) * PerOctave) + step;
    }

    private static double Edge(int bin) => Math.ScaleB(Steps[bin % PerOctave], (bin / PerOctave) - 1023);
}

internal static class Sums
{
    public static long Sum(this Span<long> values)
    {
        long sum = 0;
        foreach (long value in values)
            sum += value;
        return sum;
    }
}
