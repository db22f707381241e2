// From options to a request: defaults and meanings.

using ScaleResist.Cli.Commands;
using ScaleResist.Graphs;
using ScaleResist.Runs;

namespace ScaleResist.Tests.Cli;

public sealed class Estimate_requests
{
    private static readonly EstimateOptions Least = new() { Network = "n.csv", Lake = "l" };

    private static EstimateRequest Valid(EstimateOptions options) =>
        EstimateValidation.Validate(options, DateTimeOffset.UnixEpoch, out string problem)
            ?? throw new InvalidOperationException(problem);

    [Fact]
    public void Defaults_are_the_contracts()
    {
        EstimateRequest request = Valid(Least);
        Assert.Equal(Want.Index | Want.Components | Want.Nodes | Want.Links, request.Plan.Want);
        Assert.Equal((null, null, 64), (request.Plan.Probes, request.Plan.TargetError, request.Plan.MostProbes));
        Assert.Equal(0.95, request.Plan.Confidence);
        Assert.Equal(1ul, request.Plan.Seed);
        Assert.Equal(WeightMeaning.Unsaid, request.Reading.Weights);
        Assert.Null(request.Reading.Columns);
        Assert.Equal("n-19700101T000000Z", request.RunId);
    }

    [Fact]
    public void Pairs_are_added_to_what_is_wanted()
    {
        Assert.Equal(Want.Links | Want.Pairs, Valid(Least with { Want = "links", Pairs = "p.csv" }).Plan.Want);
        Assert.True(Valid(Least with { Pairs = "p.csv" }).Plan.Want.HasFlag(Want.Pairs | Want.Index));
    }

    [Fact]
    public void A_target_error_leaves_the_number_of_probes_open_and_the_route_automatic()
    {
        EstimatePlan plan = Valid(Least with { TargetError = "0.02", TimeBudget = "4h" }).Plan;
        Assert.Equal((null, 0.02, 4096, Route.Auto), (plan.Probes, plan.TargetError, plan.MostProbes, plan.Route));
        Assert.Equal(TimeSpan.FromHours(4), plan.TimeBudget);
    }

    [Fact]
    public void Values_arrive_as_given()
    {
        EstimateRequest request = Valid(Least with
        {
            Want = "coordinates, index",
            Weights = "resistance",
            Columns = "from, to ,km",
            Probes = "4096",
            Confidence = "0.9",
            Seed = "18446744073709551615",
            Threads = "256",
            Route = "probe",
            RunId = "x",
            NodeWeights = "w.csv",
        });
        Assert.Equal(Want.Coordinates | Want.Index, request.Plan.Want);
        Assert.Equal(WeightMeaning.Resistance, request.Reading.Weights);
        Assert.Equal(["from", "to", "km"], request.Reading.Columns!);
        Assert.Equal((4096, 0.9, ulong.MaxValue, 256),
            (request.Plan.Probes!.Value, request.Plan.Confidence, request.Plan.Seed, request.Plan.Threads));
        Assert.Equal("x", request.RunId);
        Assert.Equal("w.csv", request.NodeWeights);
    }
}
