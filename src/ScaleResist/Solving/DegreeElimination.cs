// Elimination one node at a time, the least degree first: for what is left when little of the graph is independent any more.
// Invariant: parallel links may stand in the lists; they are merged when a node is gathered, and degrees count them all.

namespace ScaleResist.Solving;

/// <summary>Eliminates all of a remaining graph.</summary>
internal static class DegreeElimination
{
    public static void Run(RemainingGraph graph, FactorColumns columns, int samples, ulong seed)
    {
        int n = graph.Count;
        int[] nodes = graph.Nodes.ToArray(), degrees = new int[n];
        for (int i = 0; i < n; i++)
            degrees[i] = graph.Degree(nodes[i]);
        FillLinks fill = new(n, degrees.Sum(d => (long)d));
        bool[] gone = new bool[n];
        int[] position = new int[n]; // 1 + place among the gathered neighbours
        DegreeQueue queue = new(degrees);
        StarSample star = new(samples, seed);
        for (int step = 0; step < n; step++)
        {
            int v = queue.TakeLeast();
            gone[v] = true;
            int count = 0;
            foreach (Arc arc in graph.Row(nodes[v]))
                Put(nodes.AsSpan().BinarySearch(arc.To), arc.Conductance);
            for (int link = fill.First(v); link >= 0; link = fill.Next(link))
                Put(fill.To(link), fill.Weight(link));
            for (int i = 0; i < count; i++)
                position[star.Nodes[i]] = 0;

            double d = star.Begin(nodes[v], count);
            int place = columns.Open(nodes[v], count);
            columns.MakeRoom();
            columns.Inverse[place] = d > 0 ? (float)(1 / d) : 0;
            Span<Arc> column = columns.Column(place);
            for (int i = 0; i < count; i++)
                column[i] = new Arc(nodes[star.Nodes[i]], (float)(star.Weights[i] / d));
            for (int i = 0; i + 1 < count; i++)
            {
                double c = star.Conductance(i, d);
                if (!(c > 0))
                    continue;
                for (int s = 0; s < samples; s++)
                {
                    int j = star.Draw(i, count);
                    fill.Add(star.Nodes[i], star.Nodes[j], c);
                    queue.Change(star.Nodes[i], 1);
                    queue.Change(star.Nodes[j], 1);
                }
            }

            void Put(int node, double weight)
            {
                if (gone[node])
                    return;
                queue.Change(node, -1);
                if (position[node] > 0)
                {
                    star.Weights[position[node] - 1] += weight;
                    return;
                }
                star.Ensure(count + 1);
                star.Nodes[count] = node;
                star.Weights[count++] = weight;
                position[node] = count;
            }
        }
    }
}
