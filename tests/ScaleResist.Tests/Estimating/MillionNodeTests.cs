// A million nodes against closed forms: every link of a torus and of a hypercube has the same known resistance.

using ScaleResist.DataGen.Networks;
using ScaleResist.Estimating;
using ScaleResist.Graphs;
using ScaleResist.Runs;
using ScaleResist.Tests.Runs;
using Xunit.Abstractions;

namespace ScaleResist.Tests.Estimating;

public class MillionNodeTests(ITestOutputHelper output)
{
    [Theory]
    [Trait("Category", "Slow")]
    // Torus 1000 x 1000: closed form by its spectrum, recomputed: link 0.4999995, Kf 1.148169002248e12. Hypercube Q_20: 2^d sum C(d,k)/(2k),
    // rational, recomputed: Kf 58268726962.6373; link (2^d - 1)/(d 2^(d-1)) by Foster (1949) and symmetry, 0.09999990463.
    [InlineData(Family.Torus, 0.4999995, 1.148169002248e12)]
    [InlineData(Family.Hypercube, 0.09999990463, 58268726962.6373)]
    public void Links_and_index_of_a_million_nodes_equal_their_closed_forms(Family family, double link, double index)
    {
        Network network = TestNetworks.Of(family, 1_000_000);
        MemorySink sink = new();
        EstimateSummary summary = EstimateRun.Execute(
            network, new EstimatePlan { Route = Route.Probe, Probes = 32, Want = Want.Index | Want.Links }, new EstimateInputs(), sink, new SilentObserver(), default);
        double[] value = sink["links"].Column<double>("resistance");
        double[] lower = sink["links"].Column<double>("resistance_lower"), upper = sink["links"].Column<double>("resistance_upper");
        double mean = value.Average(), covered = lower.Zip(upper).Count(ends => ends.First <= link && link <= ends.Second) / (double)value.Length;
        double error = Math.Sqrt(value.Average(r => Math.Pow((r / link) - 1, 2)));
        Estimate kirchhoff = summary.Index[0].KirchhoffIndex;
        output.WriteLine($"{family}: links mean {mean / link:0.00000}, rms error {error:0.0000}, covered {covered:0.0000}; "
            + $"index {kirchhoff.Value / index:0.0000} +- {kirchhoff.StandardError / index:0.0000}");
        Assert.InRange(mean / link, 0.999, 1.001);
        Assert.InRange(covered, 0.92, 0.98);
        Assert.InRange(index, kirchhoff.Value - (3.5 * kirchhoff.StandardError), kirchhoff.Value + (3.5 * kirchhoff.StandardError));
    }
}
