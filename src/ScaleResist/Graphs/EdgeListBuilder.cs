// Collects rows into an EdgeList: gives every label a dense index in order of first appearance.
// Invariant: labels are integers until the first label that is not one; from then on all of them are strings.

using System.Globalization;
using System.Runtime.InteropServices;

namespace ScaleResist.Graphs;

/// <summary>Builds an <see cref="EdgeList"/> row by row. Not safe for several threads.</summary>
public sealed class EdgeListBuilder
{
    private readonly AppendBuffer<EndNodes> links = new();
    private readonly AppendBuffer<double>? weights;
    private readonly bool areLengths;
    private IntegerIndex? byInteger = new();
    private Dictionary<string, int>.AlternateLookup<ReadOnlySpan<char>> byText;

    /// <summary>Creates a builder.</summary>
    /// <param name="weighted">Whether rows carry a conductance or a length.</param>
    /// <param name="areLengths">Whether it is a length.</param>
    public EdgeListBuilder(bool weighted, bool areLengths = false)
    {
        weights = weighted ? new AppendBuffer<double>() : null;
        this.areLengths = areLengths;
    }

    /// <summary>Rows added so far.</summary>
    public long Count => links.Count;

    /// <summary>Adds a link between integer labels. <paramref name="weight"/> must be finite and positive (a length: or zero); it
    /// is ignored without weights.</summary>
    public void Add(long source, long target, double weight = 1)
    {
        if (byInteger is not null)
            Append(byInteger.GetOrAdd(source), byInteger.GetOrAdd(target), weight);
        else
            Append(Index(source.ToString(CultureInfo.InvariantCulture)), Index(target.ToString(CultureInfo.InvariantCulture)),
                weight);
    }

    /// <summary>Adds a link between labels as they stand in the file.</summary>
    public void Add(ReadOnlySpan<char> source, ReadOnlySpan<char> target, double weight = 1)
    {
        if (byInteger is not null)
        {
            if (NodeLabels.TryCanonicalInteger(source, out long u) && NodeLabels.TryCanonicalInteger(target, out long v))
            {
                Append(byInteger.GetOrAdd(u), byInteger.GetOrAdd(v), weight);
                return;
            }
            TurnIntoTexts();
        }
        Append(Index(source), Index(target), weight);
    }

    /// <summary>Whether a node has this label so far.</summary>
    public bool Contains(ReadOnlySpan<char> label) => byInteger is null
        ? byText.ContainsKey(label)
        : NodeLabels.TryCanonicalInteger(label, out long value) && byInteger.Contains(value);

    /// <summary>Ends the list. The builder is spent.</summary>
    public EdgeList Finish(InputFacts facts)
    {
        NodeLabels labels;
        if (byInteger is not null)
        {
            labels = new NodeLabels(byInteger.ToArray());
        }
        else
        {
            string[] values = new string[byText.Dictionary.Count];
            foreach ((string value, int node) in byText.Dictionary)
                values[node] = value;
            labels = new NodeLabels(values);
        }
        return new EdgeList(labels, links, weights, areLengths, facts);
    }

    private void Append(int source, int target, double weight)
    {
        links.Add(new EndNodes(source, target));
        weights?.Add(weight);
    }

    private int Index(ReadOnlySpan<char> label)
    {
        int next = byText.Dictionary.Count;
        ref int slot = ref CollectionsMarshal.GetValueRefOrAddDefault(byText, label, out bool known);
        if (!known)
            slot = next;
        return slot;
    }

    private void TurnIntoTexts()
    {
        long[] labels = byInteger!.ToArray();
        Dictionary<string, int> texts = new(labels.Length);
        for (int node = 0; node < labels.Length; node++)
            texts.Add(labels[node].ToString(CultureInfo.InvariantCulture), node);
        byText = texts.GetAlternateLookup<ReadOnlySpan<char>>();
        byInteger = null;
    }
}
