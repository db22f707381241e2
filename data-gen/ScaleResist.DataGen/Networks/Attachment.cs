// Growing networks: each new node joins earlier ones. Invariant: connected and simple; memory is 8 bytes a core link.

namespace ScaleResist.DataGen.Networks;

internal static class Attachment
{
    private const ulong CoreStream = 1;
    private const ulong TreeStream = 2;

    /// <summary>
    /// Preferential attachment (Barabasi and Albert, Science 286:509, 1999): node v joins distinct earlier nodes in proportion to their
    /// degree. By the time node v is in, floor(links (v + 1) / nodes) links are there, or as many as v + 1 nodes can hold: about the
    /// first 2 links / nodes nodes are a complete graph, and the total is met exactly.
    /// </summary>
    public static void Preferential(NetworkSize size, ulong seed, Emitter emitter)
    {
        SeededRandom random = new(seed, CoreStream);
        // Both ends of every link so far: a uniform draw from it is a draw in proportion to degree.
        int[] ends = new int[2 * size.Links];
        int filled = 0;
        long made = 0;
        List<int> chosen = [];
        for (int v = 1; v < size.Nodes; v++)
        {
            long due = (long)((UInt128)size.Links * (ulong)(v + 1) / (ulong)size.Nodes) - made;
            chosen.Clear();
            if (due >= v)
            {
                for (int u = 0; u < v; u++)
                    chosen.Add(u);
            }
            else
            {
                while (chosen.Count < due)
                {
                    int u = ends[random.Below(filled)];
                    if (!chosen.Contains(u))
                        chosen.Add(u);
                }
            }
            made += chosen.Count;
            foreach (int u in chosen)
            {
                ends[filled++] = u;
                ends[filled++] = v;
                emitter.Link(v, u);
            }
        }
    }

    /// <summary>
    /// A preferential attachment core; every further node hangs on one earlier node: on its predecessor (one time in two, once there is
    /// a pendant one, which makes chains) or on any earlier node alike (which branches and starts new trees).
    /// </summary>
    public static void Fringe(NetworkSize core, long nodes, ulong seed, Emitter emitter)
    {
        Preferential(core, seed, emitter);
        SeededRandom random = new(seed, TreeStream);
        for (long v = core.Nodes; v < nodes; v++)
        {
            bool chain = (random.Next() >> 63) == 1 && v > core.Nodes;
            emitter.Link(v, chain ? v - 1 : random.Below(v));
        }
    }
}
