// Minimum degree on a quotient graph (Amestoy, Davis & Duff, SIAM J. Matrix Anal. Appl. 17:886, 1996): eliminated nodes become elements,
// the cliques that they leave are never written out.
// Invariant: a variable's list holds its elements, then the variables that no element joins it to; an element's list holds its variables.
// Lists live in one array; a list only shrinks in place, and a new element takes no more room than what it absorbs.
//
// The pivot p is of least approximate degree. Its element is L_p = (A_p + all L_e of its elements) - p, and those elements end in p. For
// i in L_p the external degree is bounded by |L_p - i| + sum over other elements of |L_e - L_p| + |A_i - L_p|; a first sweep finds the
// |L_e - L_p|. An element within L_p ends in p too. A variable joined to p alone is eliminated with it; variables with equal lists are one.

namespace ScaleResist.Solving;

/// <summary>One run of minimum degree. Work and memory are near-linear in the arcs on graphs whose factor is sparse.</summary>
internal sealed class MinimumDegree
{
    private readonly int free; // the nodes from here on are never eliminated
    private readonly int count;
    private int[] list;
    private int listEnd;
    private readonly int[] start;
    private readonly int[] length;
    private readonly int[] elements; // elements at the front of a variable's list
    private readonly int[] size; // nodes in a variable; 0: an element or gone; negative while in the pivot's element
    private readonly int[] degree; // of a variable: approximate and external; of an element: nodes in its list
    private readonly int[] mark; // of an element: 0 when absorbed, else below stamp, or stamp + |L_e - L_p|
    private int stamp = 1;
    private readonly int[] head; // of the list of variables of each degree, -1: none
    private readonly int[] next;
    private readonly int[] previous;
    private readonly int[] hashHead;
    private readonly int[] hashNext;
    private readonly int[] hash;
    private readonly int[] nextMember; // nodes of a variable, a chain
    private readonly int[] lastMember;
    private int least;
    private int remaining;
    private ColumnCosts costs;
    private long work; // list entries read

    private MinimumDegree(OrderGraph graph, int free)
    {
        count = graph.Count;
        this.free = free;
        remaining = count;
        int arcs = graph.Neighbours.Length;
        list = new int[(int)Math.Min(arcs + (arcs / 4L) + count + 1, Array.MaxLength)];
        graph.Neighbours.CopyTo(list, 0);
        listEnd = arcs;
        start = new int[count];
        length = new int[count];
        elements = new int[count];
        size = new int[count];
        degree = new int[count];
        mark = new int[count];
        head = new int[count + 1];
        next = new int[count];
        previous = new int[count];
        hashHead = new int[count];
        hashNext = new int[count];
        hash = new int[count];
        nextMember = new int[count];
        lastMember = new int[count];
        Array.Fill(size, 1);
        Array.Fill(head, -1);
        Array.Fill(hashHead, -1);
        Array.Fill(nextMember, -1);
        for (int i = count - 1; i >= 0; i--)
        {
            start[i] = graph.Start[i];
            length[i] = degree[i] = graph.Degree(i);
            lastMember[i] = i;
            if (i < free)
                Enlist(i);
        }
    }

    /// <summary>
    /// The first <paramref name="free"/> nodes in the order of elimination, or null where the factor is sure to exceed the limits, or
    /// the search reads more than a factor within them would be worth. The others stay, and count in degrees and costs; links among
    /// them do not matter.
    /// </summary>
    /// <param name="graph">n nodes.</param>
    /// <param name="free">Nodes to eliminate.</param>
    /// <param name="limits">Bounds on the columns of the nodes eliminated.</param>
    /// <param name="costs">Exact costs of the columns eliminated.</param>
    /// <param name="cancel">Looked at every few thousand pivots.</param>
    public static int[]? Order(OrderGraph graph, int free, OrderLimits limits, out ColumnCosts costs, CancellationToken cancel)
    {
        MinimumDegree run = new(graph, free);
        int[]? order = run.Run(limits, cancel);
        costs = run.costs;
        return order;
    }

    private int[]? Run(OrderLimits limits, CancellationToken cancel)
    {
        int[] order = new int[free];
        int ordered = 0;
        long mostWork = limits.Entries == long.MaxValue ? long.MaxValue : (limits.Entries / 2) + (4L * list.Length);
        for (int pivots = 0; ordered < free; pivots++)
        {
            if ((pivots & 4095) == 0)
                cancel.ThrowIfCancellationRequested();
            int p = TakeLeast();
            int taken = Eliminate(p);
            costs.Add(taken, degree[p]);
            if (costs.Exceed(limits, remaining, degree[p]) || work > mostWork)
                return null;
            for (int member = p; member >= 0; member = nextMember[member])
                order[ordered++] = member;
        }
        return order;
    }

    private int TakeLeast()
    {
        while (head[least] < 0)
            least++;
        int p = head[least];
        Delist(p);
        return p;
    }

    private void Enlist(int i)
    {
        int d = degree[i];
        int first = head[d];
        next[i] = first;
        previous[i] = -1;
        if (first >= 0)
            previous[first] = i;
        head[d] = i;
        if (d < least)
            least = d;
    }

    private void Delist(int i)
    {
        if (i >= free)
            return;
        if (next[i] >= 0)
            previous[next[i]] = previous[i];
        if (previous[i] >= 0)
            next[previous[i]] = next[i];
        else
            head[degree[i]] = next[i];
    }

    // Eliminates p and whatever goes with it; returns how many nodes, and leaves |L_p| in degree[p].
    private int Eliminate(int p)
    {
        int taken = size[p];
        remaining -= taken;
        BuildElement(p);
        int largest = MeasureOverlaps(p);
        int more = UpdateLists(p);
        stamp += largest + 1;
        remaining -= more;
        MergeEqual(p);
        Finish(p);
        return taken + more;
    }

    // L_p: each variable once, sizes turned negative to say so.
    private void BuildElement(int p)
    {
        int bound = length[p] - elements[p];
        for (int k = 0; k < elements[p]; k++)
            bound = Math.Min(bound + length[list[start[p] + k]], count);
        if (elements[p] > 0)
            MakeRoom(bound);
        size[p] = 0;
        int from = elements[p] == 0 ? start[p] : listEnd; // without elements the list shrinks where it stands
        int write = from, nodes = 0;
        for (int k = 0; k < elements[p]; k++)
        {
            int e = list[start[p] + k];
            Take(start[e], length[e]);
            mark[e] = 0;
        }
        Take(start[p] + elements[p], length[p] - elements[p]);
        start[p] = from;
        length[p] = write - from;
        elements[p] = 0;
        degree[p] = nodes;
        listEnd = Math.Max(listEnd, write);

        void Take(int first, int many)
        {
            for (int k = first; k < first + many; k++)
            {
                int i = list[k];
                if (size[i] <= 0)
                    continue;
                nodes += size[i];
                size[i] = -size[i];
                list[write++] = i;
                Delist(i);
            }
        }
    }

    // mark[e] - stamp = |L_e - L_p| for all elements that touch L_p; returns the largest |L_e|.
    private int MeasureOverlaps(int p)
    {
        int largest = 0;
        if (stamp > int.MaxValue - (4 * (long)count) - 4)
        {
            for (int e = 0; e < count; e++)
                mark[e] = Math.Min(mark[e], 1);
            stamp = 2;
        }
        for (int k = start[p]; k < start[p] + length[p]; k++)
        {
            int i = list[k];
            int nodes = -size[i];
            for (int at = start[i]; at < start[i] + elements[i]; at++)
            {
                int e = list[at];
                if (mark[e] >= stamp)
                    mark[e] -= nodes;
                else if (mark[e] != 0)
                {
                    mark[e] = degree[e] + stamp - nodes;
                    largest = Math.Max(largest, degree[e]);
                }
            }
        }
        return largest;
    }

    // Drops from the lists of L_p what p covers now, puts p in front, and bounds the degrees (without |L_p - i|, which is not settled yet).
    private int UpdateLists(int p)
    {
        int more = 0;
        for (int k = start[p]; k < start[p] + length[p]; k++)
        {
            int i = list[k];
            int first = start[i], write = first, outside = 0;
            uint sum = 0;
            work += length[i];
            int variables = first + elements[i], end = first + length[i];
            for (int at = first; at < variables; at++)
            {
                int e = list[at];
                if (mark[e] == 0)
                    continue;
                int rest = mark[e] - stamp;
                if (rest == 0)
                {
                    mark[e] = 0;
                    continue;
                }
                outside += rest;
                sum += (uint)e;
                list[write++] = e;
            }
            int firstVariable = write;
            for (int at = variables; at < end; at++)
            {
                int j = list[at];
                if (size[j] <= 0)
                    continue;
                outside += size[j];
                sum += (uint)j;
                list[write++] = j;
            }
            if (outside == 0 && i < free)
            {
                int nodes = -size[i];
                size[i] = 0;
                length[i] = 0;
                degree[p] -= nodes;
                more += nodes;
                Append(p, i);
                continue;
            }
            // p goes to the front, the first element to the place of the first variable, that variable to the end.
            list[write] = list[firstVariable];
            list[firstVariable] = list[first];
            list[first] = p;
            elements[i] = firstVariable - first + 1;
            length[i] = write - first + 1;
            if (i >= free)
                continue;
            degree[i] = Math.Min(degree[i], outside);
            int bucket = (int)(sum % (uint)count);
            hash[i] = bucket;
            hashNext[i] = hashHead[bucket];
            hashHead[bucket] = i;
        }
        return more;
    }

    // Variables of L_p with the same lists become one.
    private void MergeEqual(int p)
    {
        for (int k = start[p]; k < start[p] + length[p]; k++)
        {
            int member = list[k];
            if (size[member] == 0 || member >= free)
                continue;
            int bucket = hash[member];
            int i = hashHead[bucket];
            hashHead[bucket] = -1;
            for (; i >= 0 && hashNext[i] >= 0; i = hashNext[i])
            {
                stamp++;
                for (int at = start[i] + 1; at < start[i] + length[i]; at++)
                    mark[list[at]] = stamp;
                int before = i;
                for (int j = hashNext[i]; j >= 0; j = hashNext[j])
                {
                    if (!SameLists(i, j))
                    {
                        before = j;
                        continue;
                    }
                    size[i] += size[j];
                    size[j] = 0;
                    length[j] = 0;
                    Append(i, j);
                    hashNext[before] = hashNext[j];
                }
            }
        }
        stamp++;
    }

    private bool SameLists(int i, int j)
    {
        if (length[i] != length[j] || elements[i] != elements[j])
            return false;
        for (int at = start[j] + 1; at < start[j] + length[j]; at++)
        {
            if (mark[list[at]] != stamp)
                return false;
        }
        return true;
    }

    // What is left of L_p gets its degrees and goes back into the queue; p is an element from now on.
    private void Finish(int p)
    {
        int write = start[p], end = write + length[p];
        bool last = end == listEnd;
        for (int k = start[p]; k < end; k++)
        {
            int i = list[k];
            if (size[i] == 0)
                continue;
            size[i] = -size[i];
            list[write++] = i;
            if (i >= free)
                continue;
            degree[i] = Math.Min(degree[i] + degree[p], remaining) - size[i];
            Enlist(i);
        }
        length[p] = write - start[p];
        mark[p] = length[p] == 0 ? 0 : 1;
        if (last)
            listEnd = write;
    }

    private void Append(int i, int j)
    {
        nextMember[lastMember[i]] = j;
        lastMember[i] = lastMember[j];
    }

    private void MakeRoom(int entries)
    {
        if ((long)listEnd + entries <= list.Length)
            return;
        CollectGarbage();
        if ((long)listEnd + entries > list.Length)
            Array.Resize(ref list, checked(listEnd + entries + (listEnd / 4)));
    }

    // The first entry of every list in use gives way to its owner, so that one sweep finds the lists in the order of memory.
    private void CollectGarbage()
    {
        for (int i = 0; i < count; i++)
        {
            if (length[i] > 0 && (size[i] > 0 || mark[i] != 0))
                (start[i], list[start[i]]) = (list[start[i]], ~i);
        }
        int end = listEnd;
        listEnd = 0;
        for (int k = 0; k < end;)
        {
            if (list[k] >= 0)
            {
                k++;
                continue;
            }
            int owner = ~list[k];
            int from = k, to = listEnd;
            list[k] = start[owner];
            start[owner] = to;
            listEnd += length[owner];
            k += length[owner];
            if (from != to)
                Array.Copy(list, from, list, to, length[owner]);
        }
    }
}
