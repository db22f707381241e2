// Identity of nodes and links that survives renumbering: two nights share random numbers wherever a link kept its ends.
// Invariant: a key depends on labels alone, never on the order of rows or of nodes.

using System.Numerics;
using System.Runtime.CompilerServices;

namespace ScaleResist.Graphs;

/// <summary>64-bit keys of nodes and links, from their labels.</summary>
public static class NodeKey
{
    /// <summary>The key of an integer label: the finaliser of SplitMix64 (Steele, Lea &amp; Flood 2014), a bijection.</summary>
    public static ulong Of(long label)
    {
        ulong x = (ulong)label + 0x9E3779B97F4A7C15;
        x = (x ^ (x >> 30)) * 0xBF58476D1CE4E5B9;
        x = (x ^ (x >> 27)) * 0x94D049BB133111EB;
        return x ^ (x >> 31);
    }

    /// <summary>
    /// The key of a string label: FNV-1a (Fowler, Noll &amp; Vo) over its UTF-16 units, then the finaliser above.
    /// </summary>
    public static ulong Of(ReadOnlySpan<char> label)
    {
        ulong hash = 0xCBF29CE484222325;
        foreach (char unit in label)
        {
            hash = (hash ^ (byte)unit) * 0x100000001B3;
            hash = (hash ^ (byte)(unit >> 8)) * 0x100000001B3;
        }
        return Of((long)hash);
    }

    /// <summary>The keys of all nodes.</summary>
    public static ulong[] OfAll(NodeLabels labels)
    {
        ulong[] keys = new ulong[labels.Count];
        if (labels.AreIntegers)
        {
            ReadOnlySpan<long> values = labels.Integers;
            for (int i = 0; i < keys.Length; i++)
                keys[i] = Of(values[i]);
        }
        else
        {
            ReadOnlySpan<string> values = labels.Texts;
            for (int i = 0; i < keys.Length; i++)
                keys[i] = Of(values[i]);
        }
        return keys;
    }

    /// <summary>The key of the link between two nodes, the same from either end.</summary>
    [MethodImpl(MethodImplOptions.AggressiveInlining)]
    public static ulong OfLink(ulong one, ulong other)
    {
        ulong low = Math.Min(one, other), high = Math.Max(one, other);
        return (low * 0x9E3779B97F4A7C15) + BitOperations.RotateLeft(high, 29);
    }
}
