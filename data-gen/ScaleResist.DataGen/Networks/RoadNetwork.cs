// Road-like networks: a rectangle of crossings, a random spanning tree of its streets, a share of the other streets,
// and each street a chain of random length. Invariant: planar, connected, simple, with the exact size of its Layout.

namespace ScaleResist.DataGen.Networks;

/// <summary>The counts of a road-like network: n = crossings + chain nodes, m = streets + chain nodes.</summary>
internal readonly record struct RoadLayout(int Columns, int Rows, long Streets, long ChainNodes)
{
    public int Crossings => Columns * Rows;

    public long Links => Streets + ChainNodes;
}

internal static class RoadNetwork
{
    private const double CrossingShare = 0.4;
    private const double LinksPerNode = 1.3;
    private const int Tile = 32;
    private const ulong TreeStream = 6;
    private const ulong LengthStream = 7;
    private const ulong TileStream = 8;

    /// <summary>
    /// Four nodes in ten are crossings. Streets are as many as give a mean degree of 2.6; below about 160 nodes the rectangle has fewer,
    /// and all of them are taken.
    /// </summary>
    public static RoadLayout Layout(long nodes)
    {
        long crossings = (long)(nodes * CrossingShare);
        int columns = (int)Math.Sqrt(crossings);
        int rows = (int)(crossings / columns);
        crossings = (long)columns * rows;
        long possible = (2 * crossings) - columns - rows;
        long chainNodes = nodes - crossings;
        long streets = Math.Min(possible, (long)(nodes * LinksPerNode) - chainNodes);
        return new RoadLayout(columns, rows, streets, chainNodes);
    }

    /// <summary>Memory: about 8 bytes a node.</summary>
    public static void Draw(long nodes, ulong seed, Emitter emitter)
    {
        RoadLayout layout = Layout(nodes);
        // Slot 2i is the street from crossing i to the next column, slot 2i + 1 to the next row: 0 where there is none, else 1 + chain nodes.
        ushort[] streets = new ushort[2 * layout.Crossings];
        ChooseStreets(layout, streets, seed, emitter);
        ChooseLengths(layout, streets, seed);
        emitter.CheckCancelled();

        int[] tiles = TileOrder(layout, seed);
        int[] numbers = new int[layout.Crossings];
        int next = 0;
        foreach (int crossing in InOrder(layout, tiles))
        {
            numbers[crossing] = next++;
            next += Math.Max(0, streets[2 * crossing] - 1) + Math.Max(0, streets[(2 * crossing) + 1] - 1);
        }
        foreach (int crossing in InOrder(layout, tiles))
        {
            int first = numbers[crossing] + 1;
            if (streets[2 * crossing] != 0)
                first = Chain(numbers[crossing], first, streets[2 * crossing] - 1, numbers[crossing + 1], emitter);
            if (streets[(2 * crossing) + 1] != 0)
                Chain(numbers[crossing], first, streets[(2 * crossing) + 1] - 1, numbers[crossing + layout.Columns], emitter);
        }
    }

    private static int Chain(int from, int first, int length, int to, Emitter emitter)
    {
        int previous = from;
        for (int v = first; v < first + length; v++)
        {
            emitter.Link(previous, v);
            previous = v;
        }
        emitter.Link(previous, to);
        return first + length;
    }

    /// <summary>Kruskal over the streets in random order: the tree, and the first of the others up to the number wanted.</summary>
    private static void ChooseStreets(RoadLayout layout, ushort[] streets, ulong seed, Emitter emitter)
    {
        int possible = (2 * layout.Crossings) - layout.Columns - layout.Rows;
        int[] slots = new int[possible];
        int count = 0;
        for (int crossing = 0; crossing < layout.Crossings; crossing++)
        {
            if ((crossing + 1) % layout.Columns != 0)
                slots[count++] = 2 * crossing;
            if (crossing + layout.Columns < layout.Crossings)
                slots[count++] = (2 * crossing) + 1;
        }
        new SeededRandom(seed, TreeStream).Shuffle(slots.AsSpan());
        emitter.CheckCancelled();

        int[] parents = new int[layout.Crossings];
        for (int i = 0; i < parents.Length; i++)
            parents[i] = i;
        long others = layout.Streets - (layout.Crossings - 1);
        foreach (int slot in slots)
        {
            int crossing = slot >> 1;
            int a = Root(parents, crossing);
            int b = Root(parents, (slot & 1) == 0 ? crossing + 1 : crossing + layout.Columns);
            if (a != b)
                parents[Math.Max(a, b)] = Math.Min(a, b);
            else if (others-- <= 0)
                continue;
            streets[slot] = 1;
        }
    }

    private static int Root(int[] parents, int node)
    {
        while (parents[node] != node)
            node = parents[node] = parents[parents[node]];
        return node;
    }

    /// <summary>Three streets in four are short and one is long: geometric with a quarter, or 3.25 times, of the mean; then evened out to the sum.</summary>
    private static void ChooseLengths(RoadLayout layout, ushort[] streets, ulong seed)
    {
        SeededRandom random = new(seed, LengthStream);
        double mean = (double)layout.ChainNodes / layout.Streets;
        long missing = layout.ChainNodes;
        for (int slot = 0; slot < streets.Length; slot++)
        {
            if (streets[slot] == 0)
                continue;
            int length = random.Geometric((random.Next() & 3) == 0 ? 3.25 * mean : 0.25 * mean);
            streets[slot] += (ushort)length;
            missing -= length;
        }
        while (missing != 0)
        {
            ref ushort street = ref streets[random.Below(streets.Length)];
            if (missing > 0 && street is > 0 and < ushort.MaxValue)
            {
                street++;
                missing--;
            }
            else if (missing < 0 && street > 1)
            {
                street--;
                missing++;
            }
        }
    }

    /// <summary>Numbers run tile by tile, the tiles in random order: neighbours are mostly near, as in real exports, but not always.</summary>
    private static int[] TileOrder(RoadLayout layout, ulong seed)
    {
        int across = (layout.Columns + Tile - 1) / Tile;
        int down = (layout.Rows + Tile - 1) / Tile;
        int[] tiles = new int[across * down];
        for (int i = 0; i < tiles.Length; i++)
            tiles[i] = i;
        new SeededRandom(seed, TileStream).Shuffle(tiles.AsSpan());
        return tiles;
    }

    private static IEnumerable<int> InOrder(RoadLayout layout, int[] tiles)
    {
        int across = (layout.Columns + Tile - 1) / Tile;
        foreach (int tile in tiles)
        {
            int row0 = tile / across * Tile;
            int column0 = tile % across * Tile;
            for (int row = row0; row < Math.Min(row0 + Tile, layout.Rows); row++)
            {
                for (int column = column0; column < Math.Min(column0 + Tile, layout.Columns); column++)
                    yield return (row * layout.Columns) + column;
            }
        }
    }
}
