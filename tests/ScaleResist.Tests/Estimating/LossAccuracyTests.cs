// The probed loss of links against the exact route, which LossImpactTests holds to dense differences: error, coverage, ranking.

using MathNet.Numerics.Distributions;
using ScaleResist.DataGen.Networks;
using ScaleResist.Graphs;
using ScaleResist.Runs;
using ScaleResist.Tests.Runs;
using Xunit.Abstractions;

namespace ScaleResist.Tests.Estimating;

public sealed class LossAccuracyTests(ITestOutputHelper output)
{
    [Theory]
    [InlineData(Family.Preferential, 1000, 5000L, 0)]
    [InlineData(Family.SmallWorld, 1000, 3000L, 0)]
    [InlineData(Family.Grid, 900, null, 0)]
    [InlineData(Family.Road, 1000, null, 0)]
    [InlineData(Family.Grid, 900, null, 4)]
    [InlineData(Family.Fringe, 1000, null, 0)]
    public void Intervals_cover_and_errors_are_as_foretold(Family family, int nodes, long? links, double decades)
    {
        foreach (int probes in new[] { 16, 32, 128 })
        {
            double held = 0, count = 0, squares = 0, foretold = 0;
            for (ulong seed = 1; seed <= 5; seed++)
            {
                Network network = TestNetworks.Of(family, nodes, links, seed, decades);
                (double h, double c, double s, double f) = Compare(network, probes, seed);
                held += h; count += c; squares += s; foretold += f;
            }
            output.WriteLine($"{family} {decades} K={probes}: covered {held / count:0.000}, rms {Math.Sqrt(squares / count):0.000}, foretold {Math.Sqrt(foretold / count):0.000}");
        }
    }

    [Fact]
    public void Power()
    {
        Network network = TestNetworks.Open("power.tsv");
        foreach (int probes in new[] { 32, 64, 128 })
        {
            (double h, double c, double s, double f) = Compare(network, probes, 1);
            output.WriteLine($"power K={probes}: covered {h / c:0.000}, rms {Math.Sqrt(s / c):0.000}, foretold {Math.Sqrt(f / c):0.000}");
            double?[] truth = Run(network, new EstimatePlan { Route = Route.Exact, Want = Want.Links })["links"].Column<double?>("loss_impact");
            for (ulong seed = 1; seed <= 10; seed++)
            {
                double?[] found = Run(network, new EstimatePlan { Route = Route.Probe, Probes = probes, Seed = seed, Want = Want.Links })["links"].Column<double?>("loss_impact");
                int[] top = [.. Enumerable.Range(0, found.Length).OrderByDescending(i => found[i] ?? 0).Take(20)];
                int[] best = [.. Enumerable.Range(0, found.Length).OrderByDescending(i => truth[i] ?? 0).Take(10)];
                output.WriteLine($"in top 20: {best.Count(top.Contains)} of 10");
            }
            output.WriteLine(string.Join(" ", truth.Select(t => t ?? 0).OrderDescending().Take(25).Select(t => t.ToString("0.00e0"))));
        }
    }

    private static (double Held, double Count, double Squares, double Foretold) Compare(Network network, int probes, ulong seed)
    {
        double?[] truth = Run(network, new EstimatePlan { Route = Route.Exact, Want = Want.Links })["links"].Column<double?>("loss_impact");
        MemoryTable found = Run(network, new EstimatePlan { Route = Route.Probe, Probes = probes, Seed = seed, Want = Want.Links })["links"];
        double?[] values = found.Column<double?>("loss_impact"), errors = found.Column<double?>("loss_impact_se");
        double quantile = Normal.InvCDF(0, 1, 0.975), held = 0, count = 0, squares = 0, foretold = 0;
        for (int i = 0; i < truth.Length; i++)
        {
            Assert.Equal(truth[i] is null, values[i] is null);
            if (truth[i] is not double t)
                continue;
            double relative = errors[i]!.Value / values[i]!.Value;
            count++;
            held += Math.Abs(Math.Log(values[i]!.Value / t)) <= quantile * relative ? 1 : 0;
            squares += Math.Pow((values[i]!.Value / t) - 1, 2);
            foretold += relative * relative;
        }
        return (held, count, squares, foretold);
    }

    private static MemorySink Run(Network network, EstimatePlan plan)
    {
        MemorySink sink = new();
        EstimateRun.Execute(network, plan, new EstimateInputs(), sink, new SilentObserver(), default);
        return sink;
    }
}
