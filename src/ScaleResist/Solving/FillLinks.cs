// Links that elimination adds, as linked lists in flat arrays: two entries a link, twins side by side.
// Invariant: entry i runs from one end, entry i^1 from the other, and both carry the same weight.

namespace ScaleResist.Solving;

/// <summary>Added links of a changing graph.</summary>
/// <param name="nodes">The number of nodes.</param>
internal sealed class FillLinks(int nodes)
{
    private readonly int[] head = Heads(nodes);
    private readonly int[] length = new int[nodes];
    private int[] next = new int[16];
    private int[] to = new int[16];
    private double[] weight = new double[16];
    private int count;

    /// <summary>The first entry of a node, or -1.</summary>
    public int First(int node) => head[node];

    /// <summary>The entry after this one, or -1.</summary>
    public int Next(int link) => next[link];

    /// <summary>The other end.</summary>
    public int To(int link) => to[link];

    /// <summary>The weight.</summary>
    public double Weight(int link) => weight[link];

    /// <summary>Adds a link.</summary>
    public void Add(int u, int v, double c)
    {
        if (count + 2 > to.Length)
        {
            int size = checked(2 * to.Length);
            Array.Resize(ref next, size);
            Array.Resize(ref to, size);
            Array.Resize(ref weight, size);
        }
        Put(u, v, c);
        Put(v, u, c);
    }

    /// <summary>Adds to the weight of a link that was added before; false where there is none. Drops entries that lead to nodes that are gone.</summary>
    public bool TryAddTo(int u, int v, double c, bool[] gone)
    {
        if (length[u] > length[v])
            (u, v) = (v, u);
        int before = -1;
        for (int link = head[u]; link >= 0; link = next[link])
        {
            if (to[link] == v)
            {
                weight[link] += c;
                weight[link ^ 1] += c;
                return true;
            }
            if (!gone[to[link]])
            {
                before = link;
                continue;
            }
            length[u]--;
            if (before < 0)
                head[u] = next[link];
            else
                next[before] = next[link];
        }
        return false;
    }

    private void Put(int from, int end, double c)
    {
        to[count] = end;
        weight[count] = c;
        next[count] = head[from];
        head[from] = count++;
        length[from]++;
    }

    private static int[] Heads(int nodes)
    {
        int[] heads = new int[nodes];
        Array.Fill(heads, -1);
        return heads;
    }
}
