// Labels of nodes, either all integers or all strings, by dense index. What a user gave is what a user gets back.

namespace ScaleResist.Graphs;

/// <summary>The labels of n nodes: all int64, or all strings.</summary>
public sealed class NodeLabels
{
    private readonly long[]? integers;
    private readonly string[]? texts;
    private Dictionary<long, int>? byInteger;
    private Dictionary<string, int>? byText;

    /// <summary>Integer labels.</summary>
    public NodeLabels(long[] integers) => this.integers = integers;

    /// <summary>String labels.</summary>
    public NodeLabels(string[] texts) => this.texts = texts;

    /// <summary>The number of nodes.</summary>
    public int Count => integers?.Length ?? texts!.Length;

    /// <summary>Whether every label is an int64.</summary>
    public bool AreIntegers => integers is not null;

    /// <summary>The integer labels by node; throws where labels are strings.</summary>
    public ReadOnlySpan<long> Integers => integers ?? throw new InvalidOperationException("Labels are strings.");

    /// <summary>The string labels by node; throws where labels are integers.</summary>
    public ReadOnlySpan<string> Texts => texts ?? throw new InvalidOperationException("Labels are integers.");

    /// <summary>The label of a node as text.</summary>
    public string this[int node] =>
        integers is not null ? integers[node].ToString(System.Globalization.CultureInfo.InvariantCulture) : texts![node];

    /// <summary>Orders two nodes by label: numerically, or by UTF-16 code unit.</summary>
    public int Compare(int a, int b) =>
        integers is not null ? integers[a].CompareTo(integers[b]) : string.CompareOrdinal(texts![a], texts[b]);

    /// <summary>
    /// The node with this label, or -1. The label is taken as it stands: integers only in canonical form (no '+', no leading
    /// zero). The first call builds an index of O(n) memory.
    /// </summary>
    public int IndexOf(ReadOnlySpan<char> label)
    {
        if (integers is not null)
            return TryCanonicalInteger(label, out long value) ? IndexOf(value) : -1;
        if (byText is null)
        {
            Dictionary<string, int> index = new(texts!.Length);
            for (int i = 0; i < texts.Length; i++)
                index.Add(texts[i], i);
            byText = index;
        }
        return byText.GetAlternateLookup<ReadOnlySpan<char>>().TryGetValue(label, out int node) ? node : -1;
    }

    /// <summary>The node with this integer label, or -1 (also where labels are strings that do not match).</summary>
    public int IndexOf(long label)
    {
        if (integers is null)
            return IndexOf(label.ToString(System.Globalization.CultureInfo.InvariantCulture));
        if (byInteger is null)
        {
            Dictionary<long, int> index = new(integers.Length);
            for (int i = 0; i < integers.Length; i++)
                index.Add(integers[i], i);
            byInteger = index;
        }
        return byInteger.TryGetValue(label, out int node) ? node : -1;
    }

    /// <summary>The same labels in another order: label i of the result is label <c>order[i]</c> of this.</summary>
    public NodeLabels Reordered(ReadOnlySpan<int> order)
    {
        if (integers is not null)
        {
            long[] moved = new long[order.Length];
            for (int i = 0; i < moved.Length; i++)
                moved[i] = integers[order[i]];
            return new NodeLabels(moved);
        }
        string[] movedTexts = new string[order.Length];
        for (int i = 0; i < movedTexts.Length; i++)
            movedTexts[i] = texts![order[i]];
        return new NodeLabels(movedTexts);
    }

    /// <summary>Reads an int64 that prints back as the very same text.</summary>
    public static bool TryCanonicalInteger(ReadOnlySpan<char> text, out long value)
    {
        value = 0;
        int digits = text.Length > 0 && text[0] == '-' ? 1 : 0;
        int length = text.Length - digits;
        if (length is < 1 or > 19)
            return false;
        if (text[digits] == '0' && (length > 1 || digits == 1))
            return false;
        ulong sum = 0;
        for (int i = digits; i < text.Length; i++)
        {
            uint digit = (uint)(text[i] - '0');
            if (digit > 9)
                return false;
            sum = (sum * 10) + digit;
        }
        if (sum > (ulong)long.MaxValue + (ulong)digits)
            return false;
        value = digits == 1 ? (long)(0 - sum) : (long)sum;
        return true;
    }
}
