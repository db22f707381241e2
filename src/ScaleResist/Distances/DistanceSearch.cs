// Distances from one node to all of its component. Each search owns its workspace: one a thread.
// Invariant: after Search, Distances holds d(source, v) for every v of the source's component and nothing else is promised.

using ScaleResist.Graphs;

namespace ScaleResist.Distances;

/// <summary>Single-source distances on one thread.</summary>
public abstract class DistanceSearch
{
    private protected DistanceSearch(DistanceCosts costs)
    {
        Costs = costs;
        Distances = new double[costs.Network.NodeCount];
    }

    /// <summary>What is measured.</summary>
    public DistanceCosts Costs { get; }

    /// <summary>n values: d(source, v) on the component last searched.</summary>
    public double[] Distances { get; }

    /// <summary>The search that suits the costs: breadth first, buckets or a heap.</summary>
    public static DistanceSearch For(DistanceCosts costs) => costs.Steps switch
    {
        StepKind.Equal => new HopSearch(costs),
        StepKind.Whole => new BucketSearch(costs),
        _ => new HeapSearch(costs),
    };

    /// <summary>Finds all distances from a node.</summary>
    /// <returns>The component that was searched.</returns>
    public Component Search(int source)
    {
        Component component = Costs.Network.Components[Costs.ComponentOf(source)];
        Search(source, component);
        return component;
    }

    private protected abstract void Search(int source, Component component);
}
