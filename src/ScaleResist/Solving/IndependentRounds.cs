// Elimination in rounds: a round takes nodes of low degree no two of which are linked and eliminates them all (multiple minimum degree, Liu 1985, with
// sampled cliques). Rounds stream through memory where one node at a time by degree would jump, and threads share the nodes of a round.
// Invariant: what a round does depends on the graph and the seed alone, not on the number of threads.

namespace ScaleResist.Solving;

/// <summary>Rounds of elimination, until too little of the graph is independent for another to pay.</summary>
internal static class IndependentRounds
{
    private const int Chunk = 2048; // nodes
    private const int FewNodes = 256;
    private const int WorthOne = 64; // of so many arcs a round must take one out
    private const int MostDegree = 1024;

    /// <summary>Eliminates rounds of nodes from a graph into columns.</summary>
    /// <param name="graph">Keeps what is left.</param>
    /// <param name="columns">Grow by the nodes that went.</param>
    /// <param name="samples">An entry.</param>
    /// <param name="seed">Of the draws.</param>
    /// <param name="threads">How many may share the work.</param>
    public static void Run(RemainingGraph graph, FactorColumns columns, int samples, ulong seed, ParallelOptions threads)
    {
        int[] chosen = new int[graph.Count], linkStart = new int[graph.Count];
        bool[] blocked = new bool[graph.Count];
        SampledLink[] links = [];
        while (graph.Count > FewNodes)
        {
            int count = Choose(graph, chosen, blocked), first = columns.Count, end = 0;
            if (count == 0)
                return;
            for (int i = 0; i < count; i++)
            {
                int degree = graph.Degree(chosen[i]);
                columns.Open(chosen[i], degree);
                linkStart[i] = end;
                end = checked(end + StarSample.LinkCount(degree, samples));
            }
            if (links.Length < end)
                links = GC.AllocateUninitializedArray<SampledLink>(end);
            Parallel.For(0, (count + Chunk - 1) / Chunk, threads, () => new StarSample(samples, seed), Eliminate, _ => { });
            graph.Replace(chosen.AsSpan(0, count), links.AsSpan(0, end));

            StarSample Eliminate(int chunk, ParallelLoopState state, StarSample star)
            {
                for (int i = chunk * Chunk; i < Math.Min(count, (chunk + 1) * Chunk); i++)
                {
                    star.Clear();
                    foreach (Arc arc in graph.Row(chosen[i]))
                        star.Add(arc.To, arc.Weight);
                    columns.Inverse[first + i] = star.Eliminate(chosen[i], columns.Column(first + i));
                    star.Sample(links.AsSpan(linkStart[i]));
                }
                return star;
            }
        }
    }

    // Nodes in order, each of low degree that has no chosen neighbour yet; none where that would not pay.
    private static int Choose(RemainingGraph graph, int[] chosen, bool[] blocked)
    {
        int most = MedianDegree(graph), count = 0;
        long arcs = 0, going = 0;
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
        return going * WorthOne < arcs ? 0 : count;
    }

    // The least degree that half of the nodes do not exceed.
    private static int MedianDegree(RemainingGraph graph)
    {
        Span<int> histogram = stackalloc int[MostDegree + 1];
        histogram.Clear();
        foreach (int v in graph.Nodes)
            histogram[Math.Min(graph.Degree(v), MostDegree)]++;
        int degree = 0;
        for (int seen = histogram[0]; seen < (graph.Count + 1) / 2; seen += histogram[degree])
            degree++;
        return degree;
    }
}
