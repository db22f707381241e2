// Counter-based random bits: the same counter and key give the same bits on every machine, in any order, on any thread.
// Philox 4x32-10: Salmon, Moraes, Dror & Shaw, "Parallel random numbers: as easy as 1, 2, 3", SC 2011.

using System.Runtime.CompilerServices;

namespace ScaleResist.Kernels;

/// <summary>128 random bits.</summary>
/// <param name="Low">Output words 0 (low half) and 1.</param>
/// <param name="High">Output words 2 (low half) and 3.</param>
public readonly record struct Bits128(ulong Low, ulong High);

/// <summary>Philox 4x32 with ten rounds.</summary>
public static class Philox
{
    /// <summary>The block of random bits of a 128-bit counter (four words, c0 first) under a 64-bit key.</summary>
    [MethodImpl(MethodImplOptions.AggressiveInlining)]
    public static Bits128 Block(uint c0, uint c1, uint c2, uint c3, ulong key)
    {
        uint k0 = (uint)key, k1 = (uint)(key >> 32);
        for (int round = 0; round < 10; round++)
        {
            ulong p0 = (ulong)0xD2511F53 * c0;
            ulong p1 = (ulong)0xCD9E8D57 * c2;
            c0 = (uint)(p1 >> 32) ^ c1 ^ k0;
            c1 = (uint)p1;
            c2 = (uint)(p0 >> 32) ^ c3 ^ k1;
            c3 = (uint)p0;
            k0 += 0x9E3779B9;
            k1 += 0xBB67AE85;
        }
        return new Bits128(c0 | ((ulong)c1 << 32), c2 | ((ulong)c3 << 32));
    }
}
