// The one-dimensional likelihood: its maximum, its bounds, its information.

using CsCheck;
using ScaleResist.Estimating;

namespace ScaleResist.Tests.Estimating;

public class LinkLikelihoodTests
{
    [Fact]
    public void Maximum_is_the_best_of_a_fine_grid()
    {
        Gen<double> spread = Gen.Double[-9, 2].Select(x => Math.Pow(10, x));
        Gen.Select(spread, spread).Sample(
            (a, e) =>
            {
                double s = LinkLikelihood.Maximise(a, e);
                Assert.InRange(s, 0, 1);
                double reached = Value(s, a, e);
                for (int i = 1; i < 2000; i++)
                {
                    double t = 1 / (1 + Math.Exp(-((i - 1000) / 45.0)));
                    Assert.True(reached <= Value(t, a, e) + 1e-7, $"a={a:R} e={e:R}: s={s:R} loses to {t:R}");
                }
            },
            iter: 2000, seed: "0N0XIzNsQ0O2");

        static double Value(double s, double a, double e) => Math.Log(s) + Math.Log(1 - s) + (a / s) + (e / (1 - s));
    }

    [Theory]
    [InlineData(1e-6)]
    [InlineData(0.03)]
    [InlineData(0.5)]
    [InlineData(0.97)]
    [InlineData(1 - 1e-6)]
    public void Expected_squares_give_the_true_value(double s) =>
        Assert.Equal(s, LinkLikelihood.Maximise(s, 1 - s), 1e-9);

    [Fact]
    public void Residuals_of_zero_pin_the_resistance_to_its_bounds()
    {
        LinkBounds bounds = LinkBounds.Of(2, 5, 9);
        Assert.Equal(bounds.Lower, LinkLikelihood.Estimate(bounds, 0, 3, 16, 1.96).Value, 1e-12);
        Assert.Equal(0.5, LinkLikelihood.Estimate(bounds, 3, 0, 16, 1.96).Value, 1e-12);
    }

    [Fact]
    public void Lower_bound_is_the_resistance_when_all_other_neighbours_are_shorted()
    {
        // Nodes 1 and 2 joined by c = 2; all else of either (3 and 7) leads to one node: R = 1 / (2 + 1/(1/3 + 1/7)).
        LinkBounds bounds = LinkBounds.Of(2, 5, 9);
        Assert.Equal(1 / (2 + (1 / ((1.0 / 3) + (1.0 / 7)))), bounds.Lower, 1e-14);
        Assert.Equal(bounds.Upper - bounds.Lower, bounds.Range, 1e-14);
    }

    [Theory]
    [InlineData(0.01)]
    [InlineData(0.3)]
    [InlineData(0.5)]
    [InlineData(0.9)]
    public void Standard_error_and_coverage_hold_for_normal_residuals(double s)
    {
        // x1 ~ N(0, s), x2 ~ N(0, 1-s), K = 64, 4,000 repetitions: the spread equals the error claimed within 5 %, 95 % intervals
        // cover 93.5 to 96.5 %.
        const int probes = 64, repetitions = 4000;
        MathNet.Numerics.Distributions.ChiSquared squares = new(probes, new Random(1));
        LinkBounds bounds = LinkBounds.Of(1, 3, 3);
        double truth = bounds.Lower + (s * bounds.Range);
        double sum = 0, sumOfSquares = 0, claimed = 0;
        int covered = 0;
        for (int i = 0; i < repetitions; i++)
        {
            Estimate estimate = LinkLikelihood.Estimate(
                bounds, squares.Sample() * s * bounds.Range, squares.Sample() * (1 - s) * bounds.Range, probes, Quantiles.Normal(0.95));
            sum += estimate.Value;
            sumOfSquares += estimate.Value * estimate.Value;
            claimed += estimate.StandardError;
            Assert.InRange(estimate.Value, estimate.Lower, estimate.Upper);
            Assert.InRange(estimate.Lower, bounds.Lower, bounds.Upper);
            Assert.InRange(estimate.Upper, bounds.Lower, bounds.Upper);
            if (truth >= estimate.Lower && truth <= estimate.Upper)
                covered++;
        }
        double mean = sum / repetitions;
        double spread = Math.Sqrt((sumOfSquares / repetitions) - (mean * mean));
        Assert.InRange(claimed / repetitions / spread, 0.95, 1.05);
        Assert.InRange((double)covered / repetitions, 0.935, 0.965);
        Assert.Equal(truth, mean, 5 * spread / Math.Sqrt(repetitions) + (0.02 * spread) + (truth * 0.002));
    }
}
