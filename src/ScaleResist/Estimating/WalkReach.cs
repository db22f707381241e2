// How far local conditioning looks around a link: the number of steps of a random walk, and which nodes a walk passes through.
// Invariant: both follow from counted work on the network (and the memory allowed), never from a clock, and any choice leaves estimates unbiased.

using ScaleResist.Graphs;

namespace ScaleResist.Estimating;

/// <summary>Steps s, 1 to 3, and the nodes that a walk may pass: those of at most <see cref="MostDegree"/> neighbours.</summary>
internal sealed class WalkReach
{
    /// <summary>The most steps.</summary>
    public const int MostSteps = 3;

    // Walks of 2 to 2s - 2 steps that preparing follows at most, as a multiple of the arcs: around hubs each is a miss of the caches.
    private const double WalksPerArc = 5;
    private const double WalksPerArcOfThreeSteps = 400; // most of them meet: meshes and rings hold a fraction as many nodes

    private const double WalksPerArcOfTheMean = 40; // so that a node of the mean degree is passed, in regular networks all are

    // A third step pays where walks pass nearly everywhere, a second where they pass at all: shares of the arcs.
    private const double ShareOfThreeSteps = 0.98;
    private const double ShareOfTwoSteps = 0.02;

    private WalkReach(Network network, int steps, int mostDegree)
    {
        Steps = steps;
        MostDegree = mostDegree;
        Passes = new float[steps > 1 ? network.NodeCount : 0];
        for (int u = 0; u < Passes.Length; u++)
            Passes[u] = network.Degree(u) <= mostDegree ? 1 : 0;
    }

    /// <summary>s: 1 is the link's two ends alone.</summary>
    public int Steps { get; }

    /// <summary>The degree up to which a walk passes through a node.</summary>
    public int MostDegree { get; }

    /// <summary>1 where a walk passes through a node, else 0; empty for one step.</summary>
    public float[] Passes { get; }

    /// <summary>Bytes a link that s steps keep beside the sums, and take while they are prepared.</summary>
    public static int BytesPerLink(int steps) => steps == 1 ? 0 : (4 * steps) + 4 + (8 * ((2 * steps) - 2));

    /// <summary>The reach that counted work allows: three steps, else two through the nodes of lesser degree.</summary>
    /// <param name="network">The network.</param>
    /// <param name="bytes">Memory that may be taken for it.</param>
    public static WalkReach Of(Network network, double bytes)
    {
        double links = network.LinkCount;
        return Of(network, Fits(3) ? 3 : Fits(2) ? 2 : 1);

        bool Fits(int steps) => links * BytesPerLink(steps) <= bytes && links * 2 * steps <= Array.MaxLength;
    }

    /// <summary>The same with no more than <paramref name="mostSteps"/> steps.</summary>
    public static WalkReach Of(Network network, int mostSteps)
    {
        int largest = 0;
        for (int u = 0; u < network.NodeCount; u++)
            largest = Math.Max(largest, network.Degree(u));
        double arcs = network.Neighbours.LongLength;
        if (mostSteps >= 3 && DegreeWithin(network, largest, 4, WalksPerArcOfThreeSteps * arcs) is int three
            && ArcsFrom(network, three) >= ShareOfThreeSteps * arcs)
        {
            return new WalkReach(network, 3, three);
        }
        if (mostSteps < 2)
            return new WalkReach(network, 1, 0);
        int two = DegreeWithin(network, largest, 2, WalksPerArc * arcs) ?? 0, mean = (int)Math.Ceiling(arcs / Math.Max(1, network.NodeCount));
        if (two < mean && Walks(network, mean, 2) <= WalksPerArcOfTheMean * arcs)
            two = mean;
        return ArcsFrom(network, two) >= ShareOfTwoSteps * arcs ? new WalkReach(network, 2, two) : new WalkReach(network, 1, 0);
    }

    /// <summary>Two or three steps through nodes of at most a given degree, whatever the work.</summary>
    public static WalkReach Through(Network network, int steps, int mostDegree) => new(network, steps, mostDegree);

    // The largest degree, by halves from the largest there is, through which walks of up to so many steps stay within the work.
    private static int? DegreeWithin(Network network, int largest, int steps, double work)
    {
        for (int degree = largest; degree > 1; degree = degree * 3 / 4)
        {
            if (Walks(network, degree, steps) <= work)
                return degree;
        }
        return null;
    }

    // Walks of 2, 3, .. steps from all nodes that pass through nodes of at most this degree. O(steps arcs).
    private static double Walks(Network network, int mostDegree, int steps)
    {
        double[] from = new double[network.NodeCount], next = new double[network.NodeCount];
        double sum = 0;
        for (int u = 0; u < from.Length; u++)
        {
            from[u] = network.Degree(u) <= mostDegree ? network.Degree(u) : 0; // walks of one step from a node that may be passed
            sum += from[u] * network.Degree(u);
        }
        for (int step = 3; step <= steps; step++)
        {
            for (int u = 0; u < from.Length; u++)
            {
                double walks = 0;
                for (long k = network.RowStart[u]; k < network.RowStart[u + 1]; k++)
                    walks += from[network.Neighbours[k]];
                next[u] = network.Degree(u) <= mostDegree ? walks : 0;
                sum += next[u] * network.Degree(u);
            }
            (from, next) = (next, from);
        }
        return sum;
    }

    private static double ArcsFrom(Network network, int mostDegree)
    {
        double arcs = 0;
        for (int u = 0; u < network.NodeCount; u++)
            arcs += network.Degree(u) <= mostDegree ? network.Degree(u) : 0;
        return arcs;
    }
}
