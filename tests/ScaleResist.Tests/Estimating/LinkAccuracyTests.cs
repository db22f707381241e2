// The accuracy of conditioned link estimates against plain projection on the same probes, and the coverage of their intervals.
// Reference: dense L+ by MathNet.Numerics (Cholesky).

using MathNet.Numerics.LinearAlgebra;
using ScaleResist.DataGen.Networks;
using ScaleResist.Estimating;
using ScaleResist.Graphs;
using Xunit.Abstractions;

namespace ScaleResist.Tests.Estimating;

public class LinkAccuracyTests(ITestOutputHelper output)
{
    [Theory]
    [InlineData(Family.Preferential, 1000, 0, 0.012)]
    [InlineData(Family.SmallWorld, 1000, 0, 0.021)]
    [InlineData(Family.Grid, 900, 0, 0.020)]
    [InlineData(Family.Road, 1000, 0, 0.032)]
    [InlineData(Family.Grid, 900, 4, 0.10)]
    public void Conditioned_links_are_within_a_few_hundredths_of_a_dense_inverse_at_16_probes(Family family, int nodes, double decades, double most)
    {
        Network network = TestNetworks.Of(family, nodes, decades: decades);
        Matrix<double> exact = network.DensePseudoInverse();
        double conditioned = 0, plain = 0;
        foreach (ulong seed in new ulong[] { 1, 2, 3, 4, 5 })
        {
            Probing probing = new(network, 16, seed);
            conditioned += MeanSquare(probing.Links(), exact, link => link.Resistance.Value);
            LinkResult[] links = probing.Links();
            plain += MeanSquare(
                [.. links.Select((link, i) => link with { Resistance = Estimate.Exact(probing.Plain[i]) }).Where((_, i) => !links[i].IsBridge)],
                exact, link => link.Resistance.Value);
        }
        output.WriteLine($"{family}: plain {Math.Sqrt(plain / 5):0.0000} conditioned {Math.Sqrt(conditioned / 5):0.0000} "
            + $"ratio {Math.Sqrt(plain / conditioned):0.00}");
        Assert.InRange(Math.Sqrt(conditioned / 5), 0, most);
        Assert.InRange(Math.Sqrt(plain / 5), 0.2, 0.4);
    }

    [Theory]
    [InlineData(Family.Preferential, 1000)]
    [InlineData(Family.SmallWorld, 1000)]
    [InlineData(Family.Grid, 900)]
    [InlineData(Family.Road, 1000)]
    public void Intervals_of_95_percent_cover_92_to_98_percent_of_links_at_32_probes(Family family, int nodes)
    {
        Network network = TestNetworks.Of(family, nodes);
        Matrix<double> exact = network.DensePseudoInverse();
        int covered = 0, counted = 0;
        for (ulong seed = 1; seed <= 10; seed++)
        {
            foreach (LinkResult link in new Probing(network, 32, seed).Links())
            {
                if (link.IsBridge)
                    continue;
                double truth = exact.Resistance(link.Source, link.Target);
                counted++;
                if (truth >= link.Resistance.Lower && truth <= link.Resistance.Upper)
                    covered++;
            }
        }
        double share = (double)covered / counted;
        output.WriteLine($"{family}: {share:0.0000} of {counted}");
        Assert.InRange(share, 0.92, 0.98);
    }

    [Theory]
    [Trait("Category", "Slow")]
    // Every family with links that are no bridges but those whose resistance probes cannot miss: complete (the bound itself) and cycle (one link for all).
    [InlineData(Family.Preferential, 1000, 0)]
    [InlineData(Family.SmallWorld, 1000, 0)]
    [InlineData(Family.Grid, 900, 0)]
    [InlineData(Family.Road, 1000, 0)]
    [InlineData(Family.PowerLaw, 1024, 0)]
    [InlineData(Family.Torus, 900, 0)]
    [InlineData(Family.Cube, 1000, 0)]
    [InlineData(Family.Hypercube, 1024, 0)]
    [InlineData(Family.Ladder, 1000, 0)]
    [InlineData(Family.Fringe, 1000, 0)]
    [InlineData(Family.Grid, 900, 4)]
    [InlineData(Family.SmallWorld, 1000, 6)]
    public void Intervals_of_95_percent_cover_93_to_97_percent_of_links_in_every_family(Family family, int nodes, double decades)
    {
        Network network = TestNetworks.Of(family, nodes, decades: decades);
        Matrix<double> exact = network.DensePseudoInverse();
        foreach ((int probes, ulong seeds) in new (int, ulong)[] { (32, 12), (64, 12), (256, 12) })
        {
            long covered = 0, counted = 0;
            for (ulong seed = 1; seed <= seeds; seed++)
            {
                foreach (LinkResult link in new Probing(network, probes, seed, 0.05 * Math.Sqrt(2.0 / probes)).Links())
                {
                    if (link.IsBridge)
                        continue;
                    double truth = exact.Resistance(link.Source, link.Target);
                    counted++;
                    covered += truth >= link.Resistance.Lower && truth <= link.Resistance.Upper ? 1 : 0;
                }
            }
            output.WriteLine($"{family} {decades}: {probes} probes {(double)covered / counted:0.0000} of {counted}");
            Assert.InRange((double)covered / counted, 0.93, 0.97);
        }
    }

    private static double MeanSquare(LinkResult[] links, Matrix<double> exact, Func<LinkResult, double> estimate)
    {
        double sum = 0;
        int count = 0;
        foreach (LinkResult link in links)
        {
            if (link.IsBridge)
                continue;
            double relative = (estimate(link) / exact.Resistance(link.Source, link.Target)) - 1;
            sum += relative * relative;
            count++;
        }
        return sum / count;
    }
}
