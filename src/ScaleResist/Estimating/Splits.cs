// Into which parts a case leaves the components that it touches: by search and union, never by the size of a number.
//
// Where parts come apart, L' has a larger null space than L, and Woodbury's formula no inverse. So as many lost links as it takes to hold all
// together are kept as they were. Each is then a bridge, and within a part no resistance knows of it. The strongest are kept, for what is kept
// must not be weak beside what is lost. Components that no added link joins to the first are held by virtual links in the same way.
// Invariant: kept links form a forest over the parts; a lost node is a part of its own and counts nowhere.

using ScaleResist.Graphs;

namespace ScaleResist.Estimating;

/// <summary>
/// The parts of one case. The area is the components that it touches; of what is left of the largest of them, the largest part counts.
/// </summary>
internal sealed record CaseParts
{
    /// <summary>Components of the area, the largest first.</summary>
    public required int[] Area { get; init; }

    /// <summary>How many parts the area has afterwards.</summary>
    public required int Count { get; init; }

    /// <summary>Nodes of the part that counts; 0 where nothing is left of the largest component.</summary>
    public required int Nodes { get; init; }

    /// <summary>Nodes of the largest component that are neither lost nor in the part that counts.</summary>
    public required int CutOff { get; init; }

    /// <summary>By link of the case, whether it is lost but kept for the sums.</summary>
    public required bool[] Kept { get; init; }

    /// <summary>By component of the area, whether its virtual link to the first is kept; the first has none.</summary>
    public required bool[] JoinKept { get; init; }

    /// <summary>By component of the area, how many of its nodes are in the part that counts.</summary>
    public required int[] Held { get; init; }

    /// <summary>Of components neither wholly in the part that counts nor wholly out: the nodes in it, or those not, whichever are fewer.</summary>
    public required int[] Listed { get; init; }

    /// <summary>Whether <see cref="Listed"/> are those in it.</summary>
    public required bool ListedAreIn { get; init; }

    /// <summary>For the two ends of every pair, the part: <see cref="Elsewhere"/> outside the area, <see cref="Lost"/> where the node is.</summary>
    public required int[] OfPairs { get; init; }

    /// <summary>A node outside the area.</summary>
    public const int Elsewhere = -1;

    /// <summary>A lost node.</summary>
    public const int Lost = -2;
}

/// <summary>Finds parts; for one thread at a time. O(links of the area) where a link is lost.</summary>
internal sealed class Splits(Network network, int[] componentOf)
{
    private readonly int[] part = new int[network.NodeCount];
    private readonly int[] queue = new int[network.NodeCount];
    private readonly bool[] marked = new bool[network.NodeCount]; // ends of lost links
    private readonly HashSet<(int, int)> lost = [];

    /// <summary>The parts that a case leaves.</summary>
    public CaseParts Of(PlannedCase planned, IReadOnlyList<(int U, int V)> pairs)
    {
        int[] area = [.. planned.Links.SelectMany(link => new[] { componentOf[link.U], componentOf[link.V] })
            .Concat(planned.LostNodes.Select(u => componentOf[u])).Distinct().Order()];
        List<(int Size, int Place)> found = Search(planned, area, out bool searched);
        HashSet<int> gone = [.. planned.LostNodes];
        int[] after = Singles(found.Count), kept = Singles(found.Count);
        foreach (LinkChange link in planned.Links)
        {
            if (link.After > 0)
                Join(after, Raw(link.U), Raw(link.V));
        }
        for (int p = 0; p < kept.Length; p++)
            kept[p] = Root(after, p);

        bool[] keptLinks = new bool[planned.Links.Count], keptJoins = new bool[area.Length];
        IEnumerable<int> losses = Enumerable.Range(0, keptLinks.Length).Where(i => planned.Links[i].After == 0);
        foreach (int i in losses.OrderByDescending(i => planned.Links[i].Before))
            keptLinks[i] = Join(kept, Raw(planned.Links[i].U), Raw(planned.Links[i].V));
        int[] some = [.. Enumerable.Range(0, area.Length).Select(place => Raw(network.Components[area[place]].Start))];
        for (int i = 1; i < area.Length; i++)
            keptJoins[i] = Join(kept, some[0], some[i]);

        // Sizes of what is there afterwards, and which of it comes from the largest component.
        int[] size = new int[found.Count];
        bool[] counts = new bool[found.Count];
        HashSet<int> lostParts = [.. planned.LostNodes.Select(Raw)];
        for (int p = 0; p < found.Count; p++)
        {
            if (lostParts.Contains(p))
                continue;
            size[Root(after, p)] += found[p].Size;
            counts[Root(after, p)] |= found[p].Place == 0;
        }
        int main = Largest(size, counts, area, after, searched);
        int[] held = new int[area.Length];
        for (int p = 0; p < found.Count; p++)
        {
            if (main >= 0 && !lostParts.Contains(p) && Root(after, p) == main)
                held[found[p].Place] += found[p].Size;
        }
        (int[] listed, bool listedAreIn) = List(area, held, u => !gone.Contains(u) && Root(after, part[u]) == main);
        return new CaseParts
        {
            Area = area,
            Count = size.Count(nodes => nodes > 0),
            Nodes = main < 0 ? 0 : size[main],
            CutOff = area.Length == 0 ? 0 : network.Components[area[0]].Nodes - held[0] - planned.LostNodes.Count(u => componentOf[u] == area[0]),
            Kept = keptLinks,
            JoinKept = keptJoins,
            Held = held,
            Listed = listed,
            ListedAreIn = listedAreIn,
            OfPairs = [.. pairs.SelectMany(pair => new[] { OfEnd(pair.U), OfEnd(pair.V) })],
        };

        int Raw(int node) => searched ? part[node] : Array.BinarySearch(area, componentOf[node]);

        int OfEnd(int node) => Array.BinarySearch(area, componentOf[node]) < 0 ? CaseParts.Elsewhere
            : gone.Contains(node) ? CaseParts.Lost : Root(after, Raw(node));
    }

    // Parts without the lost links, before any is added: their sizes and the places of their components in the area.
    private List<(int Size, int Place)> Search(PlannedCase planned, int[] area, out bool searched)
    {
        lost.Clear();
        foreach (LinkChange link in planned.Links)
        {
            if (link.After == 0)
            {
                lost.Add((link.U, link.V));
                marked[link.U] = marked[link.V] = true;
            }
        }
        searched = lost.Count > 0;
        if (!searched)
            return [.. area.Select((c, place) => (network.Components[c].Nodes, place))];
        List<(int, int)> found = [];
        for (int place = 0; place < area.Length; place++)
        {
            Component range = network.Components[area[place]];
            part.AsSpan(range.Start, range.Nodes).Fill(-1);
            for (int root = range.Start; root < range.End; root++)
            {
                if (part[root] < 0)
                    found.Add((Flood(root, found.Count), place));
            }
        }
        foreach ((int u, int v) in lost)
            marked[u] = marked[v] = false;
        return found;
    }

    private int Flood(int root, int number)
    {
        int[] neighbours = network.Neighbours;
        long[] rowStart = network.RowStart;
        int head = 0, tail = 0;
        part[root] = number;
        queue[tail++] = root;
        while (head < tail)
        {
            int u = queue[head++];
            for (long k = rowStart[u]; k < rowStart[u + 1]; k++)
            {
                int v = neighbours[k];
                if (part[v] >= 0 || (marked[u] && marked[v] && lost.Contains((Math.Min(u, v), Math.Max(u, v)))))
                    continue;
                part[v] = number;
                queue[tail++] = v;
            }
        }
        return tail;
    }

    // The largest part with nodes of the largest component; of equal ones that with the smallest label.
    private int Largest(int[] size, bool[] counts, int[] area, int[] after, bool searched)
    {
        int most = 0;
        for (int p = 0; p < size.Length; p++)
            most = counts[p] ? Math.Max(most, size[p]) : most;
        int[] equal = [.. Enumerable.Range(0, size.Length).Where(p => counts[p] && size[p] == most)];
        if (most == 0 || equal.Length == 1 || !searched)
            return most == 0 ? -1 : equal[0];
        int smallest = -1;
        Component range = network.Components[area[0]];
        for (int u = range.Start; u < range.End; u++)
        {
            if (Array.BinarySearch(equal, Root(after, part[u])) >= 0 && (smallest < 0 || network.Labels.Compare(u, smallest) < 0))
                smallest = u;
        }
        return Root(after, part[smallest]);
    }

    private (int[] Listed, bool AreIn) List(int[] area, int[] held, Func<int, bool> isIn)
    {
        long into = 0, all = 0;
        for (int i = 0; i < area.Length; i++)
        {
            if (!IsPartial(i))
                continue;
            into += held[i];
            all += network.Components[area[i]].Nodes;
        }
        bool areIn = 2 * into < all;
        List<int> listed = [];
        for (int i = 0; i < area.Length; i++)
        {
            Component range = network.Components[area[i]];
            for (int u = range.Start; u < range.End && IsPartial(i); u++)
            {
                if (isIn(u) == areIn)
                    listed.Add(u);
            }
        }
        return ([.. listed], areIn);

        bool IsPartial(int place) => held[place] > 0 && held[place] < network.Components[area[place]].Nodes;
    }

    private static int[] Singles(int count) => [.. Enumerable.Range(0, count)];

    private static int Root(int[] parent, int p)
    {
        while (parent[p] != p)
            p = parent[p] = parent[parent[p]];
        return p;
    }

    // The smaller number is the root, so that roots do not depend on the order of joining.
    private static bool Join(int[] parent, int one, int other)
    {
        (one, other) = (Root(parent, one), Root(parent, other));
        parent[Math.Max(one, other)] = Math.Min(one, other);
        return one != other;
    }
}
