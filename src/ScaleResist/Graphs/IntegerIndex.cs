// Integer labels to dense indices: a flat table for the small labels that most files use, a dictionary for the rest.
// Invariant: a label below the table's length is in the table, any other in the dictionary; the table stays within 16 entries
// for each label seen (plus a constant), so a few huge labels never blow it up.

using System.Numerics;
using System.Runtime.InteropServices;

namespace ScaleResist.Graphs;

/// <summary>Gives int64 labels the dense indices 0, 1, 2, ... in order of first appearance. O(1) a look-up.</summary>
internal sealed class IntegerIndex
{
    private const int Slack = 8;
    private const int FewLabels = 1024;

    // Index + 1 by label; 0 where the label has not been seen. One cache miss a look-up, where a dictionary has two or three.
    private int[] table = new int[FewLabels];
    private Dictionary<long, int> others = [];

    /// <summary>The number of labels.</summary>
    public int Count { get; private set; }

    /// <summary>The index of a label, which is new where it was not seen before.</summary>
    public int GetOrAdd(long label)
    {
        int[] small = table;
        if ((ulong)label < (ulong)small.Length)
        {
            ref int slot = ref small[label];
            if (slot == 0)
                slot = Next() + 1;
            return slot - 1;
        }
        return GetOrAddOther(label);
    }

    /// <summary>Whether a label was seen.</summary>
    public bool Contains(long label) =>
        (ulong)label < (ulong)table.Length ? table[label] != 0 : others.ContainsKey(label);

    /// <summary>The labels by index.</summary>
    public long[] ToArray()
    {
        long[] labels = new long[Count];
        for (int label = 0; label < table.Length; label++)
        {
            if (table[label] != 0)
                labels[table[label] - 1] = label;
        }
        foreach ((long label, int index) in others)
            labels[index] = label;
        return labels;
    }

    private int GetOrAddOther(long label)
    {
        if (label >= 0 && label < Slack * ((long)Count + FewLabels) && label < 1 << 30)
        {
            Grow((int)BitOperations.RoundUpToPowerOf2((uint)label + 1));
            return GetOrAdd(label);
        }
        ref int slot = ref CollectionsMarshal.GetValueRefOrAddDefault(others, label, out bool known);
        if (!known)
            slot = Next();
        return slot;
    }

    private void Grow(int length)
    {
        Array.Resize(ref table, length);
        Dictionary<long, int> left = [];
        foreach ((long label, int index) in others)
        {
            if ((ulong)label < (ulong)length)
                table[label] = index + 1;
            else
                left.Add(label, index);
        }
        others = left;
    }

    // The table holds index + 1, so one index less than int allows.
    private int Next() => Count < int.MaxValue - 1
        ? Count++
        : throw new InvalidOperationException("More than 2^31 - 2 nodes.");
}
