// Log-uniform conductances drawn by counter, so that the order in which links stream out does not matter.
// Invariant: every value is the double nearest to a decimal of six significant digits, so each file form holds the same number.

namespace ScaleResist.DataGen.Networks;

/// <summary>Conductances spread log-uniformly over a number of decades around 1.</summary>
public static class Conductances
{
    /// <summary>The widest spread allowed.</summary>
    public const double MaximumDecades = 12;

    private const ulong Stream = 0xC0D;

    private static readonly double[] PowersOfTen = [1e0, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9, 1e10, 1e11, 1e12];

    /// <summary>
    /// c = 10^(D (h - 1/2)) to six significant digits, with h in [0, 1) a hash of (seed, {source, target}); 1 where D = 0.
    /// Parallel links share their conductance.
    /// </summary>
    public static double Of(ulong seed, long source, long target, double decades)
    {
        if (decades == 0)
            return 1;
        (long low, long high) = source < target ? (source, target) : (target, source);
        double h = SeededRandom.ToUnit(SeededRandom.Hash(seed ^ Stream, (ulong)low, (ulong)high));
        return PowerOfTen(decades * (h - 0.5));
    }

    /// <summary>10^x to six significant digits, for |x| at most 6.5; plain IEEE arithmetic, hence the same on every platform.</summary>
    public static double PowerOfTen(double x)
    {
        double whole = Math.Floor(x);
        double y = (x - whole) * (2.302585092994045684 / 4);
        // e^y by Taylor to y^16 / 16!, y below 0.58: the remainder is below 1e-18. Then the fourth power.
        double e = 1;
        for (int k = 16; k > 0; k--)
            e = 1 + (y / k * e);
        e *= e;
        double digits = Math.Round(e * e * 1e5);
        int exponent = (int)whole - 5;
        // Both operands are exact, so the result is the double nearest to the decimal.
        return exponent >= 0 ? digits * PowersOfTen[exponent] : digits / PowersOfTen[-exponent];
    }
}
