// The interval of an index that few modes dominate, and the solver's part of an error bar where probes have nothing left to say.

using ScaleResist.DataGen.Networks;
using ScaleResist.Estimating;
using ScaleResist.Graphs;

namespace ScaleResist.Tests.Estimating;

public sealed class IndexIntervalTests
{
    // A ladder too small to be deflated: modes as 1/i^2, so that a sample is nearly one chi-square. Student's interval covers 92 %: 0.9 % below the
    // bound, twice the standard error of 3,000 seeds.
    [Fact]
    public void An_index_of_few_modes_is_covered()
    {
        Network network = TestNetworks.Of(Family.Ladder, 60);
        double truth = SmallIndex(network);
        const int seeds = 3000;
        int covered = 0, below = 0;
        for (ulong seed = 1; seed <= seeds; seed++)
        {
            Estimate index = new Probing(network, 32, seed).Nodes.KirchhoffIndex(0, 0.95);
            covered += truth >= index.Lower && truth <= index.Upper ? 1 : 0;
            below += truth > index.Upper ? 1 : 0;
        }
        Assert.InRange((double)covered / seeds, 0.93, 0.97);
        Assert.InRange((double)below / seeds, 0.01, 0.045); // both ends do their part
    }

    // Moments of 1, 2, 4, 8 and the interval by hand from Hall 1992 (J. R. Statist. Soc. B 54, 221), for t = 2.
    [Fact]
    public void The_interval_is_that_of_the_cubic_transformation()
    {
        RunningMoments moments = default;
        double[] samples = [1, 2, 4, 8];
        foreach (double sample in samples)
            moments.Add(sample);
        double mean = 3.75, deviation = Math.Sqrt(samples.Sum(x => Math.Pow(x - mean, 2)) / 3);
        double skewness = samples.Average(x => Math.Pow(x - mean, 3)) / Math.Pow(samples.Average(x => Math.Pow(x - mean, 2)), 1.5);
        (double lower, double upper) = moments.Interval(2);
        Assert.Equal(2 / Math.Sqrt(4), Transformed((mean - lower) / deviation), 1e-12);
        Assert.Equal(-2 / Math.Sqrt(4), Transformed((mean - upper) / deviation), 1e-12);

        double Transformed(double t) => t + (skewness * t * t / 3) + (skewness * skewness * t * t * t / 27) + (skewness / 24);
    }

    [Fact]
    public void Samples_without_skewness_have_the_interval_of_Student()
    {
        RunningMoments moments = default;
        foreach (double sample in new double[] { 1, 2, 3, 4, 5 })
            moments.Add(sample);
        (double lower, double upper) = moments.Interval(2);
        Assert.Equal(3 - (2 * moments.StandardError), lower, 1e-12);
        Assert.Equal(3 + (2 * moments.StandardError), upper, 1e-12);
    }

    // All links of a complete network are told by their ends: R = 2/n, l = (n-1)/n^2, Kf = n-1 (Lukovits, Nikolic & Trinajstic 1999).
    [Fact]
    public void Where_the_ends_tell_all_the_error_bar_is_the_solvers()
    {
        Network network = TestNetworks.Of(Family.Complete, 60);
        Blocks blocks = Blocks.Find(network);
        NodeSums nodes = new(blocks, null);
        const double modeError = 0.01;
        Probing.Panels(network, 32, 1, modeError, panel => nodes.Add(panel, 1));
        foreach (Estimate l in nodes.Diagonals(Quantiles.Normal(0.95)))
            Holds(l, 59 / 3600.0);
        Holds(nodes.KirchhoffIndex(0, 0.95), 59);

        static void Holds(Estimate found, double truth)
        {
            Assert.InRange(truth, found.Lower * (1 - 1e-12), found.Upper * (1 + 1e-12));
            Assert.InRange(found.StandardError / truth, 0.5 * modeError * modeError, 1.1 * modeError * modeError);
            Assert.InRange(Math.Abs((found.Value / truth) - 1), 0, modeError * modeError);
        }
    }

    private static double SmallIndex(Network network)
    {
        MathNet.Numerics.LinearAlgebra.Matrix<double> dense = network.DensePseudoInverse();
        return network.NodeCount * dense.Trace();
    }
}
