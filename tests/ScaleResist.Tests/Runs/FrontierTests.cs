// Which points are on the frontier, by its definition; and that what a trial foresees is what the run of so many probes shows.

using CsCheck;
using ScaleResist.DataGen.Networks;
using ScaleResist.Graphs;
using ScaleResist.Runs;

namespace ScaleResist.Tests.Runs;

public sealed class FrontierTests
{
    [Fact]
    public void A_point_is_on_the_frontier_where_no_other_is_both_faster_and_more_accurate() =>
        Gen.Select(Gen.Int[0, 6], Gen.Int[0, 6]).Array[0, 12].Sample(pairs =>
        {
            FrontierPoint[] points = [.. pairs.Select((pair, i) => Point(i, pair.Item1, pair.Item2))];
            IReadOnlyList<FrontierPoint> marked = FrontierPoint.Mark(points);
            Assert.Equal(points.Select(point => point.Probes).Order(), marked.Select(point => point.Probes).Order());
            Assert.All(marked, point => Assert.Equal(
                !points.Any(other => other.PredictedSeconds < point.PredictedSeconds && other.Error < point.Error), point.OnFrontier));
            Assert.Equal(marked.Select(point => point.PredictedSeconds).Order(), marked.Select(point => point.PredictedSeconds));
        }, iter: 2000, seed: "0000000000000", threads: 1);

    [Theory]
    [InlineData("Grid")]
    [InlineData("Road")]
    [InlineData("Preferential")]
    [InlineData("SmallWorld")]
    public void Errors_of_larger_runs_are_foreseen_within_a_quarter(string family)
    {
        Network network = TestNetworks.Of(Enum.Parse<Family>(family), 2000);
        EstimatePlan plan = new() { Want = Want.Index | Want.Nodes | Want.Links };
        IReadOnlyList<FrontierPoint> points = Frontier.Of(network, plan, 0, () => new MemorySink(), new SilentObserver(), default);
        Assert.Equal([64, 128, 256, 512, 1024, 2048, 4096], points.Where(point => point.Probes is not null).Select(point => point.Probes!.Value).Order());
        Assert.Equal((0, 0), (points.Single(point => point.Route == Route.Exact).Error, points.Single(point => point.Route == Route.Exact).AchievedIndexError));
        foreach (int probes in (int[])[64, 128, 256, 512])
        {
            FrontierPoint point = points.Single(point => point.Probes == probes);
            MemorySink sink = new();
            EstimateRun.Execute(network, plan with { Route = Route.Probe, Probes = probes }, new EstimateInputs(), sink, new SilentObserver(), default);
            double rows = Math.Max(Percentile(sink, "links", "resistance"), Percentile(sink, "nodes", "resistance_diagonal"));
            double index = Percentile(sink, "index", "kirchhoff_index");
            Assert.InRange(point.PredictedError!.Value / rows, 0.75, 1.25);
            Assert.InRange(point.PredictedIndexError!.Value / index, 0.75, 1.25);
            if (probes == 64) // the run that was done: the very same numbers, from the tables
            {
                Assert.Equal(rows, point.AchievedError!.Value, 1e-9);
                Assert.Equal(index, point.AchievedIndexError!.Value, 1e-9);
                Assert.NotNull(point.AchievedSeconds);
            }
            else
            {
                Assert.Null(point.AchievedError);
                Assert.Null(point.AchievedSeconds);
            }
        }
    }

    [Fact]
    public void Of_a_tree_there_is_one_point_and_it_is_exact()
    {
        FrontierPoint point = Assert.Single(Frontier.Of(
            TestNetworks.Of(Family.Path, 50), new EstimatePlan(), 1, () => new MemorySink(), new SilentObserver(), default));
        Assert.Equal((Route.Exact, (int?)null, 0.0, true), (point.Route, point.Probes, point.Error, point.OnFrontier));
        Assert.True(point.AchievedSeconds > 1);
    }

    [Fact]
    public void Without_tables_of_rows_points_are_compared_by_the_index()
    {
        IReadOnlyList<FrontierPoint> points = Frontier.Of(
            TestNetworks.Of(Family.Grid, 400), new EstimatePlan { Want = Want.Index }, 0, () => new MemorySink(), new SilentObserver(), default);
        Assert.All(points, point => Assert.Null(point.PredictedError));
        Assert.All(points, point => Assert.Equal(point.PredictedIndexError, point.Error));
    }

    private static FrontierPoint Point(int number, double seconds, double error) => new()
    {
        Route = Route.Probe,
        Probes = number,
        PredictedError = error,
        PredictedIndexError = 1,
        PredictedSeconds = seconds,
        PredictedBytes = 1,
    };

    // By rank, as the dial's rule says: at least 95 % of the rows lie there or below.
    private static double Percentile(MemorySink sink, string table, string column)
    {
        string[] methods = sink[table].Column<string>("method");
        double[] errors = [.. sink[table].Column<double>(column + "_se").Zip(sink[table].Column<double>(column), (error, value) => error / value)
            .Where((_, i) => methods[i] == "probe").Order()];
        return errors[(int)Math.Ceiling(0.95 * errors.Length) - 1];
    }
}
