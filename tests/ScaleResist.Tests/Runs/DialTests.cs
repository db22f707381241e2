// The dial between accuracy and time: a target error against exact values, and that it takes no panel more than it needs; the clock.

using ScaleResist.DataGen.Networks;
using ScaleResist.Graphs;
using ScaleResist.Runs;

namespace ScaleResist.Tests.Runs;

public sealed class DialTests
{
    private const double Target = 0.02;
    private const Want Tables = Want.Index | Want.Nodes | Want.Links;

    public static TheoryData<string> Networks => ["Grid", "Road", "Preferential", "SmallWorld", "as-22july06.tsv", "power.tsv"];

    [Theory]
    [MemberData(nameof(Networks))]
    public void A_target_error_is_met_by_the_exact_values_and_not_one_panel_earlier(string name)
    {
        Network network = Named(name);
        MemorySink exact = Run(network, new EstimatePlan { Route = Route.Exact, Want = Tables }, out _);
        MemorySink found = Run(network, new EstimatePlan { Route = Route.Probe, Want = Tables, TargetError = Target }, out EstimateSummary summary);
        ProbingFacts facts = summary.Probing!;
        Assert.Equal(("target", 0), (facts.StoppedBy, facts.Probes % 16));
        Assert.InRange(facts.RelativeStandardError!.Value, 0, Target);
        Assert.Equal(facts.Probes, found["index"].Column<long>("probes")[0]);
        Assert.InRange(Observed("links", "resistance"), 0, 2 * Target);
        Assert.InRange(Observed("nodes", "resistance_diagonal"), 0, 2 * Target);
        // One sample: three standard errors and a little.
        Assert.InRange(found["index"].Column<double>("kirchhoff_index")[0] / exact["index"].Column<double>("kirchhoff_index")[0], 0.93, 1.07);
        // What the tables say is what the dial saw on a sample; other panels are solved to another error when their number is known.
        Assert.InRange(Claimed(found), 0, 1.02 * Target);
        if (facts.Probes > 32)
            Assert.True(Claimed(Run(network, new EstimatePlan { Route = Route.Probe, Want = Tables, Probes = facts.Probes - 16 }, out _)) > 0.98 * Target);

        double Observed(string table, string column) => Percentile(
            found[table].Column<double>(column).Zip(exact[table].Column<double>(column), (f, e) => Math.Abs((f / e) - 1))
                .Zip(found[table].Column<string>("method"), (error, method) => (error, method))
                .Where(row => row.method == "probe").Select(row => row.error));
    }

    // The largest of what the rule looks at, from the tables.
    private static double Claimed(MemorySink sink) => new[]
    {
        Relative(sink, "links", "resistance", "resistance_se"), Relative(sink, "nodes", "resistance_diagonal", "resistance_diagonal_se"),
        Relative(sink, "index", "kirchhoff_index", "kirchhoff_index_se"),
    }.Max();

    private static double Relative(MemorySink sink, string table, string value, string error)
    {
        double[] all = [.. sink[table].Column<double>(error).Zip(sink[table].Column<double>(value), (e, v) => e / v)];
        string[] methods = sink[table].Column<string>("method");
        return table == "index" ? all[0] : Percentile(all.Where((_, i) => methods[i] == "probe"));
    }

    [Fact]
    public void Panels_with_an_open_end_are_solved_to_the_same_share_of_the_statistical_error_wherever_they_end()
    {
        EstimatePlan plan = new() { TargetError = Target };
        double sum = 0;
        for (int panels = 1; panels <= 256; panels++)
        {
            sum += plan.ModeErrorOf(panels - 1);
            Assert.InRange(sum / panels, 0, 0.05 * Math.Sqrt(2.0 / (16 * panels)));
        }
    }

    [Theory]
    [InlineData(0.1)]
    [InlineData(0.08)]
    [InlineData(0.06)]
    public void Threads_do_not_move_the_end_and_coordinates_have_as_many_numbers_as_there_are_probes(double target)
    {
        Network network = TestNetworks.Of(Family.Grid, 2500);
        EstimatePlan plan = new() { Route = Route.Probe, Want = Tables | Want.Coordinates, TargetError = target };
        MemorySink one = Run(network, plan with { Threads = 1 }, out EstimateSummary first);
        Assert.Equal(network.NodeCount * first.Probing!.Probes, one["coordinates"].Column<float>("r").Length);
        foreach (int threads in new[] { 2, 3 })
        {
            MemorySink more = Run(network, plan with { Threads = threads }, out EstimateSummary second);
            Assert.Equal(first.Probing, second.Probing);
            Assert.Equal(one["links"].Column<double>("resistance"), more["links"].Column<double>("resistance"));
            Assert.Equal(one["nodes"].Column<double>("resistance_diagonal"), more["nodes"].Column<double>("resistance_diagonal"));
            Assert.Equal(one["coordinates"].Column<float>("r"), more["coordinates"].Column<float>("r"));
            Assert.Equal(one["audit"].Column<double>("relative_error"), more["audit"].Column<double>("relative_error"));
        }
    }

    [Fact]
    public void A_budget_with_time_to_spare_changes_nothing()
    {
        Network network = TestNetworks.Of(Family.SmallWorld, 1000);
        EstimatePlan plan = new() { Route = Route.Probe, Want = Tables, Probes = 64 };
        MemorySink free = Run(network, plan, out EstimateSummary all), timed = Run(network, plan with { TimeBudget = TimeSpan.FromHours(1) }, out EstimateSummary some);
        Assert.Equal((64, "probes"), (all.Probing!.Probes, all.Probing.StoppedBy));
        Assert.Equal(all.Probing, some.Probing);
        Assert.Equal(free["links"].Column<double>("resistance"), timed["links"].Column<double>("resistance"));
    }

    [Fact]
    public void A_budget_alone_is_used_up_to_the_most_probes_there_are_but_not_where_every_row_would_grow_with_them()
    {
        EstimatePlan plan = new() { Route = Route.Probe, Want = Tables, TimeBudget = TimeSpan.FromHours(1) };
        Run(TestNetworks.Of(Family.Grid, 100), plan, out EstimateSummary rows);
        Assert.Equal((4096, "probes"), (rows.Probing!.Probes, rows.Probing.StoppedBy));
        Assert.NotNull(rows.Audit);
        Run(TestNetworks.Of(Family.Grid, 100), plan with { Want = Tables | Want.Coordinates }, out EstimateSummary lists);
        Assert.Equal((64, "probes"), (lists.Probing!.Probes, lists.Probing.StoppedBy));
    }

    [Fact]
    public void A_budget_that_is_no_time_is_refused_with_figures_and_a_mend()
    {
        string message = Assert.Throws<BudgetException>(() => Run(TestNetworks.Of(Family.Grid, 2500),
            new EstimatePlan { Route = Route.Probe, Want = Tables, TimeBudget = TimeSpan.FromMilliseconds(10) }, out _)).Message;
        Assert.Matches(@"\d+ probes would take about [\d.]+ s, and .* are left; use a larger budget", message);
    }

    [Fact]
    [Trait("Category", "Slow")] // so many nodes that 4,096 probes cannot be done in time, and so much time that a panel can
    public void Time_ends_what_a_target_would_go_on_with()
    {
        EstimatePlan plan = new() { Route = Route.Probe, Want = Tables, TargetError = 1e-6, TimeBudget = TimeSpan.FromSeconds(10) };
        MemorySink sink = Run(TestNetworks.Of(Family.Grid, 200_000), plan, out EstimateSummary summary);
        Assert.Equal("time", summary.Probing!.StoppedBy);
        Assert.InRange(summary.Probing.Probes, 16, 4095);
        Assert.Equal(summary.Probing.Probes, sink["index"].Column<long>("probes")[0]);
        Assert.InRange(summary.Probing.RelativeStandardError!.Value, 1e-6, 1);
    }

    [Fact]
    public void A_number_of_probes_and_a_target_contradict_each_other() => Assert.Throws<ArgumentException>(() =>
        Run(TestNetworks.Of(Family.Grid, 100), new EstimatePlan { Route = Route.Probe, Probes = 16, TargetError = 0.1 }, out _));

    private static double Percentile(IEnumerable<double> values)
    {
        double[] sorted = [.. values.Order()];
        return sorted.Length == 0 ? 0 : sorted[(int)Math.Ceiling(0.95 * sorted.Length) - 1];
    }

    private static Network Named(string name) => name.EndsWith(".tsv", StringComparison.Ordinal)
        ? TestNetworks.Open(name)
        : TestNetworks.Of(Enum.Parse<Family>(name), 2000);

    private static MemorySink Run(Network network, EstimatePlan plan, out EstimateSummary summary)
    {
        MemorySink sink = new();
        summary = EstimateRun.Execute(network, plan, new EstimateInputs(), sink, new SilentObserver(), default);
        return sink;
    }
}
