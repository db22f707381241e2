// A generated network held in memory for tests: links, degrees, components, parallel links.

using ScaleResist.DataGen.Networks;

namespace ScaleResist.Tests.DataGen;

internal sealed class CollectedNetwork : ILinkSink
{
    private CollectedNetwork() { }

    public long Nodes { get; private set; }

    public List<(long Source, long Target)> Links { get; } = [];

    public List<double> Conductances { get; } = [];

    public static CollectedNetwork Of(Family family, long nodes, long? links = null, ulong seed = 1, double decades = 0)
    {
        CollectedNetwork network = new();
        NetworkSize size = NetworkGenerator.Generate(new FamilyPlan(family, nodes, links, seed, decades), network);
        network.Nodes = size.Nodes;
        Assert.Equal(size.Links, network.Links.Count);
        return network;
    }

    public void Link(long source, long target, double conductance)
    {
        Links.Add((source, target));
        Conductances.Add(conductance);
    }

    public int[] Degrees()
    {
        int[] degrees = new int[Nodes];
        foreach ((long source, long target) in Links)
        {
            degrees[source]++;
            degrees[target]++;
        }
        return degrees;
    }

    public int Components()
    {
        int[] parents = Enumerable.Range(0, (int)Nodes).ToArray();
        int components = parents.Length;
        foreach ((long source, long target) in Links)
        {
            int a = Root(parents, (int)source);
            int b = Root(parents, (int)target);
            if (a == b)
                continue;
            parents[a] = b;
            components--;
        }
        return components;
    }

    public long SelfLoops() => Links.Count(link => link.Source == link.Target);

    public long ParallelLinks() =>
        Links.Count - Links.Select(link => (Math.Min(link.Source, link.Target), Math.Max(link.Source, link.Target))).ToHashSet().Count;

    private static int Root(int[] parents, int node)
    {
        while (parents[node] != node)
            node = parents[node] = parents[parents[node]];
        return node;
    }
}
