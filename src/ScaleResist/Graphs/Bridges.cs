// Bridges and the nodes each cuts off, by one depth-first search with an explicit stack.
// Invariant: a link is reported exactly if its removal splits its component.

namespace ScaleResist.Graphs;

/// <summary>The bridges of a network, ascending by link number.</summary>
public sealed class Bridges
{
    private readonly long[] links;
    private readonly int[] nodesCutOff;

    private Bridges(long[] links, int[] nodesCutOff)
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

    /// <summary>
    /// Finds all bridges: the tree link into v is one exactly if nothing below v reaches above it
    /// (low-points; Tarjan, SIAM J. Comput. 1:146, 1972). O(n + m) time, 20 bytes a node.
    /// </summary>
    public static Bridges Find(Network network)
    {
        int n = network.NodeCount;
        long[] rowStart = network.RowStart;
        int[] neighbours = network.Neighbours;
        int[] entered = new int[n]; // 1-based time of entry; 0: not yet
        int[] low = new int[n];
        int[] below = new int[n]; // nodes of the search tree at and below
        int[] stack = new int[n];
        long[] cursor = new long[n];
        List<long> bridges = [];
        List<int> cutOff = [];
        int clock = 0;
        foreach (Component component in network.Components)
        {
            int depth = 0;
            Enter(component.Start);
            while (depth > 0)
            {
                int u = stack[depth - 1];
                int parent = depth > 1 ? stack[depth - 2] : -1;
                if (cursor[u] < rowStart[u + 1])
                {
                    int v = neighbours[cursor[u]++];
                    if (entered[v] == 0)
                        Enter(v);
                    else if (v != parent)
                        low[u] = Math.Min(low[u], entered[v]);
                    continue;
                }
                depth--;
                if (parent < 0)
                    continue;
                low[parent] = Math.Min(low[parent], low[u]);
                below[parent] += below[u];
                if (low[u] > entered[parent])
                {
                    bridges.Add(network.LinkBetween(parent, u));
                    cutOff.Add(Math.Min(below[u], component.Nodes - below[u]));
                }
            }

            void Enter(int node)
            {
                entered[node] = low[node] = ++clock;
                below[node] = 1;
                cursor[node] = rowStart[node];
                stack[depth++] = node;
            }
        }
        return new Bridges([.. bridges], [.. cutOff]);
    }
}
