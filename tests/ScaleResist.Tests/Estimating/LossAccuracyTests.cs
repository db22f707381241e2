// The probed loss of links against the exact route, which LossImpactTests holds to dense differences: error, coverage, ranking.

using MathNet.Numerics.Distributions;
using ScaleResist.DataGen.Networks;
using ScaleResist.Graphs;
using ScaleResist.Runs;
using ScaleResist.Tests.Runs;

namespace ScaleResist.Tests.Estimating;

public sealed class LossAccuracyTests
{
    // Plain squares, sqrt(2/K), would be off by 0.25 at K = 32: what the two entries that the other probes know are worth shows in the bounds.
    [Theory]
    [InlineData(Family.Preferential, 1000, 5000L, 0, 0.07)]
    [InlineData(Family.SmallWorld, 1000, 3000L, 0, 0.16)]
    [InlineData(Family.Grid, 900, null, 0, 0.22)]
    [InlineData(Family.Grid, 900, null, 4, 0.30)]
    [InlineData(Family.Road, 1000, null, 0, 0.35)]
    [InlineData(Family.Fringe, 1000, null, 0, 0.25)]
    public void Intervals_cover_and_errors_are_as_foretold(Family family, int nodes, long? links, double decades, double most)
    {
        double held = 0, count = 0, squares = 0, foretold = 0;
        for (ulong seed = 1; seed <= 3; seed++)
        {
            (double h, double c, double s, double f) = Compare(TestNetworks.Of(family, nodes, links, seed, decades), 32, seed);
            (held, count, squares, foretold) = (held + h, count + c, squares + s, foretold + f);
        }
        Assert.InRange(held / count, 0.90, 0.98);
        Assert.InRange(Math.Sqrt(squares / count), 0, most);
        Assert.InRange(Math.Sqrt(squares / foretold), 0.8, 1.25);
    }

    [Fact]
    public void In_the_power_network_128_probes_find_the_ten_worst_losses_among_their_first_twenty()
    {
        Network network = TestNetworks.Open("power.tsv");
        (double held, double count, _, _) = Compare(network, 128, 1);
        Assert.InRange(held / count, 0.93, 0.97);
        IReadOnlyList<CriticalLink> truth = Critical(network, new EstimatePlan { Route = Route.Exact, Want = Want.Links });
        for (ulong seed = 1; seed <= 3; seed++)
        {
            IReadOnlyList<CriticalLink> found = Critical(network, new EstimatePlan { Route = Route.Probe, Probes = 128, Seed = seed, Want = Want.Links });
            (string, string)[] first = [.. found.Select(link => (link.Source, link.Target))];
            Assert.Equal(20, found.Count);
            Assert.All(truth.Take(10), link => Assert.Contains((link.Source, link.Target), first));
            // The rank intervals hold the true ranks of most.
            Assert.InRange(truth.Count(link => found.Any(other => (other.Source, other.Target) == (link.Source, link.Target)
                && other.LossRankLower <= link.LossRank && link.LossRank <= other.LossRankUpper)), 10, 20);
            Assert.All(found, link => Assert.True(link.LossRankLower <= link.LossRank && link.LossRank <= link.LossRankUpper));
        }

        static IReadOnlyList<CriticalLink> Critical(Network network, EstimatePlan plan) =>
            [.. EstimateRun.Execute(network, plan, new EstimateInputs(), new MemorySink(), new SilentObserver(), default)
                .CriticalLinks.Where(link => link.LossRank is not null)];
    }

    [Fact]
    public void Probed_impacts_are_the_same_to_the_bit_with_1_2_and_3_threads()
    {
        Network network = TestNetworks.Of(Family.Fringe, 12_000);
        double?[] one = Impacts(1);
        Assert.Equal(one, Impacts(2));
        Assert.Equal(one, Impacts(3));

        double?[] Impacts(int threads) => Run(
            network, new EstimatePlan { Route = Route.Probe, Probes = 40, Threads = threads, Want = Want.Links })["links"].Column<double?>("loss_impact");
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
