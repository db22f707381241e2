// Small worlds and power laws. Invariants: a small world is simple; a power law has no self-loop, but parallel links,
// because it streams in O(1) memory.

using System.Runtime.CompilerServices;

namespace ScaleResist.DataGen.Networks;

internal static class RandomNetworks
{
    private const double RewiredShare = 0.05;
    private const ulong RewireStream = 3;
    private const ulong TargetStream = 4;
    private const ulong MatrixStream = 5;
    private const int Attempts = 64;

    /// <summary>
    /// Watts and Strogatz, Nature 393:440, 1998: a ring in which each node is joined to <paramref name="reach"/> nodes on each side; each
    /// link is rewired with probability 0.05 to a node beyond the ring neighbourhood to which it was not rewired before. Should 64
    /// draws find none (only in tiny dense rings), the link stays. Memory: the rewired links.
    /// </summary>
    public static void SmallWorld(long nodes, long reach, ulong seed, Emitter emitter)
    {
        SeededRandom rewire = new(seed, RewireStream);
        SeededRandom random = new(seed, TargetStream);
        HashSet<(int, int)> rewired = [];
        for (long u = 0; u < nodes; u++)
        {
            for (long step = 1; step <= reach; step++)
            {
                long v = u + step < nodes ? u + step : u + step - nodes;
                if (rewire.Unit() < RewiredShare)
                {
                    for (int attempt = 0; attempt < Attempts; attempt++)
                    {
                        long far = random.Below(nodes);
                        long gap = Math.Abs(far - u);
                        if (Math.Min(gap, nodes - gap) > reach && rewired.Add(((int)Math.Min(u, far), (int)Math.Max(u, far))))
                        {
                            v = far;
                            break;
                        }
                    }
                }
                emitter.Link(u, v);
            }
        }
    }

    /// <summary>
    /// Recursive matrix (Chakrabarti, Zhan and Faloutsos, SIAM Data Mining 2004): each bit of (source, target) falls into a quadrant with
    /// probabilities 0.57, 0.19, 0.19, 0.05 (to 2^-16). A self-loop is drawn again. Low numbers are the hubs; many numbers stay without a link.
    /// </summary>
    public static void PowerLaw(NetworkSize size, ulong seed, Emitter emitter)
    {
        SeededRandom random = new(seed, MatrixStream);
        int levels = System.Numerics.BitOperations.Log2((ulong)size.Nodes);
        for (long link = 0; link < size.Links; link++)
        {
            long source;
            long target;
            do
            {
                (source, target) = Cell(random, levels);
            }
            while (source == target);
            emitter.Link(source, target);
        }
    }

    [MethodImpl(MethodImplOptions.AggressiveInlining)]
    private static (long Source, long Target) Cell(SeededRandom random, int levels)
    {
        const uint a = (uint)(0.57 * 65536);
        const uint b = a + (uint)(0.19 * 65536);
        const uint c = b + (uint)(0.19 * 65536);
        uint source = 0;
        uint target = 0;
        ulong bits = 0;
        for (int level = 0; level < levels; level++, bits >>= 16)
        {
            if ((level & 3) == 0)
                bits = random.Next();
            uint x = (uint)(bits & 0xFFFF);
            // Quadrants in the order (0,0), (0,1), (1,0), (1,1), without a branch to mispredict.
            uint overA = (a - 1 - x) >> 31;
            uint overB = (b - 1 - x) >> 31;
            uint overC = (c - 1 - x) >> 31;
            source = (source << 1) | overB;
            target = (target << 1) | (overA ^ overB ^ overC);
        }
        return (source, target);
    }
}
