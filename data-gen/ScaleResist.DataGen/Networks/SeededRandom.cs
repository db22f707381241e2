// Random numbers that are the same on every platform and runtime version: integer arithmetic only.
// Invariant: a draw depends on the seed, the stream and the draw's number, and on nothing else.

namespace ScaleResist.DataGen.Networks;

/// <summary>
/// SplitMix64 (Steele, Lea and Flood, OOPSLA 2014): draw i of a stream is <c>Mix(key + i * gamma)</c>, so that it serves in sequence
/// as well as by counter. Good enough for making networks; no cryptographic claim.
/// </summary>
public sealed class SeededRandom
{
    private const ulong Gamma = 0x9E3779B97F4A7C15;
    private ulong state;

    /// <summary>A stream of its own for each pair (seed, stream).</summary>
    public SeededRandom(ulong seed, ulong stream) => state = Hash(seed, stream, 0);

    /// <summary>64 random bits.</summary>
    public ulong Next() => Mix(state += Gamma);

    /// <summary>A whole number in [0, bound); the bias is below bound / 2^64.</summary>
    public long Below(long bound) => (long)Math.BigMul(Next(), (ulong)bound, out _);

    /// <summary>A number in [0, 1), a multiple of 2^-53.</summary>
    public double Unit() => ToUnit(Next());

    /// <summary>Geometric on 0, 1, 2, ... with this mean; by repeated trial, since a logarithm may differ between platforms.</summary>
    public int Geometric(double mean)
    {
        double again = mean / (1 + mean);
        int value = 0;
        while (value < ushort.MaxValue - 1 && Unit() < again)
            value++;
        return value;
    }

    /// <summary>Puts the values into random order (Fisher and Yates).</summary>
    public void Shuffle<T>(Span<T> values)
    {
        for (int i = values.Length - 1; i > 0; i--)
        {
            int j = (int)Below(i + 1);
            (values[i], values[j]) = (values[j], values[i]);
        }
    }

    /// <summary>64 bits that depend on (seed, a, b) alone.</summary>
    public static ulong Hash(ulong seed, ulong a, ulong b) => Mix(Mix(Mix(seed + Gamma) + (a * Gamma)) + (b * Gamma) + Gamma);

    /// <summary>The upper 53 bits as a number in [0, 1).</summary>
    public static double ToUnit(ulong bits) => (bits >> 11) * (1.0 / (1UL << 53));

    internal static ulong Mix(ulong z)
    {
        z = (z ^ (z >> 30)) * 0xBF58476D1CE4E5B9;
        z = (z ^ (z >> 27)) * 0x94D049BB133111EB;
        return z ^ (z >> 31);
    }
}
