// Networks for tests: from generators, from literal links, from the open data; and dense reference values by MathNet.Numerics.

using MathNet.Numerics.LinearAlgebra;
using ScaleResist.DataGen.Networks;
using ScaleResist.Graphs;

namespace ScaleResist.Tests;

internal static class TestNetworks
{
    private static readonly InputFacts Facts = new() { Path = "test", Form = "memory", Sha256 = "", Columns = ["1", "2"] };

    public static Network Of(Family family, long nodes, long? links = null, ulong seed = 1, double decades = 0)
    {
        EdgeListBuilder builder = new(weighted: decades > 0);
        NetworkGenerator.Generate(new FamilyPlan(family, nodes, links, seed, decades), new BuilderSink(builder));
        return NetworkBuilder.Build(builder.Finish(Facts));
    }

    public static Network Of(params (long U, long V, double C)[] links)
    {
        EdgeListBuilder builder = new(weighted: links.Any(link => link.C != 1));
        foreach ((long u, long v, double c) in links)
            builder.Add(u, v, c);
        return NetworkBuilder.Build(builder.Finish(Facts));
    }

    public static Network Unit(params (long U, long V)[] links) => Of([.. links.Select(link => (link.U, link.V, 1.0))]);

    public static Network Open(string file, WeightMeaning weights = WeightMeaning.None) =>
        NetworkBuilder.Build(EdgeListReader.Read(TestData.Path(file), new ReadOptions { Weights = weights }));

    /// <summary>A connected random network: a random tree and further links, conductances over the decades given.</summary>
    public static Network Random(int nodes, int links, int seed, double decades)
    {
        Random random = new(seed);
        HashSet<(long, long)> taken = [];
        List<(long, long, double)> list = [];
        for (int v = 1; v < nodes; v++)
            Add(random.Next(v), v);
        while (list.Count < links)
            Add(random.Next(nodes), random.Next(nodes));
        return Of([.. list]);

        void Add(long u, long v)
        {
            if (u != v && taken.Add((Math.Min(u, v), Math.Max(u, v))))
                list.Add((u, v, decades == 0 ? 1 : Math.Pow(10, decades * (random.NextDouble() - 0.5))));
        }
    }

    /// <summary>Internal number of a node by its label.</summary>
    public static int Node(this Network network, long label) => network.Labels.IndexOf(label);

    /// <summary>The Laplacian as a dense matrix, internal order.</summary>
    public static Matrix<double> DenseLaplacian(this Network network)
    {
        Matrix<double> laplacian = Matrix<double>.Build.Dense(network.NodeCount, network.NodeCount);
        for (int u = 0; u < network.NodeCount; u++)
        {
            laplacian[u, u] = network.Strengths[u];
            for (long k = network.RowStart[u]; k < network.RowStart[u + 1]; k++)
                laplacian[u, network.Neighbours[k]] = -network.Conductance(k);
        }
        return laplacian;
    }

    /// <summary>L+ of a connected network: (L + 11'/n)^-1 - 11'/n.</summary>
    public static Matrix<double> DensePseudoInverse(this Network network)
    {
        double share = 1.0 / network.NodeCount;
        Matrix<double> identity = Matrix<double>.Build.DenseIdentity(network.NodeCount);
        return network.DenseLaplacian().Add(share).Cholesky().Solve(identity).Subtract(share);
    }

    /// <summary>R(u,v) from L+.</summary>
    public static double Resistance(this Matrix<double> pseudoInverse, int u, int v) =>
        pseudoInverse[u, u] + pseudoInverse[v, v] - (2 * pseudoInverse[u, v]);

    private sealed class BuilderSink(EdgeListBuilder builder) : ILinkSink
    {
        public void Link(long source, long target, double conductance) => builder.Add(source, target, conductance);
    }
}
