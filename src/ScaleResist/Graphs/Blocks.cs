// Blocks (biconnected components), cut nodes and bridges, by one depth-first search with an explicit stack.
// Invariant: every node but the root of its component is a member of exactly one block, that of its tree link; in any other
// block it lies in it is the head, the node nearest to the root. Blocks are numbered children first.

namespace ScaleResist.Graphs;

/// <summary>
/// The blocks of a network: the largest parts that the loss of no single node splits. Links are shared out among them, and the
/// blocks of a component form a tree through their heads. Nothing is kept per link.
/// </summary>
public sealed class Blocks
{
    private readonly int[] blockOf;
    private readonly int[] heads;
    private readonly int[] links;
    private readonly int[] memberStart;
    private readonly int[] members;
    private readonly int[] componentStart;
    private readonly bool[] isCut;

    private Blocks(Network network, Search search)
    {
        Network = network;
        blockOf = search.BlockOf;
        heads = [.. search.Heads];
        links = [.. search.Links];
        memberStart = [.. search.MemberStart];
        componentStart = [.. search.ComponentStart];
        Bridges = search.ToBridges();
        members = new int[memberStart[^1]];
        int[] next = memberStart[..^1];
        for (int u = 0; u < blockOf.Length; u++)
        {
            if (blockOf[u] >= 0)
                members[next[blockOf[u]]++] = u;
        }
        isCut = new bool[blockOf.Length];
        int lastRoot = -1;
        foreach (int head in heads)
        {
            // A head that is a member elsewhere lies in two blocks; a root does once it heads a second one.
            bool cut = blockOf[head] >= 0 || lastRoot == head;
            if (blockOf[head] < 0)
                lastRoot = head;
            if (cut && !isCut[head])
            {
                isCut[head] = true;
                CutNodes++;
            }
        }
    }

    /// <summary>The network.</summary>
    public Network Network { get; }

    /// <summary>How many there are; a bridge counts as one, a node without links has none.</summary>
    public int Count => heads.Length;

    /// <summary>The blocks of a single link.</summary>
    public Bridges Bridges { get; }

    /// <summary>How many nodes lie in more than one block: those whose loss splits their component.</summary>
    public int CutNodes { get; }

    /// <summary>Whether a node lies in more than one block.</summary>
    public bool IsCutNode(int node) => isCut[node];

    /// <summary>The block in which a node is a member, not the head; -1 for the root of a component.</summary>
    public int BlockOf(int node) => blockOf[node];

    /// <summary>The block of a link, given by its ends. O(1).</summary>
    public int BlockOf(int u, int v)
    {
        int one = blockOf[u], other = blockOf[v];
        return one >= 0 && (one == other || heads[one] == v) ? one : other;
    }

    /// <summary>The node of a block through which the root of its component is reached.</summary>
    public int Head(int block) => heads[block];

    /// <summary>The nodes of a block but its head, ascending.</summary>
    public ReadOnlySpan<int> Members(int block) => members.AsSpan(memberStart[block], memberStart[block + 1] - memberStart[block]);

    /// <summary>The number of nodes of a block, head included.</summary>
    public int NodesOf(int block) => memberStart[block + 1] - memberStart[block] + 1;

    /// <summary>The number of links of a block.</summary>
    public int LinksOf(int block) => links[block];

    /// <summary>Whether a block is a single link.</summary>
    public bool IsBridge(int block) => links[block] == 1;

    /// <summary>The blocks of a component are <c>First .. End-1</c>; children stand before their parents.</summary>
    public (int First, int End) OfComponent(int component) => (componentStart[component], componentStart[component + 1]);

    /// <summary>The component of a block. O(log components).</summary>
    public int ComponentOf(int block)
    {
        // Components without links have an empty range; the last that begins at or before the block is not one of them.
        int low = 0, high = componentStart.Length - 2;
        while (low < high)
        {
            int middle = low + ((high - low + 1) / 2);
            if (componentStart[middle] <= block)
                low = middle;
            else
                high = middle - 1;
        }
        return low;
    }

    /// <summary>
    /// Finds all blocks: one ends with the tree link into v exactly if nothing below v reaches above the other end
    /// (low-points; Tarjan, SIAM J. Comput. 1:146, 1972; Hopcroft &amp; Tarjan, Commun. ACM 16:372, 1973).
    /// O(n + m) time; 12 bytes a node, 24 a node of the longest search path, and 20 a block.
    /// </summary>
    public static Blocks Find(Network network)
    {
        Search search = new(network);
        foreach (Component component in network.Components)
            search.Explore(component);
        return new Blocks(network, search);
    }

    private struct Step
    {
        public long Arc; // the next of the node's arcs
        public int Node;
        public int Low; // the earliest time of entry that a link from below reaches
        public int Below; // nodes of the search tree at and below
        public int Links; // links of the block being built here (a network has below 2^30: its arcs lie in one array)
    }

    private sealed class Search(Network network)
    {
        private readonly int[] entered = new int[network.NodeCount]; // time of entry from 1; 0: not yet
        private readonly int[] open = new int[network.NodeCount]; // entered and in no block yet, by time of entry
        private readonly List<long> bridges = [];
        private readonly List<int> nodesCutOff = [];
        private Step[] path = new Step[64];
        private int depth;
        private int openCount;
        private int clock;

        public int[] BlockOf { get; } = new int[network.NodeCount];

        public List<int> Heads { get; } = [];

        public List<int> Links { get; } = [];

        public List<int> MemberStart { get; } = [0];

        public List<int> ComponentStart { get; } = [0];

        public Bridges ToBridges() => new([.. bridges], [.. nodesCutOff]);

        public void Explore(Component component)
        {
            int[] neighbours = network.Neighbours;
            long[] rowStart = network.RowStart;
            depth = 0;
            Enter(component.Start);
            while (depth > 0)
            {
                ref Step top = ref path[depth - 1];
                int parent = depth > 1 ? path[depth - 2].Node : -1;
                int here = entered[top.Node];
                long end = rowStart[top.Node + 1];
                int next = -1;
                while (top.Arc < end)
                {
                    int v = neighbours[top.Arc++];
                    int then = entered[v];
                    if (then == 0)
                    {
                        next = v;
                        break;
                    }
                    if (then < here) // a link belongs to the end that was entered later
                    {
                        top.Links++;
                        if (v != parent)
                            top.Low = Math.Min(top.Low, then);
                    }
                }
                if (next >= 0)
                    Enter(next);
                else if (--depth > 0)
                    Return(ref path[depth - 1], in path[depth], component);
            }
            BlockOf[component.Start] = -1;
            openCount = 0;
            ComponentStart.Add(Heads.Count);
        }

        private void Enter(int node)
        {
            entered[node] = ++clock;
            open[openCount++] = node;
            if (depth == path.Length)
                Array.Resize(ref path, (int)Math.Min(network.NodeCount, 2L * depth));
            path[depth++] = new Step { Arc = network.RowStart[node], Node = node, Low = clock, Below = 1 };
        }

        private void Return(ref Step parent, in Step child, Component component)
        {
            parent.Below += child.Below;
            if (child.Low < entered[parent.Node])
            {
                parent.Low = Math.Min(parent.Low, child.Low);
                parent.Links += child.Links;
                return;
            }
            int block = Heads.Count;
            int first = openCount;
            do
                BlockOf[open[--first]] = block;
            while (open[first] != child.Node);
            Heads.Add(parent.Node);
            Links.Add(child.Links);
            MemberStart.Add(MemberStart[^1] + openCount - first);
            openCount = first;
            if (child.Links == 1)
            {
                bridges.Add(network.LinkBetween(parent.Node, child.Node));
                nodesCutOff.Add(Math.Min(child.Below, component.Nodes - child.Below));
            }
        }
    }
}
