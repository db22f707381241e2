// Elimination one node at a time, the least degree first: for what is left where hardly any nodes are independent.
// Invariant: parallel links may stand in the lists; they are merged when a node is gathered, and degrees count them all.

namespace ScaleResist.Solving;

/// <summary>Eliminates all that is left of a graph.</summary>
internal static class DegreeElimination
{
    /// <summary>Eliminates all nodes that are alive into columns; the last is grounded.</summary>
    /// <param name="graph">Read only.</param>
    /// <param name="columns">Grow by the nodes that were left.</param>
    /// <param name="samples">An entry.</param>
    /// <param name="seed">Of the draws.</param>
    public static void Run(RemainingGraph graph, FactorColumns columns, int samples, ulong seed)
    {
        int[] nodes = graph.Nodes.ToArray();
        int n = nodes.Length;
        int[] degrees = [.. nodes.Select(graph.Degree)];
        FillLinks fill = new(n, degrees.Sum(degree => (long)degree));
        DegreeQueue queue = new(degrees);
        StarSample star = new(samples, seed);
        SampledLink[] links = [];
        bool[] gone = new bool[n];
        int[] position = new int[n]; // 1 + place among the gathered neighbours
        for (int i = 0; i < n; i++)
        {
            int v = queue.TakeLeast();
            gone[v] = true;
            star.Clear();
            foreach (Arc arc in graph.Row(nodes[v]))
                Gather(Array.BinarySearch(nodes, arc.To), arc.Weight);
            for (int link = fill.First(v); link >= 0; link = fill.Next(link))
                Gather(fill.To(link), fill.Weight(link));
            for (int k = 0; k < star.Count; k++)
            {
                position[star.Nodes[k]] = 0;
                star.Nodes[k] = nodes[star.Nodes[k]];
            }
            int place = columns.Open(nodes[v], star.Count), count = StarSample.LinkCount(star.Count, samples);
            columns.Inverse[place] = star.Eliminate(nodes[v], columns.Column(place));
            if (links.Length < count)
                links = new SampledLink[2 * count];
            star.Sample(links);
            foreach (SampledLink link in links.AsSpan(0, count))
            {
                if (!(link.Weight > 0))
                    continue;
                int a = Array.BinarySearch(nodes, link.A), b = Array.BinarySearch(nodes, link.B);
                fill.Add(a, b, link.Weight);
                queue.Change(a, 1);
                queue.Change(b, 1);
            }
        }

        void Gather(int node, double weight)
        {
            if (gone[node])
                return;
            queue.Change(node, -1);
            if (position[node] > 0)
            {
                star.Weights[position[node] - 1] += weight;
                return;
            }
            star.Add(node, weight);
            position[node] = star.Count;
        }
    }
}
