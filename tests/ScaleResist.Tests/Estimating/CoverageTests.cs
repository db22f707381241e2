// The table of coverage, thinner: every family at 32 probes and more, against the exact route (itself tested against dense inverses and closed forms).

using ScaleResist.Bench.Coverage;
using ScaleResist.DataGen.Networks;
using ScaleResist.Graphs;
using Xunit.Abstractions;

namespace ScaleResist.Tests.Estimating;

public sealed class CoverageTests(ITestOutputHelper output)
{
    private const int Seeds = 80;

    public static TheoryData<Family, int> Cells
    {
        get
        {
            TheoryData<Family, int> data = [];
            foreach (Family family in Enum.GetValues<Family>())
            {
                data.Add(family, 32);
                data.Add(family, 64);
            }
            return data;
        }
    }

    // Bounds of 93 to 97 %, and on either side three standard errors of the sample: binomial for the index (one a seed), from the spread between
    // seeds for rows, which share modes. Where rounding and the solver are the only error (complete, star), intervals may hold more often.
    [Theory]
    [MemberData(nameof(Cells))]
    [Trait("Category", "Slow")]
    public void Intervals_cover_as_often_as_they_say(Family family, int probes)
    {
        Network network = TestNetworks.Of(family, family == Family.Complete ? 100 : 500);
        CoverageTrial trial = new(network, 300);
        if (ClosedForms.Kirchhoff(family, network.Components[0].Nodes) is double closed)
            Assert.Equal(1, trial.Kirchhoff / closed, 1e-9);
        Dictionary<Quantity, Count> cell = trial.Measure(probes, Seeds, Environment.ProcessorCount);
        Assert.InRange(trial.WorstUnprobed, 0, 1e-9);
        foreach (Quantity quantity in new[] { Quantity.Nodes, Quantity.Pairs, Quantity.Index, Quantity.Ranks })
        {
            Count count = cell[quantity];
            if (!count.Any)
                continue;
            double slack = 3 * (quantity == Quantity.Index ? Math.Sqrt(0.95 * 0.05 / Seeds) : count.ShareError);
            output.WriteLine($"{quantity}: {count.Share:0.000}, slack {slack:0.000}, error {count.Error:0.0e+0}");
            bool atMost = quantity == Quantity.Ranks || count.Error < Negligible;
            Assert.InRange(count.Share, 0.93 - slack, atMost ? 1 : 0.97 + slack);
        }
    }

    private const double Negligible = 1e-4;
}
