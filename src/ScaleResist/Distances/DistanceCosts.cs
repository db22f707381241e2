// What a route costs: weights of the nodes it enters, lengths of the links it takes.
// Invariant: costs are finite and not negative, and how they are searched (Steps) depends on them alone.

using ScaleResist.Graphs;

namespace ScaleResist.Distances;

/// <summary>What kind of number a step costs, which decides how it is searched.</summary>
public enum StepKind
{
    /// <summary>Every step costs the same: breadth first.</summary>
    Equal,

    /// <summary>Whole numbers up to <see cref="DistanceCosts.LargestBucketStep"/>: buckets.</summary>
    Whole,

    /// <summary>Any numbers: a heap.</summary>
    Any,
}

/// <summary>
/// d(u,v) = sum over the lightest route from u to v of the weights of its nodes, v included and u not, and of the lengths of its links; d(u,u) = 0,
/// and +infinity between components. d(u,v) - d(v,u) = w_v - w_u, so s(u,v) = d(u,v) + w_u is symmetric, and so is their mean
/// t(u,v) = (d(u,v) + d(v,u)) / 2 = d(u,v) + (w_u - w_v) / 2, a metric: what sums over unordered pairs are of.
/// </summary>
public sealed class DistanceCosts
{
    /// <summary>The largest whole step that buckets serve.</summary>
    public const int LargestBucketStep = 1 << 16;

    private const double LargestWhole = 1L << 52;
    private readonly double[]? weights;
    private readonly double weight;

    /// <summary>Costs of a network.</summary>
    /// <param name="network">The network, with its lengths if it has any.</param>
    /// <param name="nodeWeights">n finite values, not negative. Null: every node counts 1, or 0 where links have lengths.</param>
    public DistanceCosts(Network network, double[]? nodeWeights = null)
    {
        Network = network;
        weights = nodeWeights;
        weight = network.Lengths is null ? 1 : 0;
        double least = double.PositiveInfinity, most = 0, longest = 0, total = 0;
        bool whole = true;
        for (int u = 0; u < network.NodeCount; u++)
            Count(Weight(u), ref most);
        foreach (double length in network.Lengths ?? [])
            Count(length, ref longest);
        TotalCost = total;
        AreWhole = whole && total <= LargestWhole;
        LargestStep = most + longest;
        Steps = network.Lengths is null && least == most ? StepKind.Equal
            : AreWhole && LargestStep <= LargestBucketStep ? StepKind.Whole : StepKind.Any;

        void Count(double cost, ref double largest)
        {
            least = Math.Min(least, cost);
            largest = Math.Max(largest, cost);
            total += cost;
            whole &= cost == Math.Floor(cost);
        }
    }

    /// <summary>The network.</summary>
    public Network Network { get; }

    /// <summary>How routes are searched.</summary>
    public StepKind Steps { get; }

    /// <summary>Whether all costs are whole numbers, so that sums of them are exact.</summary>
    public bool AreWhole { get; }

    /// <summary>A bound on what one step costs.</summary>
    public double LargestStep { get; }

    /// <summary>The sum of all weights and lengths (of each link from both ends): no distance is larger.</summary>
    public double TotalCost { get; }

    /// <summary>The weights given, or null.</summary>
    public double[]? NodeWeights => weights;

    /// <summary>w_u.</summary>
    public double Weight(int node) => weights is null ? weight : weights[node];

    /// <summary>The length of an arc, 0 where links have none.</summary>
    public double Length(long arc) => Network.Lengths is null ? 0 : Network.Lengths[arc];

    /// <summary>The number of the component of a node. O(log components).</summary>
    public int ComponentOf(int node)
    {
        IReadOnlyList<Component> components = Network.Components;
        int low = 0, high = components.Count - 1;
        while (low < high)
        {
            int middle = low + ((high - low + 1) / 2);
            if (components[middle].Start <= node)
                low = middle;
            else
                high = middle - 1;
        }
        return low;
    }

    /// <summary>t(u,v) from d(u,v).</summary>
    public double Mean(int u, int v, double distance) =>
        weights is null ? distance : distance + ((weights[u] - weights[v]) / 2);
}
