// Links that elimination adds, as linked lists in flat arrays: two entries a link, twins side by side.
// Invariant: entry i runs from one end, entry i^1 from the other, and both carry the same weight.

namespace ScaleResist.Solving;

/// <summary>Added links of a changing graph.</summary>
/// <param name="nodes">The number of nodes.</param>
/// <param name="links">Links to make room for at once.</param>
internal sealed class FillLinks(int nodes, long links = 8)
{
    private readonly int[] head = Heads(nodes);
    private readonly int[] length = new int[nodes];
    private Entry[] entries = new Entry[Math.Min(2 * links, Array.MaxLength)];
    private int count;

    /// <summary>The first entry of a node, or -1.</summary>
    public int First(int node) => head[node];

    /// <summary>The entry after this one, or -1.</summary>
    public int Next(int link) => entries[link].Next;

    /// <summary>The other end.</summary>
    public int To(int link) => entries[link].To;

    /// <summary>The weight.</summary>
    public double Weight(int link) => entries[link].Weight;

    /// <summary>Adds a link.</summary>
    public void Add(int u, int v, double c)
    {
        if (count + 2 > entries.Length)
            Array.Resize(ref entries, (int)Math.Min(2L * entries.Length, Array.MaxLength));
        Put(u, v, c);
        Put(v, u, c);
    }

    /// <summary>Adds to the weight of a link that was added before; false where there is none. Drops entries that lead to nodes that are gone.</summary>
    public bool TryAddTo(int u, int v, double c, bool[] gone)
    {
        if (length[u] > length[v])
            (u, v) = (v, u);
        int before = -1;
        for (int link = head[u]; link >= 0; link = entries[link].Next)
        {
            if (entries[link].To == v)
            {
                entries[link].Weight += c;
                entries[link ^ 1].Weight += c;
                return true;
            }
            if (!gone[entries[link].To])
            {
                before = link;
                continue;
            }
            length[u]--;
            if (before < 0)
                head[u] = entries[link].Next;
            else
                entries[before].Next = entries[link].Next;
        }
        return false;
    }

    private void Put(int from, int end, double c)
    {
        entries[count] = new Entry { To = end, Next = head[from], Weight = c };
        head[from] = count++;
        length[from]++;
    }

    private struct Entry
    {
        public int To;
        public int Next;
        public double Weight;
    }

    private static int[] Heads(int nodes)
    {
        int[] heads = new int[nodes];
        Array.Fill(heads, -1);
        return heads;
    }
}
