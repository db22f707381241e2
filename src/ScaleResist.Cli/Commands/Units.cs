// Durations and sizes as people write them: 4h, 90m, 30s; 16GiB, 500MB. A bare number has no unit and is refused.

using System.Globalization;

namespace ScaleResist.Cli.Commands;

/// <summary>Reads numbers with units.</summary>
internal static class Units
{
    private static readonly (string Unit, double Seconds)[] Times = [("h", 3600), ("m", 60), ("s", 1)];

    private static readonly (string Unit, double Bytes)[] Sizes =
    [
        ("KiB", 1024), ("MiB", 1 << 20), ("GiB", 1 << 30), ("TiB", 1L << 40),
        ("KB", 1e3), ("MB", 1e6), ("GB", 1e9), ("TB", 1e12),
    ];

    /// <summary>Reads a positive duration such as <c>4h</c>, <c>90m</c>, <c>1.5h</c> or <c>30s</c>.</summary>
    public static bool TryDuration(string text, out TimeSpan duration)
    {
        bool good = TryScaled(text, Times, out double seconds) && seconds < TimeSpan.MaxValue.TotalSeconds;
        duration = good ? TimeSpan.FromSeconds(seconds) : default;
        return good;
    }

    /// <summary>Reads a positive size such as <c>16GiB</c> or <c>500MB</c>, in bytes.</summary>
    public static bool TrySize(string text, out long bytes)
    {
        bool good = TryScaled(text, Sizes, out double value) && value is >= 1 and < long.MaxValue;
        bytes = good ? (long)value : 0;
        return good;
    }

    private static bool TryScaled(string text, (string Unit, double Scale)[] units, out double value)
    {
        value = 0;
        foreach ((string unit, double scale) in units)
        {
            if (!text.EndsWith(unit, StringComparison.OrdinalIgnoreCase))
                continue;
            if (!double.TryParse(text.AsSpan(0, text.Length - unit.Length), NumberStyles.AllowDecimalPoint,
                    CultureInfo.InvariantCulture, out double number))
                return false;
            value = number * scale;
            return value > 0;
        }
        return false;
    }
}
