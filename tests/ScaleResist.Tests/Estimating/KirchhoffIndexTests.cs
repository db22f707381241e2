// The Kirchhoff index of open networks against their reference values, over seeds; Foster's sum beside it.
// Reference values: the README beside the data (numpy and scipy, two methods that agree to all digits).

using ScaleResist.Estimating;
using ScaleResist.Graphs;
using ScaleResist.Runs;
using ScaleResist.Tests.Runs;
using Xunit.Abstractions;

namespace ScaleResist.Tests.Estimating;

public class KirchhoffIndexTests(ITestOutputHelper output)
{
    [Theory]
    [Trait("Category", "Slow")]
    [InlineData("power.tsv", WeightMeaning.None, 63769632.8041)]
    [InlineData("as-22july06.tsv", WeightMeaning.None, 365839474.062)]
    [InlineData("netscience.tsv", WeightMeaning.Conductance, 294465.663)]
    [InlineData("lesmis.tsv", WeightMeaning.Conductance, 1958.278644)]
    public void Intervals_of_95_percent_cover_the_value_at_least_35_times_in_40(string file, WeightMeaning weights, double truth) =>
        Cover(file, weights, truth, seeds: 40, least: 35);

    [Theory]
    [InlineData("netscience.tsv", WeightMeaning.Conductance, 294465.663)]
    [InlineData("netscience.tsv", WeightMeaning.None, 148257.765)]
    [InlineData("lesmis.tsv", WeightMeaning.Conductance, 1958.278644)]
    [InlineData("lesmis.tsv", WeightMeaning.None, 3016.57623)]
    [InlineData("karate.tsv", WeightMeaning.None, 470.268185)]
    [InlineData("dolphins.tsv", WeightMeaning.None, 1864.345188)]
    [InlineData("us-states.tsv", WeightMeaning.None, 1512.368381)]
    public void Intervals_cover_small_open_networks(string file, WeightMeaning weights, double truth) =>
        Cover(file, weights, truth, seeds: 40, least: 35);

    [Theory]
    [InlineData("power.tsv", 63769632.8041)]
    [InlineData("as-22july06.tsv", 365839474.062)]
    public void Intervals_cover_larger_open_networks(string file, double truth) =>
        Cover(file, WeightMeaning.None, truth, seeds: 4, least: 3);

    private void Cover(string file, WeightMeaning weights, double truth, ulong seeds, int least)
    {
        Network network = TestNetworks.Open(file, weights);
        int covered = 0, fosterWithin = 0;
        double worstFoster = 0, sum = 0;
        for (ulong seed = 1; seed <= seeds; seed++)
        {
            EstimateSummary summary = EstimateRun.Execute(
                network, new EstimatePlan { Want = Want.Index, Route = Route.Probe, Seed = seed }, new EstimateInputs(), new MemorySink(), new SilentObserver(), default);
            Estimate index = summary.Index[0].KirchhoffIndex;
            sum += index.Value;
            if (truth >= index.Lower && truth <= index.Upper)
                covered++;
            double foster = Math.Abs((summary.FosterSum!.Value / (summary.Nodes - summary.Components)) - 1);
            worstFoster = Math.Max(worstFoster, foster);
            if (foster <= 0.01)
                fosterWithin++;
        }
        output.WriteLine($"{file} {weights}: {covered} of {seeds}, mean {sum / seeds / truth:0.0000} of the value, Foster within 1 % {fosterWithin} times, at worst {worstFoster:0.0000}");
        Assert.True(covered >= least, $"{covered} of {seeds}");
        if (network.NodeCount > 300)
            Assert.Equal((int)seeds, fosterWithin);
        else
            Assert.InRange(worstFoster, 0, 0.02); // below a hundred nodes one standard error of the sum itself is 0.4 to 0.6 %
    }
}
