// From rows as read to a clean network: self-loops out, parallel links merged, components found, nodes renumbered for locality.
// Memory: the raw rows (8 bytes each, 16 with weights) and two adjacencies at the peak.

namespace ScaleResist.Graphs;

/// <summary>Builds a <see cref="Network"/> from an <see cref="EdgeList"/>.</summary>
public static class NetworkBuilder
{
    /// <summary>
    /// Cleans and builds. Parallel links add their conductances, of lengths the shortest stays; self-loops drop out, direction is ignored.
    /// O(n + m) time but for the sort of components.
    /// </summary>
    /// <exception cref="InputException">
    /// No link is left after cleaning, or the network has more arcs than one array holds.
    /// </exception>
    public static Network Build(EdgeList list)
    {
        if (2 * list.Links.Count > Array.MaxLength)
        {
            throw new InputException(list.Facts.Path, null,
                $"{list.Links.Count:N0} rows are more than this version holds ({Array.MaxLength / 2:N0})", "split the network");
        }
        Rows raw = GatherRows(list, out long selfLoops);
        if (raw.Neighbours.Length == 0)
        {
            throw new InputException(list.Facts.Path, null, "no link is left after self-loops were dropped",
                "give at least one link between two different nodes");
        }
        NodeOrder order = NodeOrder.BreadthFirst(raw.Start, raw.Neighbours, list.Labels);
        Rows ordered = Renumber(raw, order.NodeAt, order.PlaceOf);
        long before = ordered.Neighbours.Length;
        Rows merged = MergeParallel(ordered, list.AreLengths);
        CleaningFacts cleaning = new(selfLoops, (before - merged.Neighbours.Length) / 2);
        return new Network(
            list.Labels.Reordered(order.NodeAt), merged.Start, merged.Neighbours, list.AreLengths ? null : merged.Weights,
            list.AreLengths ? merged.Weights : null, order.Components, cleaning, list.Facts);
    }

    private static Rows GatherRows(EdgeList list, out long selfLoops)
    {
        int n = list.Labels.Count;
        long[] start = new long[n + 1];
        selfLoops = 0;
        for (int block = 0; block < list.Links.BlockCount; block++)
        {
            foreach ((int u, int v) in list.Links.Block(block))
            {
                if (u == v)
                {
                    selfLoops++;
                    continue;
                }
                start[u]++;
                start[v]++;
            }
        }
        long arcs = ToEnds(start);
        int[] neighbours = new int[arcs];
        double[]? weights = list.Weights is null ? null : new double[arcs];
        for (int block = 0; block < list.Links.BlockCount; block++)
        {
            Span<EndNodes> links = list.Links.Block(block);
            Span<double> given = list.Weights is null ? default : list.Weights.Block(block);
            for (int i = 0; i < links.Length; i++)
            {
                (int u, int v) = links[i];
                if (u == v)
                    continue;
                long atU = --start[u], atV = --start[v];
                neighbours[atU] = v;
                neighbours[atV] = u;
                if (weights is not null)
                    weights[atU] = weights[atV] = given[i];
            }
        }
        return new Rows(start, neighbours, weights);
    }

    // Writing each node into the rows of its neighbours, in the new order, leaves every row sorted without a sort.
    private static Rows Renumber(Rows raw, int[] nodeAt, int[] placeOf)
    {
        int n = nodeAt.Length;
        long[] start = new long[n + 1];
        for (int place = 0; place < n; place++)
            start[place + 1] = start[place] + (raw.Start[nodeAt[place] + 1] - raw.Start[nodeAt[place]]);
        long[] cursor = start.AsSpan(0, n).ToArray();
        int[] neighbours = new int[raw.Neighbours.Length];
        double[]? weights = raw.Weights is null ? null : new double[raw.Neighbours.Length];
        for (int place = 0; place < n; place++)
        {
            int node = nodeAt[place];
            for (long k = raw.Start[node]; k < raw.Start[node + 1]; k++)
            {
                long at = cursor[placeOf[raw.Neighbours[k]]]++;
                neighbours[at] = place;
                if (weights is not null)
                    weights[at] = raw.Weights![k];
            }
        }
        return new Rows(start, neighbours, weights);
    }

    // In place: rows only shrink. Without weights a merged link has conductance 2 or more, so weights appear then.
    private static Rows MergeParallel(Rows rows, bool areLengths)
    {
        int n = rows.Start.Length - 1;
        int[] neighbours = rows.Neighbours;
        if (!HasParallel(rows))
            return rows;
        double[] weights = rows.Weights ?? Ones(neighbours.Length);
        long write = 0;
        long begin = 0;
        for (int u = 0; u < n; u++)
        {
            long end = rows.Start[u + 1];
            rows.Start[u] = write;
            for (long k = begin; k < end; k++)
            {
                if (k > begin && neighbours[k] == neighbours[k - 1])
                {
                    weights[write - 1] = areLengths ? Math.Min(weights[write - 1], weights[k]) : weights[write - 1] + weights[k];
                    continue;
                }
                neighbours[write] = neighbours[k];
                weights[write++] = weights[k];
            }
            begin = end;
        }
        rows.Start[n] = write;
        Array.Resize(ref neighbours, (int)write);
        Array.Resize(ref weights, (int)write);
        return new Rows(rows.Start, neighbours, weights);
    }

    private static bool HasParallel(Rows rows)
    {
        for (int u = 0; u < rows.Start.Length - 1; u++)
        {
            for (long k = rows.Start[u] + 1; k < rows.Start[u + 1]; k++)
            {
                if (rows.Neighbours[k] == rows.Neighbours[k - 1])
                    return true;
            }
        }
        return false;
    }

    private static double[] Ones(int length)
    {
        double[] ones = new double[length];
        Array.Fill(ones, 1);
        return ones;
    }

    // Counts become one-past-the-end offsets; the caller counts each down to its start.
    private static long ToEnds(long[] counts)
    {
        long sum = 0;
        for (int i = 0; i < counts.Length; i++)
        {
            sum += counts[i];
            counts[i] = sum;
        }
        return sum;
    }

    private sealed record Rows(long[] Start, int[] Neighbours, double[]? Weights);
}
