// Elimination in rounds: a round takes nodes of low degree no two of which are linked and eliminates them all (multiple minimum degree, Liu 1985, with
// sampled cliques). Rounds stream through memory where one node at a time by degree would jump, and threads share the nodes of a round.
// Invariant: what a round does depends on the graph and the seed alone, not on the number of threads.

namespace ScaleResist.Solving;

/// <summary>Rounds of elimination, until too little of the graph is independent for another to pay.</summary>
internal static class IndependentRounds
{
    private const int Chunk = 2048;
    private const int LeastNodes = 256;
    private const int WorthOne = 64; // of so many arcs a round must take one out
    private const int MostDegree = 1024;
    public static double Quantile = double.Parse(Environment.GetEnvironmentVariable("Q") ?? "0.5");
    public static double T1, T2, T3, T4;

    /// <summary>Eliminates rounds of nodes from a graph into columns.</summary>
    public static void Run(RemainingGraph graph, FactorColumns columns, int samples, ulong seed, ParallelOptions threads)
    {
        int[] chosen = new int[graph.Count];
        bool[] blocked = new bool[graph.Count];
        SampledLink[] links = [];
        while (graph.Count >= LeastNodes)
        {
            long t0 = System.Diagnostics.Stopwatch.GetTimestamp();
            ReadOnlySpan<int> independent = Choose(graph, chosen, blocked);
            if (independent.Length == 0)
                return;
            int first = columns.Count, count = independent.Length;
            foreach (int v in independent)
                columns.Open(v, graph.Degree(v));
            columns.MakeRoom();
            int linkCount = checked((int)((columns.Start[columns.Count] - columns.Start[first] - count) * samples));
            if (links.Length < linkCount)
                links = GC.AllocateUninitializedArray<SampledLink>(linkCount);
            long t1 = System.Diagnostics.Stopwatch.GetTimestamp();
            Parallel.For(0, (count + Chunk - 1) / Chunk, threads, () => new StarSample(samples, seed), (chunk, _, star) =>
            {
                for (int i = chunk * Chunk; i < Math.Min(count, (chunk + 1) * Chunk); i++)
                {
                    long begin = columns.Start[first + i] - columns.Start[first] - i;
                    int v = chosen[i];
                    Eliminate(star, graph.Row(v), columns, first + i, v, links.AsSpan((int)(begin * samples), (graph.Degree(v) - 1) * samples), samples);
                }
                return star;
            }, _ => { });
            long t2 = System.Diagnostics.Stopwatch.GetTimestamp();
            graph.Replace(independent, links.AsSpan(0, linkCount));
            long t3 = System.Diagnostics.Stopwatch.GetTimestamp();
            T1 += t1 - t0; T2 += t2 - t1; T3 += t3 - t2;
            T4 ++;
        }
    }

    private static void Eliminate(StarSample star, ReadOnlySpan<Arc> row, FactorColumns columns, int place, int node, Span<SampledLink> links, int samples)
    {
        int count = row.Length;
        star.Ensure(count);
        (int[] nodes, double[] weights) = (star.Nodes, star.Weights);
        for (int i = 0; i < count; i++)
        {
            nodes[i] = row[i].To;
            weights[i] = row[i].Conductance;
        }
        double d = star.Begin(node, count), inverse = 1 / d;
        columns.Inverse[place] = (float)inverse;
        Span<Arc> column = columns.Column(place);
        for (int i = 0; i < count; i++)
            column[i] = new Arc(nodes[i], (float)(weights[i] * inverse));
        for (int i = 0, link = 0; i + 1 < count; i++)
        {
            float c = (float)star.Conductance(i, d);
            for (int s = 0; s < samples; s++)
                links[link++] = new SampledLink(nodes[i], nodes[star.Draw(i, count)], c);
        }
    }

    // Nodes in order, each of low degree that has no chosen neighbour yet; none where that would not pay.
    private static ReadOnlySpan<int> Choose(RemainingGraph graph, int[] chosen, bool[] blocked)
    {
        int most = Threshold(graph);
        long arcs = 0, going = 0;
        int count = 0;
        foreach (int v in graph.Nodes)
            blocked[v] = false;
        foreach (int v in graph.Nodes)
        {
            int degree = graph.Degree(v);
            arcs += degree;
            if (blocked[v] || degree > most || degree == 0)
                continue;
            chosen[count++] = v;
            going += degree;
            foreach (Arc arc in graph.Row(v))
                blocked[arc.To] = true;
        }
        return going * WorthOne < arcs ? [] : chosen.AsSpan(0, count);
    }

    // The least degree that half of the nodes do not exceed.
    private static int Threshold(RemainingGraph graph)
    {
        int[] histogram = new int[MostDegree + 1];
        foreach (int v in graph.Nodes)
            histogram[Math.Min(graph.Degree(v), MostDegree)]++;
        int most = 0;
        for (long seen = histogram[0]; seen < graph.Count * Quantile; seen += histogram[most])
            most++;
        return most;
    }
}
