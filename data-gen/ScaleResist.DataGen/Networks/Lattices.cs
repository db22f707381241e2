// The deterministic families. Invariant: O(1) memory, links in order of their lower node wherever the family has such an order.

namespace ScaleResist.DataGen.Networks;

internal static class Lattices
{
    public static void Path(long nodes, Emitter emitter)
    {
        for (long v = 1; v < nodes; v++)
            emitter.Link(v - 1, v);
    }

    public static void Star(long nodes, Emitter emitter)
    {
        for (long v = 1; v < nodes; v++)
            emitter.Link(0, v);
    }

    public static void Complete(long nodes, Emitter emitter)
    {
        for (long u = 0; u < nodes; u++)
        {
            for (long v = u + 1; v < nodes; v++)
                emitter.Link(u, v);
        }
    }

    /// <summary>Node (row, column) is row * side + column.</summary>
    public static void Grid(long nodes, bool closed, Emitter emitter)
    {
        long side = (long)Math.Round(Math.Sqrt(nodes));
        for (long row = 0; row < side; row++)
        {
            for (long column = 0; column < side; column++)
            {
                long u = (row * side) + column;
                if (column + 1 < side)
                    emitter.Link(u, u + 1);
                else if (closed)
                    emitter.Link(u, u + 1 - side);
                if (row + 1 < side)
                    emitter.Link(u, u + side);
                else if (closed)
                    emitter.Link(u, column);
            }
        }
    }

    /// <summary>Node (x, y, z) is (x * side + y) * side + z.</summary>
    public static void Cube(long nodes, Emitter emitter)
    {
        long side = (long)Math.Round(Math.Cbrt(nodes));
        long u = 0;
        for (long x = 0; x < side; x++)
        {
            for (long y = 0; y < side; y++)
            {
                for (long z = 0; z < side; z++, u++)
                {
                    if (z + 1 < side)
                        emitter.Link(u, u + 1);
                    if (y + 1 < side)
                        emitter.Link(u, u + side);
                    if (x + 1 < side)
                        emitter.Link(u, u + (side * side));
                }
            }
        }
    }

    public static void Hypercube(long nodes, Emitter emitter)
    {
        for (long u = 0; u < nodes; u++)
        {
            for (long bit = 1; bit < nodes; bit <<= 1)
            {
                if ((u & bit) == 0)
                    emitter.Link(u, u | bit);
            }
        }
    }

    /// <summary>Rung i joins nodes 2i and 2i + 1.</summary>
    public static void Ladder(long nodes, Emitter emitter)
    {
        for (long u = 0; u < nodes; u += 2)
        {
            emitter.Link(u, u + 1);
            if (u + 2 < nodes)
            {
                emitter.Link(u, u + 2);
                emitter.Link(u + 1, u + 3);
            }
        }
    }
}
