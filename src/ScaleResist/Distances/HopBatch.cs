// Breadth first from 512 nodes at once: a node's row is one cache line with a bit a source (Then et al., PVLDB 8:449, 2014), pulled level by level.
// Invariant: after level k, bit j of a row is set exactly if the node is within k steps of source j. Its scalar twin is HopSearch.

using System.Numerics;
using System.Runtime.Intrinsics;
using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Distances;

/// <summary>Steps from up to 512 sources of one component, on one thread. O(levels (n + m)); 128 bytes a node.</summary>
internal sealed unsafe class HopBatch : IDisposable
{
    /// <summary>The most sources of a batch.</summary>
    public const int Lanes = 512;

    /// <summary>The most levels for which pulling from all nodes pays.</summary>
    public const int MostLevels = 64;

    /// <summary>The most nodes of a batch: 136 bytes each, once a thread.</summary>
    public const int MostNodes = 1 << 22;

    private const int FewestSources = 64;
    private readonly Network network;
    private readonly LaneCounts counts = new();
    private readonly ulong[] touched; // bits: rows that are not empty
    private Panel<ulong> before;
    private Panel<ulong> after;

    public HopBatch(Network network)
    {
        this.network = network;
        int largest = network.Components[0].Nodes;
        before = new Panel<ulong>(largest);
        after = new Panel<ulong>(largest);
        touched = new ulong[(largest + 63) / 64];
        LastLevel = new int[largest];
        LastLane = new short[largest];
    }

    /// <summary>Whether batches pay: steps are equal, sources many, and routes short as seen from the component's first node.</summary>
    public static bool Serves(DistanceCosts costs, Component component, int sources)
    {
        if (costs.Steps != StepKind.Equal || sources < FewestSources || component.Nodes > MostNodes)
            return false;
        HopSearch search = new(costs);
        search.SearchFrom([component.Start], component);
        double most = MostLevels / 2 * costs.Weight(component.Start);
        for (int v = component.Start; v < component.End; v++)
        {
            if (search.Distances[v] > most)
                return false;
        }
        return true;
    }

    /// <summary>By node of the component, from its first: the largest number of steps from any source.</summary>
    public int[] LastLevel { get; }

    /// <summary>A source at that distance.</summary>
    public short[] LastLane { get; }

    /// <summary>By source: the largest number of steps to any node.</summary>
    public int[] Reach { get; } = new int[Lanes];

    /// <summary>By source: a node that many steps away.</summary>
    public int[] FarthestOf { get; } = new int[Lanes];

    /// <summary>By level and source, where asked for: how many nodes are that many steps away; level 0 is the source.</summary>
    public List<int[]> Counts { get; } = [];

    /// <summary>Searches from the sources, all of one component.</summary>
    public void Search(ReadOnlySpan<int> sources, Component component, bool count)
    {
        int first = component.Start, n = component.Nodes;
        Vector512<ulong> full = Vector512<ulong>.Zero;
        new Span<Vector512<ulong>>(before.Pointer, n).Clear();
        touched.AsSpan(0, (n + 63) / 64).Clear();
        LastLevel.AsSpan(0, n).Clear();
        Array.Clear(Reach);
        Counts.Clear();
        if (count)
            Counts.Add([.. Enumerable.Repeat(1, sources.Length)]);
        for (int lane = 0; lane < sources.Length; lane++)
        {
            int u = sources[lane] - first;
            full = full.WithElement(lane / 64, full.GetElement(lane / 64) | (1UL << lane));
            before.Pointer[(u * 8L) + (lane / 64)] |= 1UL << lane;
            touched[u / 64] |= 1UL << u;
            LastLane[u] = (short)lane;
            FarthestOf[lane] = sources[lane];
        }
        for (int level = 1; ; level++)
        {
            Vector512<ulong> arrived = Pull(component, full, level, count);
            if (arrived == Vector512<ulong>.Zero)
                return;
            for (int lane = 0; lane < sources.Length; lane++)
            {
                if ((arrived.GetElement(lane / 64) >> lane & 1) != 0)
                    Reach[lane] = level;
            }
            FindFarthest(arrived, component, sources.Length);
            if (count)
                Counts.Add(counts.Take(sources.Length));
            (before, after) = (after, before);
            Touch(n);
        }
    }

    private Vector512<ulong> Pull(Component component, Vector512<ulong> full, int level, bool count)
    {
        int first = component.Start;
        Vector512<ulong>* from = (Vector512<ulong>*)before.Pointer, to = (Vector512<ulong>*)after.Pointer;
        Vector512<ulong> arrived = Vector512<ulong>.Zero;
        fixed (int* neighbours = network.Neighbours)
        fixed (ulong* filled = touched)
        {
            for (int v = 0; v < component.Nodes; v++)
            {
                Vector512<ulong> old = from[v], row = old;
                long end = network.RowStart[first + v + 1];
                for (long k = network.RowStart[first + v]; k < end && row != full; k++)
                {
                    int u = neighbours[k] - first;
                    if ((filled[u >> 6] >> u & 1) != 0)
                        row |= from[u];
                }
                to[v] = row;
                Vector512<ulong> fresh = row ^ old;
                if (fresh == Vector512<ulong>.Zero)
                    continue;
                arrived |= fresh;
                LastLevel[v] = level;
                LastLane[v] = (short)Lowest(fresh);
                if (count)
                    counts.Add(fresh);
            }
        }
        return arrived;
    }

    // For every source that arrived anywhere at this level, the first node where it did.
    private void FindFarthest(Vector512<ulong> missing, Component component, int lanes)
    {
        Vector512<ulong>* from = (Vector512<ulong>*)before.Pointer, to = (Vector512<ulong>*)after.Pointer;
        for (int v = 0; v < component.Nodes && missing != Vector512<ulong>.Zero; v++)
        {
            Vector512<ulong> found = (to[v] ^ from[v]) & missing;
            if (found == Vector512<ulong>.Zero)
                continue;
            missing ^= found;
            for (int lane = 0; lane < lanes; lane++)
            {
                if ((found.GetElement(lane / 64) >> lane & 1) != 0)
                    FarthestOf[lane] = component.Start + v;
            }
        }
    }

    private void Touch(int n)
    {
        Vector512<ulong>* rows = (Vector512<ulong>*)before.Pointer;
        for (int v = 0; v < n; v++)
        {
            if (rows[v] != Vector512<ulong>.Zero)
                touched[v / 64] |= 1UL << v;
        }
    }

    private static int Lowest(Vector512<ulong> bits)
    {
        for (int word = 0; word < 8; word++)
        {
            if (bits.GetElement(word) != 0)
                return (word * 64) + BitOperations.TrailingZeroCount(bits.GetElement(word));
        }
        return 0;
    }

    public void Dispose()
    {
        before.Dispose();
        after.Dispose();
    }
}

/// <summary>
/// Counts set bits lane by lane: numbers written vertically, bit i of all counts in plane i. A few low planes are carried through at every
/// step, and into the rest whenever they are full.
/// </summary>
internal sealed class LaneCounts
{
    private const int Low = 4;
    private const int Planes = 31;
    private readonly Vector512<ulong>[] planes = new Vector512<ulong>[Planes];
    private Vector512<ulong> one;
    private Vector512<ulong> two;
    private Vector512<ulong> four;
    private Vector512<ulong> eight;
    private int added;

    /// <summary>Adds a bit to each lane's count.</summary>
    public void Add(Vector512<ulong> bits)
    {
        Vector512<ulong> carry = one & bits;
        one ^= bits;
        Vector512<ulong> more = two & carry;
        two ^= carry;
        carry = four & more;
        four ^= more;
        eight ^= carry; // at most 15 bits are added before the planes are emptied
        if (++added == (1 << Low) - 1)
            Flush();
    }

    /// <summary>The counts of the first lanes; all are 0 from here on.</summary>
    public int[] Take(int lanes)
    {
        Flush();
        int[] counts = new int[lanes];
        for (int i = 0; i < Planes; i++)
        {
            if (planes[i] == Vector512<ulong>.Zero)
                continue;
            for (int lane = 0; lane < lanes; lane++)
                counts[lane] |= (int)(planes[i].GetElement(lane / 64) >> lane & 1) << i;
            planes[i] = Vector512<ulong>.Zero;
        }
        return counts;
    }

    private void Flush()
    {
        Into(one, 0);
        Into(two, 1);
        Into(four, 2);
        Into(eight, 3);
        one = two = four = eight = Vector512<ulong>.Zero;
        added = 0;
    }

    private void Into(Vector512<ulong> carry, int plane)
    {
        for (int i = plane; carry != Vector512<ulong>.Zero; i++)
        {
            Vector512<ulong> sum = planes[i] ^ carry;
            carry &= planes[i];
            planes[i] = sum;
        }
    }
}
