// Resistances to terminals against the inverse of the Laplacian without the terminals' rows and columns (MathNet.Numerics), on both routes.

using MathNet.Numerics.LinearAlgebra;
using ScaleResist.DataGen.Networks;
using ScaleResist.Graphs;
using ScaleResist.Runs;

namespace ScaleResist.Tests.Runs;

public sealed class TerminalTests
{
    [Theory]
    [InlineData(0)]
    [InlineData(3)]
    public void Exact_resistances_are_those_of_a_dense_inverse(double decades)
    {
        for (int seed = 1; seed <= 10; seed++)
        {
            Network network = TestNetworks.Random(60, 60 + (seed % 4 * 15), seed, decades);
            int[] terminals = [.. Enumerable.Range(0, 1 + (seed % 3 * 4)).Select(i => i * 7 % 60).Distinct()];
            double[] found = Run(network, terminals, new EstimatePlan { Route = Route.Exact, Want = Want.Nodes }, out TerminalFacts facts).Values;
            double[] dense = Dense(network, terminals);
            for (int u = 0; u < 60; u++)
                Assert.Equal(dense[u], found[u], 1e-8 * Math.Max(dense[u], 1e-3));
            Assert.Equal((terminals.Length, 0, "exact"), (facts.Terminals, facts.NodesWithout, facts.Method));
        }
    }

    [Fact]
    [Trait("Category", "Slow")]
    public void Twenty_terminals_of_the_power_network_are_those_of_a_dense_inverse()
    {
        Network network = TestNetworks.Open("power.tsv");
        int[] terminals = [.. Enumerable.Range(0, 20).Select(i => i * 241)];
        double[] found = Run(network, terminals, new EstimatePlan { Route = Route.Exact, Want = Want.Nodes }, out _).Values;
        int[] others = [.. Enumerable.Range(0, network.NodeCount).Except(terminals)];
        Matrix<double> laplacian = network.DenseLaplacian();
        var factor = Matrix<double>.Build.Dense(others.Length, others.Length, (i, j) => laplacian[others[i], others[j]]).Cholesky();
        for (int i = 0; i < others.Length; i += 48) // a dense inverse of all would take a quarter of an hour
        {
            double r = factor.Solve(Vector<double>.Build.Dense(others.Length, j => j == i ? 1 : 0))[i];
            Assert.Equal(r, found[others[i]], 1e-8 * r);
        }
    }

    // Shorting every second node of a path of unit links: each other node hangs on two links side by side. The far component has no terminal.
    [Fact]
    public void Terminals_have_0_and_components_without_one_infinity()
    {
        Network network = TestNetworks.Unit((0, 1), (1, 2), (2, 3), (3, 4), (10, 11), (11, 12), (12, 10), (20, 21));
        int[] terminals = [network.Node(0), network.Node(2), network.Node(4), network.Node(20)];
        foreach (Route route in new[] { Route.Exact, Route.Probe })
        {
            (double[] values, double[] errors) = Run(network, terminals, new EstimatePlan { Route = route, Want = Want.Nodes }, out TerminalFacts facts);
            Assert.Equal(0, values[network.Node(2)]);
            Assert.Equal(0.5, values[network.Node(1)], 1e-6);
            Assert.Equal(0.5, values[network.Node(3)], 1e-6);
            Assert.Equal(1, values[network.Node(21)], 1e-6);
            Assert.Equal(double.PositiveInfinity, values[network.Node(11)]);
            Assert.Equal(0, errors[network.Node(11)]);
            Assert.Equal((3, 1), (facts.NodesWithout, facts.ComponentsWithout));
        }
        Assert.All(Run(network, [.. Enumerable.Range(0, network.NodeCount)], new EstimatePlan { Want = Want.Nodes }, out _).Values, r => Assert.Equal(0, r));
    }

    [Theory]
    [InlineData(Family.Preferential)]
    [InlineData(Family.SmallWorld)]
    [InlineData(Family.Road)]
    public void Probed_intervals_cover(Family family)
    {
        double held = 0, count = 0;
        for (ulong seed = 1; seed <= 10; seed++)
        {
            Network network = TestNetworks.Of(family, 400, seed: seed);
            int[] terminals = [.. Enumerable.Range(0, 8).Select(i => i * 49)];
            double[] dense = Dense(network, terminals);
            (double[] values, double[] errors) =
                Run(network, terminals, new EstimatePlan { Route = Route.Probe, Probes = 64, Want = Want.Nodes, Seed = seed }, out TerminalFacts facts);
            Assert.Equal(64, facts.Probes);
            for (int u = 0; u < values.Length; u++)
            {
                if (errors[u] == 0)
                {
                    Assert.Equal(dense[u], values[u], 1e-9); // a terminal, or joined by bridges
                    continue;
                }
                count++;
                held += Math.Abs(values[u] - dense[u]) <= 1.96 * errors[u] ? 1 : 0;
            }
        }
        Assert.InRange(held / count, 0.92, 0.98);
    }

    private static double[] Dense(Network network, int[] terminals)
    {
        int[] others = [.. Enumerable.Range(0, network.NodeCount).Except(terminals)];
        Matrix<double> laplacian = network.DenseLaplacian();
        Matrix<double> inverse = Matrix<double>.Build.Dense(others.Length, others.Length, (i, j) => laplacian[others[i], others[j]])
            .Cholesky().Solve(Matrix<double>.Build.DenseIdentity(others.Length));
        double[] values = new double[network.NodeCount];
        for (int i = 0; i < others.Length; i++)
            values[others[i]] = inverse[i, i];
        return values;
    }

    private static (double[] Values, double[] Errors) Run(Network network, int[] terminals, EstimatePlan plan, out TerminalFacts facts)
    {
        MemorySink sink = new();
        facts = EstimateRun.Execute(network, plan, new EstimateInputs { Terminals = terminals }, sink, new SilentObserver(), default).Terminals!;
        return (sink["nodes"].Column<double>("resistance_to_terminals"), sink["nodes"].Column<double>("resistance_to_terminals_se"));
    }
}
