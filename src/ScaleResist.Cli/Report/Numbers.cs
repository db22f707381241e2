// Numbers for people: thousands separators, six significant digits, binary units for memory; the invariant culture throughout.

using System.Globalization;

namespace ScaleResist.Cli.Report;

/// <summary>Formats numbers.</summary>
internal static class Numbers
{
    /// <summary>A count with thousands separators.</summary>
    public static string Count(long value) => value.ToString("N0", CultureInfo.InvariantCulture);

    /// <summary>A measured value with some significant digits: plain from 1e-4 to 1e9, else with an exponent.</summary>
    public static string Value(double value, int digits = 6)
    {
        double size = Math.Abs(value);
        if (value == 0)
            return "0";
        if (!double.IsFinite(value))
            return double.IsNaN(value) ? "undefined" : value > 0 ? "infinite" : "-infinite";
        if (size is < 1e-4 or >= 1e9)
        {
            string scientific = value.ToString("E" + (digits - 1), CultureInfo.InvariantCulture);
            string[] parts = scientific.Split('E');
            return $"{Trim(parts[0])}e{int.Parse(parts[1], NumberStyles.AllowLeadingSign, CultureInfo.InvariantCulture)}";
        }
        int whole = (int)Math.Floor(Math.Log10(size)) + 1;
        if (whole >= digits)
        {
            double scale = Math.Pow(10, whole - digits);
            return (Math.Round(value / scale) * scale).ToString("N0", CultureInfo.InvariantCulture);
        }
        return Trim(value.ToString("N" + (digits - whole), CultureInfo.InvariantCulture));
    }

    /// <summary>Bytes in binary units.</summary>
    public static string Bytes(double bytes)
    {
        string[] units = ["bytes", "KiB", "MiB", "GiB", "TiB"];
        int unit = 0;
        for (; bytes >= 1024 && unit < units.Length - 1; unit++)
            bytes /= 1024;
        return $"{(unit == 0 ? bytes.ToString("0", CultureInfo.InvariantCulture) : Value(bytes, 3))} {units[unit]}";
    }

    /// <summary>Seconds, or minutes and hours where there are many.</summary>
    public static string Duration(double seconds) => seconds switch
    {
        < 0.0995 => string.Create(CultureInfo.InvariantCulture, $"{seconds:0.00} s"),
        < 120 => string.Create(CultureInfo.InvariantCulture, $"{seconds:0.0} s"),
        < 7200 => string.Create(CultureInfo.InvariantCulture, $"{(int)(seconds / 60)} min {seconds % 60:00} s"),
        _ => string.Create(CultureInfo.InvariantCulture, $"{(int)(seconds / 3600)} h {(int)(seconds % 3600 / 60):00} min"),
    };

    /// <summary>An amount of work in the observer's unit.</summary>
    public static string Amount(double amount, string unit) =>
        unit == "bytes" ? Bytes(amount) : $"{Count((long)amount)} {unit}".TrimEnd();

    /// <summary>"1 node", "2 nodes".</summary>
    public static string Many(long count, string one) => $"{Count(count)} {one}{(count == 1 ? "" : "s")}";

    private static string Trim(string number) => number.Contains('.') ? number.TrimEnd('0').TrimEnd('.') : number;
}
