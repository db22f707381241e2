// Eccentricities of all nodes from few searches. Invariant: for every node the lower bound is the distance to a known node, or one that a
// search implies, and a node is settled only when no node is farther than its lower bound; results do not depend on threads.

using ScaleResist.Graphs;

namespace ScaleResist.Distances;

/// <summary>
/// e(u) = max over the component of d(u,v), with a node that attains it. From a search at x, with d(u,x) = d(x,u) + w_x - w_u,
///
///     e(u) >= d(u,x),     e(u) >= e(x) - d(x,u),     e(u) &lt;= d(u,x) + e(x)      (Takes &amp; Kosters, Algorithms 6:100, 2013)
///
/// and sharper: let S be all nodes searched so far and r(x) the largest d(x,v) over v outside S. As d(u,v) is known for v in S and is at most
/// d(u,x) + r(x) for all others, u is settled once d(u,x) + r(x) does not exceed its lower bound (as farthest-first orders do: Li, Qiao, Qin
/// et al., ICDE 2018). r(x) falls while the farthest nodes are searched, so references near one another serve all that lies between them.
/// Each round searches two nodes: the one that holds back the largest number of open nodes, and the end of the walk from the node of the
/// widest gap along falling lower bounds, on which all nodes whose farthest route leads through it depend (a certificate in the sense of Dragan, Habib &amp;
/// Viennot, 2018).
/// </summary>
public sealed class Eccentricities
{
    private const int PerRound = 2;
    private const double Rounding = 1.0 / (1L << 40); // of sums that are no whole numbers, relative to the largest distance
    private const int RoundsBeforeBatches = 100;
    private const int FewNodes = 4096; // below, threads cost more than they bring
    private readonly DistanceCosts costs;
    private readonly bool[] searched;
    private readonly double[] toReference; // d(u,x) of the reference x with the least d(u,x) + r(x)
    private readonly int[] reference;
    private readonly int[] votes;
    private readonly List<FarthestNodes> references = [];
    private int[] open = [];
    private int openCount;
    private double slack;

    private Eccentricities(DistanceCosts costs)
    {
        this.costs = costs;
        int n = costs.Network.NodeCount;
        Values = new double[n];
        Farthest = new int[n];
        searched = new bool[n];
        toReference = new double[n];
        reference = new int[n];
        votes = new int[n];
    }

    /// <summary>e(u) of every node, n values; until a node is settled, its lower bound.</summary>
    public double[] Values { get; }

    /// <summary>A node at distance e(u) from u, n values; u itself where no other is farther than 0.</summary>
    public int[] Farthest { get; }

    /// <summary>How many single-source searches it took.</summary>
    public long Searches { get; private set; }

    /// <summary>Finds the eccentricities of all nodes.</summary>
    /// <param name="costs">What is measured.</param>
    /// <param name="threads">Threads; two at most are of use.</param>
    /// <param name="settled">Told the number of nodes settled so far.</param>
    /// <param name="cancel">Ends it early.</param>
    public static Eccentricities Of(DistanceCosts costs, int threads, Action<double>? settled, CancellationToken cancel)
    {
        Eccentricities result = new(costs);
        DistanceSearch[] searches = new DistanceSearch[PerRound];
        for (int i = 0; i < PerRound; i++)
            searches[i] = DistanceSearch.For(costs);
        foreach (Component component in costs.Network.Components)
            result.Settle(component, searches, component.Nodes < FewNodes ? 1 : threads, settled, cancel);
        return result;
    }

    /// <summary>e(u) of given nodes, with a node that attains it: one search each.</summary>
    public static (double Value, int Farthest)[] OfSources(
        DistanceCosts costs, IReadOnlyList<int> sources, int threads, CancellationToken cancel)
    {
        (double, int)[] found = new (double, int)[sources.Count];
        Parallel.For(0, sources.Count, new ParallelOptions { MaxDegreeOfParallelism = threads, CancellationToken = cancel },
            () => DistanceSearch.For(costs), (i, _, search) =>
            {
                found[i] = Largest(search.Distances, search.Search(sources[i]), sources[i]);
                return search;
            }, _ => { });
        return found;
    }

    // The first node at the largest distance; the source itself where that is 0.
    private static (double Value, int Node) Largest(double[] distances, Component component, int source)
    {
        (double Value, int Node) found = (0, source);
        for (int v = component.Start; v < component.End; v++)
        {
            if (distances[v] > found.Value)
                found = (distances[v], v);
        }
        return found;
    }

    private void Settle(
        Component component, DistanceSearch[] searches, int threads, Action<double>? settled, CancellationToken cancel)
    {
        references.Clear();
        openCount = component.Nodes;
        open = openCount > open.Length ? new int[openCount] : open;
        int hub = component.Start;
        for (int u = component.Start; u < component.End; u++)
        {
            open[u - component.Start] = u;
            Farthest[u] = u;
            toReference[u] = double.PositiveInfinity;
            reference[u] = -1;
            if (costs.Network.Degree(u) > costs.Network.Degree(hub))
                hub = u;
        }
        slack = 0;
        Span<int> sources = stackalloc int[PerRound];
        sources[0] = hub;
        int count = 1;
        for (int round = 0; openCount > 0; round++)
        {
            if (round == RoundsBeforeBatches && searches[0] is HopSearch hops && component.Nodes >= FewNodes
                && HopBatch.Serves(costs, component, openCount))
            {
                SettleByBatches(component, hops, threads, settled, cancel);
                return;
            }
            cancel.ThrowIfCancellationRequested();
            int[] chosen = sources[..count].ToArray();
            Parallel.For(0, count, new ParallelOptions { MaxDegreeOfParallelism = threads }, i => searches[i].Search(chosen[i]));
            Searches += count;
            foreach (int source in chosen)
                searched[source] = true;
            for (int i = 0; i < count; i++)
                Absorb(chosen[i], searches[i].Distances, component, threads);
            foreach (FarthestNodes nodes in references)
                nodes.Advance(searched);
            Close();
            settled?.Invoke(component.End - openCount);
            count = openCount == 0 ? 0 : Choose(sources);
        }
    }

    // What a search says about every open node.
    private void Absorb(int x, double[] distances, Component component, int threads)
    {
        (double largest, int far) = Largest(distances, component, x);
        (Values[x], Farthest[x]) = (largest, far);
        if (!costs.AreWhole)
            slack = Math.Max(slack, largest * Rounding);
        int id = references.Count;
        FarthestNodes nodes = FarthestNodes.Of(distances, component, largest, searched);
        references.Add(nodes);
        double weight = costs.Weight(x), reach = nodes.Reach;
        int parts = threads == 1 ? 1 : 2 * threads, length = (openCount + parts - 1) / parts;
        Parallel.For(0, parts, new ParallelOptions { MaxDegreeOfParallelism = threads }, part =>
        {
            int end = Math.Min(openCount, (part + 1) * length);
            for (int i = part * length; i < end; i++)
            {
                int u = open[i];
                double from = distances[u], to = from + weight - costs.Weight(u);
                if (to > Values[u])
                    (Values[u], Farthest[u]) = (to, x);
                if (largest - from > Values[u])
                    (Values[u], Farthest[u]) = (largest - from, far);
                int known = reference[u];
                if (known < 0 || to + reach < toReference[u] + references[known].Reach)
                    (toReference[u], reference[u]) = (to, id);
            }
        });
    }

    // Where routes are short, open nodes are many and each search settles few: 512 at a time then, half of them from either end of the order.
    // An upper bound from all nodes of one eccentricity is one search from the set of them.
    private void SettleByBatches(Component component, HopSearch hops, int threads, Action<double>? settled, CancellationToken cancel)
    {
        int wave = PerRound, first = component.Start;
        double step = costs.Weight(0);
        double[] upper = new double[component.Nodes];
        Array.Fill(upper, double.PositiveInfinity);
        HopBatch[] batches = new HopBatch[wave];
        try
        {
            for (int i = 0; i < wave; i++)
                batches[i] = new HopBatch(costs.Network);
            while (true)
            {
                foreach (IGrouping<double, int> ring in Enumerable.Range(first, component.Nodes).Where(u => searched[u]).GroupBy(u => Values[u]))
                {
                    hops.SearchFrom([.. ring], component);
                    for (int i = 0; i < openCount; i++)
                        upper[open[i] - first] = Math.Min(upper[open[i] - first], hops.Distances[open[i]] + ring.Key);
                }
                int kept = 0;
                for (int i = 0; i < openCount; i++)
                {
                    if (!searched[open[i]] && upper[open[i] - first] > Values[open[i]] + slack)
                        open[kept++] = open[i];
                }
                openCount = kept;
                settled?.Invoke(component.End - openCount);
                if (openCount == 0)
                    return;
                int[][] sources = new int[wave][];
                int front = 0, back = openCount;
                for (int i = 0; i < wave; i++)
                {
                    int half = Math.Min(HopBatch.Lanes / 2, back - front);
                    int other = Math.Min(HopBatch.Lanes / 2, back - front - half);
                    sources[i] = [.. open[front..(front + half)], .. open[(back - other)..back]];
                    (front, back) = (front + half, back - other);
                }
                Parallel.For(0, wave, new ParallelOptions { MaxDegreeOfParallelism = threads, CancellationToken = cancel }, i =>
                {
                    if (sources[i].Length > 0)
                        batches[i].Search(sources[i], component, count: false);
                });
                for (int i = 0; i < wave; i++)
                    Absorb(sources[i], batches[i], first, step);
            }
        }
        finally
        {
            foreach (HopBatch batch in batches)
                batch?.Dispose();
        }
    }

    private void Absorb(int[] sources, HopBatch batch, int first, double step)
    {
        if (sources.Length == 0)
            return;
        Searches += sources.Length;
        for (int i = 0; i < openCount; i++)
        {
            int u = open[i];
            double distance = batch.LastLevel[u - first] * step;
            if (distance > Values[u])
                (Values[u], Farthest[u]) = (distance, sources[batch.LastLane[u - first]]);
        }
        for (int lane = 0; lane < sources.Length; lane++)
        {
            searched[sources[lane]] = true;
            (Values[sources[lane]], Farthest[sources[lane]]) = (batch.Reach[lane] * step, batch.FarthestOf[lane]);
        }
    }

    // Takes out what is settled; the others keep their order.
    private void Close()
    {
        int kept = 0;
        for (int i = 0; i < openCount; i++)
        {
            int u = open[i];
            if (!searched[u] && toReference[u] + references[reference[u]].Reach > Values[u] + slack)
                open[kept++] = u;
        }
        openCount = kept;
    }

    private int Choose(Span<int> sources)
    {
        // The node that holds back most, and the node of the widest gap.
        Span<int> byReference = references.Count <= 4096 ? stackalloc int[references.Count] : new int[references.Count];
        byReference.Clear();
        int widest = open[0];
        double gap = -1;
        for (int i = 0; i < openCount; i++)
        {
            int u = open[i];
            byReference[reference[u]]++;
            double width = toReference[u] + references[reference[u]].Reach - Values[u];
            if (width > gap)
                (gap, widest) = (width, u);
        }
        for (int r = 0; r < byReference.Length; r++)
        {
            if (references[r].Target is int target and >= 0)
                votes[target] += byReference[r];
        }
        int most = -1;
        for (int r = 0; r < byReference.Length; r++)
        {
            if (references[r].Target is int target and >= 0 && votes[target] > 0
                && (most < 0 || votes[target] > votes[most] || (votes[target] == votes[most] && target < most)))
            {
                most = target;
            }
        }
        for (int r = 0; r < byReference.Length; r++)
        {
            if (references[r].Target is int target and >= 0)
                votes[target] = 0;
        }
        int walked = Walk(widest);
        int count = 0;
        if (most >= 0)
            sources[count++] = most;
        if (walked != most)
            sources[count++] = walked;
        return count;
    }

    // Along the route to the farthest node, as long as the nodes on it are open and their bounds agree with it.
    private int Walk(int u)
    {
        Network network = costs.Network;
        while (true)
        {
            int next = -1;
            for (long k = network.RowStart[u]; k < network.RowStart[u + 1] && next < 0; k++)
            {
                int v = network.Neighbours[k];
                if (!searched[v] && Values[v] < Values[u]
                    && Math.Abs(Values[v] + costs.Weight(v) + costs.Length(k) - Values[u]) <= slack
                    && toReference[v] + references[reference[v]].Reach > Values[v] + slack)
                {
                    next = v;
                }
            }
            if (next < 0)
                return u;
            u = next;
        }
    }
}
