// Node diagonals, pairs, coordinates and weighted indices against a dense L+ (MathNet.Numerics).

using MathNet.Numerics.LinearAlgebra;
using ScaleResist.DataGen.Networks;
using ScaleResist.Estimating;
using ScaleResist.Graphs;
using ScaleResist.Runs;
using ScaleResist.Tests.Runs;

namespace ScaleResist.Tests.Estimating;

public class NodeAndPairTests
{
    public static TheoryData<Family, double> Families => new()
    {
        { Family.Preferential, 0 }, { Family.SmallWorld, 0 }, { Family.Grid, 2 }, { Family.Road, 0 },
    };

    [Theory]
    [MemberData(nameof(Families))]
    public void Node_intervals_cover_and_errors_are_true(Family family, double decades)
    {
        Network network = TestNetworks.Of(family, 400, decades: decades);
        Matrix<double> exact = network.DensePseudoInverse();
        int covered = 0;
        double squares = 0, claimed = 0;
        const int seeds = 25;
        for (ulong seed = 1; seed <= seeds; seed++)
        {
            Estimate[] diagonals = new Probing(network, 32, seed).Nodes.Diagonals(Quantiles.Normal(0.95));
            for (int u = 0; u < network.NodeCount; u++)
            {
                Estimate l = diagonals[u];
                double truth = exact[u, u];
                squares += (l.Value - truth) * (l.Value - truth) / truth / truth;
                claimed += l.StandardError * l.StandardError / truth / truth;
                if (truth >= l.Lower && truth <= l.Upper)
                    covered++;
            }
        }
        Assert.InRange((double)covered / seeds / network.NodeCount, 0.92, 0.98);
        Assert.InRange(Math.Sqrt(claimed / squares), 0.85, 1.15);
    }

    [Theory]
    [MemberData(nameof(Families))]
    public void Pair_intervals_cover_linked_and_unlinked_pairs(Family family, double decades)
    {
        Network network = TestNetworks.Of(family, 400, decades: decades);
        Matrix<double> exact = network.DensePseudoInverse();
        Random random = new(3);
        (int U, int V)[] pairs = [.. Enumerable.Range(0, 300).Select(_ => (random.Next(network.NodeCount), random.Next(network.NodeCount)))];
        int covered = 0, counted = 0;
        for (ulong seed = 1; seed <= 25; seed++)
        {
            MemorySink sink = Run(network, new EstimatePlan { Want = Want.Pairs, Route = Route.Probe, Probes = 32, Seed = seed, ModeError = 1e-3 }, pairs);
            double[] lower = sink["pairs"].Column<double>("resistance_lower"), upper = sink["pairs"].Column<double>("resistance_upper");
            for (int i = 0; i < pairs.Length; i++)
            {
                if (pairs[i].U == pairs[i].V)
                    continue;
                double truth = exact.Resistance(pairs[i].U, pairs[i].V);
                counted++;
                if (truth >= lower[i] * (1 - 1e-12) && truth <= upper[i] * (1 + 1e-12))
                    covered++;
            }
        }
        Assert.InRange((double)covered / counted, 0.91, 0.985);
    }

    [Fact]
    public void Coordinates_give_every_pair_its_resistance()
    {
        Network network = TestNetworks.Of(Family.SmallWorld, 200, decades: 1);
        Matrix<double> exact = network.DensePseudoInverse();
        const int probes = 400;
        MemorySink sink = Run(network, new EstimatePlan { Want = Want.Coordinates, Route = Route.Probe, Probes = probes, ModeError = 1e-3 }, null);
        float[] r = sink["coordinates"].Column<float>("r");
        double squares = 0;
        int count = 0;
        for (int u = 0; u < 200; u += 3)
        {
            for (int v = u + 1; v < 200; v += 5)
            {
                long arc = network.FindArc(u, v);
                double c = arc < 0 ? 0 : network.Conductance(arc);
                double du = network.Strengths[u], dv = network.Strengths[v];
                double sum = 0;
                for (int k = 0; k < probes; k++)
                    sum += Math.Pow(r[(u * probes) + k] - r[(v * probes) + k], 2);
                double estimate = (1 / du) + (1 / dv) - (2 * c / (du * dv)) + (sum / probes);
                squares += Math.Pow((estimate / exact.Resistance(u, v)) - 1, 2);
                count++;
            }
        }
        // The probed part has relative error sqrt(2/400) = 0.07, and is less than all of R.
        Assert.InRange(Math.Sqrt(squares / count), 0, 0.05);
    }

    [Fact]
    public void Weighted_indices_equal_dense_values_within_their_spread()
    {
        // Degree-Kirchhoff = sum d_u d_v R = 2 m_c Kemeny (Chen & Zhang 2007, from memory); Kemeny's constant here from the eigenvalues of
        // the random walk, sum over i > 1 of 1/(1 - lambda_i).
        Network network = TestNetworks.Of(Family.SmallWorld, 250, decades: 1);
        int n = network.NodeCount;
        Matrix<double> exact = network.DensePseudoInverse();
        double[] w = [.. Enumerable.Range(0, n).Select(u => 1.0 + (u % 7))];
        double degree = 0, weighted = 0;
        for (int u = 0; u < n; u++)
        {
            for (int v = u + 1; v < n; v++)
            {
                degree += network.Strengths[u] * network.Strengths[v] * exact.Resistance(u, v);
                weighted += w[u] * w[v] * exact.Resistance(u, v);
            }
        }
        Matrix<double> normalised = network.DenseLaplacian()
            .MapIndexed((u, v, value) => value / Math.Sqrt(network.Strengths[u] * network.Strengths[v]));
        double kemeny = normalised.Evd(Symmetricity.Symmetric).EigenValues.Select(x => x.Real).Order().Skip(1).Sum(x => 1 / x);
        EstimateSummary summary = EstimateRun.Execute(
            network, new EstimatePlan { Want = Want.Index, Route = Route.Probe, Probes = 512 }, new EstimateInputs { NodeWeights = w },
            new MemorySink(), new SilentObserver(), default);
        IndexEntry index = summary.Index[0];
        Assert.InRange(index.DegreeKirchhoffIndex / degree, 0.99, 1.01);
        Assert.InRange(index.NodeWeightedKirchhoffIndex!.Value / weighted, 0.98, 1.02);
        Assert.InRange(index.KemenyConstant / kemeny, 0.99, 1.01);
        Assert.Equal(index.DegreeKirchhoffIndex, 2 * index.TotalConductance * index.KemenyConstant, index.DegreeKirchhoffIndex * 1e-12);
    }

    [Fact]
    public void Resistance_across_components_is_infinite_and_to_itself_zero()
    {
        Network network = TestNetworks.Of((1, 2, 1), (2, 3, 0.1), (3, 4, 1), (10, 11, 2), (11, 12, 2), (12, 10, 2));
        (int, int)[] pairs = [(network.Node(1), network.Node(10)), (network.Node(2), network.Node(2)), (network.Node(2), network.Node(3))];
        MemoryTable table = Run(network, new EstimatePlan { Want = Want.Pairs, Route = Route.Probe, Probes = 8 }, pairs)["pairs"];
        Assert.Equal([double.PositiveInfinity, 0, 10], table.Column<double>("resistance"));
        Assert.Equal(["exact", "exact", "bridge"], table.Column<string>("method"));
    }

    private static MemorySink Run(Network network, EstimatePlan plan, (int, int)[]? pairs)
    {
        MemorySink sink = new();
        EstimateRun.Execute(network, plan, new EstimateInputs { Pairs = pairs }, sink, new SilentObserver(), default);
        return sink;
    }
}
