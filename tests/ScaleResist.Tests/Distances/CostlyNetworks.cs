// Networks with costs for tests, and all their distances by the plainest algorithm there is (Floyd 1962; Warshall 1962).

using ScaleResist.Distances;
using ScaleResist.Graphs;

namespace ScaleResist.Tests.Distances;

internal static class CostlyNetworks
{
    private static readonly InputFacts Facts = new() { Path = "test", Form = "memory", Sha256 = "", Columns = ["1", "2"] };

    public static Network Of(bool lengths, params (long U, long V, double Length)[] links)
    {
        EdgeListBuilder builder = new(lengths, areLengths: lengths);
        foreach ((long u, long v, double length) in links)
            builder.Add(u, v, length);
        return NetworkBuilder.Build(builder.Finish(Facts));
    }

    /// <summary>Up to 40 nodes in one or more components, trees among them; costs equal, whole with ties and zeros, or
    /// real, with lengths or without.</summary>
    public static DistanceCosts Random(int seed)
    {
        Random random = new(seed);
        int nodes = random.Next(2, 41), links = random.Next(1, 2 * nodes), kind = random.Next(5);
        bool lengths = random.Next(2) == 0, islands = random.Next(2) == 0;
        List<(long, long, double)> list = [(0, 1, Cost())];
        for (int v = 2; v < nodes; v++)
        {
            if (!islands || random.Next(5) > 0)
                list.Add((random.Next(v), v, Cost()));
        }
        for (int i = 0; i < links && random.Next(8) > 0; i++)
            list.Add((random.Next(nodes), random.Next(nodes), Cost()));
        list.Add((100, 101, Cost()));
        Network network = Of(lengths, [.. list]);
        double equal = random.Next(3);
        return new DistanceCosts(network, kind == 0 ? null : [.. Enumerable.Range(0, network.NodeCount).Select(_ => kind == 1 ? equal : Cost())]);

        double Cost() => kind switch { < 3 => random.Next(4), 3 => random.Next(70_000), _ => random.NextDouble() * random.Next(2) };
    }

    /// <summary>d(u,v) for all pairs, +infinity between components.</summary>
    public static double[,] AllDistances(DistanceCosts costs)
    {
        Network network = costs.Network;
        int n = network.NodeCount;
        double[,] d = new double[n, n];
        for (int u = 0; u < n; u++)
        {
            for (int v = 0; v < n; v++)
                d[u, v] = u == v ? 0 : double.PositiveInfinity;
            for (long k = network.RowStart[u]; k < network.RowStart[u + 1]; k++)
                d[u, network.Neighbours[k]] = costs.Weight(network.Neighbours[k]) + costs.Length(k);
        }
        for (int k = 0; k < n; k++)
        {
            for (int u = 0; u < n; u++)
            {
                for (int v = 0; v < n; v++)
                    d[u, v] = Math.Min(d[u, v], d[u, k] + d[k, v]);
            }
        }
        return d;
    }
}
