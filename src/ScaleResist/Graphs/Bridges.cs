// Bridges and the nodes each cuts off: the blocks of a single link.
// Invariant: a link is reported exactly if its removal splits its component.

namespace ScaleResist.Graphs;

/// <summary>The bridges of a network, ascending by link number.</summary>
public sealed class Bridges
{
    private readonly long[] links;
    private readonly int[] nodesCutOff;

    internal Bridges(long[] links, int[] nodesCutOff)
    {
        this.links = links;
        this.nodesCutOff = nodesCutOff;
        Array.Sort(links, nodesCutOff);
    }

    /// <summary>Their link numbers, ascending, as <see cref="Network.LinkStart"/> counts links.</summary>
    public ReadOnlySpan<long> Links => links;

    /// <summary>For each, the number of nodes on its smaller side.</summary>
    public ReadOnlySpan<int> NodesCutOff => nodesCutOff;

    /// <summary>How many there are.</summary>
    public int Count => links.Length;

    /// <summary>
    /// The position in <see cref="Links"/> of the first bridge whose number is not below <paramref name="link"/>.
    /// </summary>
    public int FirstFrom(long link)
    {
        int at = Array.BinarySearch(links, link);
        return at < 0 ? ~at : at;
    }

    /// <summary>Whether a link is a bridge. O(log bridges).</summary>
    public bool Contains(long link) => Array.BinarySearch(links, link) >= 0;

    /// <summary>Finds all bridges, by the search that finds all blocks. O(n + m).</summary>
    public static Bridges Find(Network network) => Blocks.Find(network).Bridges;
}
