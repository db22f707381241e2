// The families of networks, what a user may ask of them, and how large they come out.
// Invariant: the size is known exactly before the first link is drawn.

namespace ScaleResist.DataGen.Networks;

/// <summary>The families of networks.</summary>
public enum Family
{
    /// <summary>Nodes in a row.</summary>
    Path,

    /// <summary>Nodes in a ring.</summary>
    Cycle,

    /// <summary>Node 0 joined to every other.</summary>
    Star,

    /// <summary>Every pair joined.</summary>
    Complete,

    /// <summary>Square grid, row by row.</summary>
    Grid,

    /// <summary>Square grid closed in both directions.</summary>
    Torus,

    /// <summary>Cubic grid.</summary>
    Cube,

    /// <summary>Nodes joined where their numbers differ in one bit.</summary>
    Hypercube,

    /// <summary>Two rows joined rung by rung.</summary>
    Ladder,

    /// <summary>Road-like: planar, connected, mean degree 2.6, chains of degree-2 nodes.</summary>
    Road,

    /// <summary>Preferential attachment (Barabasi and Albert 1999).</summary>
    Preferential,

    /// <summary>Recursive matrix (Chakrabarti, Zhan and Faloutsos 2004).</summary>
    PowerLaw,

    /// <summary>Rewired ring (Watts and Strogatz 1998).</summary>
    SmallWorld,

    /// <summary>Preferential attachment core with pendant trees.</summary>
    Fringe,
}

/// <summary>Nodes and links of a network. For <see cref="Family.PowerLaw"/>, nodes is the range of ids, and parallel links count.</summary>
public readonly record struct NetworkSize(long Nodes, long Links);

/// <summary>What to generate.</summary>
/// <param name="Family">The family.</param>
/// <param name="Nodes">Nodes asked for; rounded to what the family allows.</param>
/// <param name="Links">Links asked for, or null for the family's own number; only for families with that freedom.</param>
/// <param name="Seed">Any number; the same plan gives the same network.</param>
/// <param name="Decades">Spread of the conductances in decades; 0: all are 1.</param>
public sealed record FamilyPlan(Family Family, long Nodes, long? Links = null, ulong Seed = 1, double Decades = 0)
{
    /// <summary>The most nodes that may be asked for.</summary>
    public const long MaximumNodes = int.MaxValue;

    /// <summary>The most links that a network may have.</summary>
    public const long MaximumLinks = 1L << 32;

    /// <summary>The families for which <see cref="Links"/> may be given.</summary>
    public static readonly IReadOnlyList<Family> WithLinks =
        [Family.Preferential, Family.PowerLaw, Family.SmallWorld, Family.Fringe];

    private const long DefaultLinksPerNode = 5;
    private const long DefaultPowerLawLinksPerNode = 8;
    private const long DefaultReach = 3;

    /// <summary>The family's name on the command line.</summary>
    public static string NameOf(Family family) => family.ToString().ToLowerInvariant();

    /// <summary>The size of the network, or what is wrong with the plan and how to mend it.</summary>
    public bool TrySize(out NetworkSize size, out string? problem)
    {
        size = default;
        problem = FirstProblem();
        if (problem is not null)
            return false;
        size = Size();
        problem = SizeProblem(size);
        return problem is null;
    }

    /// <summary>The neighbours on each side in the ring of a small world.</summary>
    internal long Reach => Links is long links ? (links + (Nodes / 2)) / Nodes : DefaultReach;

    /// <summary>The size of the core of a fringe network: a tenth of the nodes.</summary>
    internal NetworkSize Core
    {
        get
        {
            long nodes = Nodes / 10;
            return new NetworkSize(nodes, Links is long links ? links - (Nodes - nodes) : nodes * DefaultLinksPerNode);
        }
    }

    private string? FirstProblem()
    {
        string name = NameOf(Family);
        long least = LeastNodes(Family);
        if (Nodes < least)
            return $"a {name} network needs at least {least} nodes; ask for --nodes {least} or more";
        if (Nodes > MaximumNodes)
            return $"{Nodes} nodes are too many; ask for at most {MaximumNodes}";
        if (!(Decades >= 0 && Decades <= Conductances.MaximumDecades))
            return $"--decades must lie between 0 and {Conductances.MaximumDecades}; 0 means unit conductances";
        if (Links is null)
            return null;
        if (!WithLinks.Contains(Family))
            return $"the number of links of a {name} network follows from its nodes; leave --links out";
        if (Links < 1 || Links > MaximumLinks)
            return $"--links must lie between 1 and {MaximumLinks}; {Links} does not";
        return null;
    }

    private NetworkSize Size()
    {
        long n = Nodes;
        switch (Family)
        {
            case Family.Path:
            case Family.Star:
                return new NetworkSize(n, n - 1);
            case Family.Cycle:
                return new NetworkSize(n, n);
            case Family.Complete:
                return new NetworkSize(n, n * (n - 1) / 2);
            case Family.Grid:
                long side = Root(n, 2);
                return new NetworkSize(side * side, 2 * side * (side - 1));
            case Family.Torus:
                side = Root(n, 2);
                return new NetworkSize(side * side, 2 * side * side);
            case Family.Cube:
                side = Root(n, 3);
                return new NetworkSize(side * side * side, 3 * side * side * (side - 1));
            case Family.Hypercube:
                int dimensions = NearestPowerOfTwo(n);
                return new NetworkSize(1L << dimensions, dimensions * (1L << dimensions) / 2);
            case Family.Ladder:
                return new NetworkSize(n / 2 * 2, (3 * (n / 2)) - 2);
            case Family.Road:
                return new NetworkSize(n, RoadNetwork.Layout(n).Links);
            case Family.Preferential:
                return new NetworkSize(n, Links ?? Math.Min(n * DefaultLinksPerNode, n * (n - 1) / 2));
            case Family.PowerLaw:
                n = 1L << NearestPowerOfTwo(n);
                return new NetworkSize(n, Links ?? n * DefaultPowerLawLinksPerNode);
            case Family.SmallWorld:
                return new NetworkSize(n, n * Reach);
            case Family.Fringe:
                return new NetworkSize(n, n - Core.Nodes + Core.Links);
            default:
                throw new InvalidOperationException($"No size for {Family}.");
        }
    }

    private string? SizeProblem(NetworkSize size)
    {
        if (size.Links > MaximumLinks)
            return $"{size.Links} links are too many; ask for fewer --nodes, so that at most {MaximumLinks} links come out";
        switch (Family)
        {
            case Family.Preferential:
                return AttachmentProblem(size, 0);
            case Family.Fringe:
                return AttachmentProblem(Core, Nodes - Core.Nodes);
            case Family.SmallWorld when Reach < 1 || Nodes < (2 * Reach) + 2:
                return $"--links must lie between {Nodes} and {Nodes * ((Nodes - 2) / 2)} for {Nodes} nodes of a small world";
            default:
                return null;
        }
    }

    private static string? AttachmentProblem(NetworkSize core, long hung)
    {
        long least = core.Nodes - 1;
        long most = Math.Min(core.Nodes * (core.Nodes - 1) / 2, Array.MaxLength / 2);
        return core.Links >= least && core.Links <= most
            ? null
            : $"--links must lie between {least + hung} and {most + hung} for that many nodes";
    }

    private static long LeastNodes(Family family) => family switch
    {
        Family.Cycle => 3,
        Family.Grid or Family.Ladder => 4,
        Family.Torus => 9,
        Family.Cube or Family.SmallWorld => 8,
        Family.Road => 10,
        Family.Fringe => 110,
        _ => 2,
    };

    /// <summary>The largest whole number whose power does not exceed the value.</summary>
    private static long Root(long value, int power)
    {
        long root = (long)Math.Round(Math.Pow(value, 1.0 / power));
        return (power == 2 ? root * root : root * root * root) > value ? root - 1 : root;
    }

    /// <summary>d such that 2^d is nearest to the value in ratio.</summary>
    private static int NearestPowerOfTwo(long value)
    {
        int below = System.Numerics.BitOperations.Log2((ulong)value);
        // Above sqrt(2) 2^d the next power is nearer: value^2 > 2 4^d. At most 31 bits, so the square fits.
        return value * value > 1L << ((2 * below) + 1) ? below + 1 : below;
    }
}
