// The run as a whole: threads, seeds, wants, exact parts, invariants between tables.

using ScaleResist.DataGen.Networks;
using ScaleResist.Graphs;
using ScaleResist.Runs;

namespace ScaleResist.Tests.Runs;

public class EstimateRunTests
{
    [Theory]
    [InlineData(Family.Preferential, 16)]
    [InlineData(Family.Grid, 40)]
    [InlineData(Family.Fringe, 70)]
    public void Results_are_the_same_to_the_bit_with_1_2_and_3_threads(Family family, int probes)
    {
        Network network = TestNetworks.Of(family, 12_000);
        MemorySink one = Run(network, new EstimatePlan { Route = Route.Probe, Probes = probes, Threads = 1 });
        foreach (int threads in new[] { 2, 3 })
        {
            MemorySink more = Run(network, new EstimatePlan { Route = Route.Probe, Probes = probes, Threads = threads });
            Assert.Equal(one["links"].Column<double>("resistance"), more["links"].Column<double>("resistance"));
            Assert.Equal(one["links"].Column<double>("resistance_upper"), more["links"].Column<double>("resistance_upper"));
            Assert.Equal(one["nodes"].Column<double>("resistance_diagonal"), more["nodes"].Column<double>("resistance_diagonal"));
            Assert.Equal(one["index"].Column<double>("kirchhoff_index"), more["index"].Column<double>("kirchhoff_index"));
            Assert.Equal(one["index"].Column<double>("kemeny_constant"), more["index"].Column<double>("kemeny_constant"));
        }
    }

    [Fact]
    public void Another_seed_gives_other_numbers()
    {
        Network network = TestNetworks.Of(Family.SmallWorld, 300);
        Assert.NotEqual(
            Run(network, new EstimatePlan { Route = Route.Probe, Seed = 1 })["links"].Column<double>("resistance"),
            Run(network, new EstimatePlan { Route = Route.Probe, Seed = 2 })["links"].Column<double>("resistance"));
    }

    [Fact]
    public void Only_what_is_wanted_is_written()
    {
        Network network = TestNetworks.Of(Family.SmallWorld, 300);
        foreach (Want want in new[] { Want.Index, Want.Components, Want.Nodes, Want.Links, Want.Coordinates })
        {
            Assert.Equal([want.ToString().ToLowerInvariant(), .. want == Want.Links ? ["audit"] : Array.Empty<string>()],
                Run(network, new EstimatePlan { Want = want, Route = Route.Probe, Probes = 8 }).Tables.Keys);
        }
    }

    [Fact]
    public void Components_alone_need_no_solve()
    {
        EstimateSummary summary = EstimateRun.Execute(
            TestNetworks.Of(Family.Grid, 400), new EstimatePlan { Want = Want.Components }, new EstimateInputs(),
            new MemorySink(), new SilentObserver(), default);
        Assert.Null(summary.Solver);
        Assert.Null(summary.FosterSum);
    }

    [Fact]
    public void Every_link_of_a_tree_is_an_exact_bridge_and_cuts_off_the_smaller_side()
    {
        Network network = TestNetworks.Of((1, 2, 1), (2, 3, 0.1), (3, 4, 1), (3, 5, 4));
        MemorySink sink = Run(network, new EstimatePlan { Route = Route.Probe, Probes = 8 });
        Dictionary<(long, long), (double R, long? Cut)> rows = sink["links"].Column<long>("source")
            .Zip(sink["links"].Column<long>("target"))
            .Zip(sink["links"].Column<double>("resistance").Zip(sink["links"].Column<long?>("nodes_cut_off")))
            .ToDictionary(row => row.First, row => row.Second);
        Assert.Equal((1, 1L), rows[(1, 2)]);
        Assert.Equal((10, 2L), rows[(2, 3)]);
        Assert.Equal((0.25, 1L), rows[(3, 5)]);
        Assert.All(sink["links"].Column<string>("method"), method => Assert.Equal("bridge", method));
        Assert.All(sink["links"].Column<double>("resistance_se"), error => Assert.Equal(0, error));
        Assert.Equal(4, sink["index"].Column<double>("foster_sum")[0], 1e-12);
    }

    [Fact]
    public void Tables_agree_with_each_other_and_with_the_contract()
    {
        Network network = TestNetworks.Open("netscience.tsv", WeightMeaning.Conductance);
        MemorySink sink = Run(network, new EstimatePlan { Route = Route.Probe, Probes = 64, Want = (Want)63 });
        MemoryTable nodes = sink["nodes"], index = sink["index"], links = sink["links"];
        Assert.Equal(1461, nodes.Complete()); // 1,589 in the source, of which 128 have no link and so do not stand in the file
        Assert.Equal(2742, links.Complete());
        Assert.Equal(379, index.Column<long>("nodes")[0]);
        Assert.Equal(914, index.Column<long>("links")[0]);
        long[] component = nodes.Column<long>("component_id");
        long[] sizes = index.Column<long>("nodes");
        Assert.Equal(sizes, sizes.OrderDescending());
        double[] total = nodes.Column<double>("total_resistance"), closeness = nodes.Column<double>("closeness");
        double[] kirchhoff = index.Column<double>("kirchhoff_index");
        double[] sums = new double[sizes.Length];
        for (int u = 0; u < total.Length; u++)
        {
            sums[component[u]] += total[u] / 2;
            if (sizes[component[u]] > 1)
                Assert.Equal((sizes[component[u]] - 1) / total[u], closeness[u], 1e-12);
            else
                Assert.Equal(0, closeness[u]);
        }
        for (int c = 0; c < sizes.Length; c++)
            Assert.Equal(kirchhoff[c], sums[c], (1e-6 * kirchhoff[c]) + 1e-12); // the sum over nodes of total resistance is 2 Kf
        long[] rank = nodes.Column<long>("closeness_rank");
        long[] low = nodes.Column<long>("rank_lower");
        long[] high = nodes.Column<long>("rank_upper");
        for (int u = 0; u < rank.Length; u++)
            Assert.True(low[u] <= rank[u] && rank[u] <= high[u] && low[u] >= 1 && high[u] <= sizes[component[u]]);
        double[] foster = index.Column<double>("foster_sum");
        double[] spanning = links.Column<double>("spanning_probability");
        Assert.Equal(spanning.Sum(), foster.Sum(), 1e-9 * foster.Sum());
        Assert.Equal(1461 * 64, sink["coordinates"].Column<float>("r").Length);
    }

    [Fact]
    public void A_cancelled_run_ends_as_cancelled()
    {
        using CancellationTokenSource cancel = new();
        cancel.Cancel();
        Assert.ThrowsAny<OperationCanceledException>(() => EstimateRun.Execute(
            TestNetworks.Of(Family.Grid, 400), new EstimatePlan { Route = Route.Probe }, new EstimateInputs(), new MemorySink(), new SilentObserver(),
            cancel.Token));
    }

    private static MemorySink Run(Network network, EstimatePlan plan)
    {
        MemorySink sink = new();
        EstimateRun.Execute(network, plan, new EstimateInputs { Pairs = [(0, 1)] }, sink, new SilentObserver(), default);
        return sink;
    }
}
