// The exact route as a run: closed forms, published values, dense inverses; blocks against the whole; parts of it beside probes.

using MathNet.Numerics.LinearAlgebra;
using ScaleResist.DataGen.Networks;
using ScaleResist.Graphs;
using ScaleResist.Runs;

namespace ScaleResist.Tests.Runs;

public sealed class ExactRouteTests
{
    private static readonly EstimatePlan Exact = new() { Route = Route.Exact, Want = Want.Index | Want.Nodes | Want.Links };

    // Kirchhoff indices of families in closed form (Gutman & Mohar 1996 and common practice); grids from MathWorld, "Kirchhoff Index", but 6 x 6,
    // which is n times the sum of reciprocal eigenvalues; Q_4 and the 5 x 5 torus likewise.
    [Theory]
    [InlineData(Family.Path, 50, 50.0 * (2500 - 1) / 6)]
    [InlineData(Family.Cycle, 50, 50.0 * (2500 - 1) / 12)]
    [InlineData(Family.Star, 50, 49.0 * 49)]
    [InlineData(Family.Complete, 50, 49)]
    [InlineData(Family.Hypercube, 16, 206.0 / 3)]
    [InlineData(Family.Grid, 4, 5)]
    [InlineData(Family.Grid, 9, 69.0 / 2)]
    [InlineData(Family.Grid, 16, 884.0 / 7)]
    [InlineData(Family.Grid, 25, 11155.0 / 33)]
    [InlineData(Family.Grid, 36, 535131.0 / 715)]
    [InlineData(Family.Torus, 25, 190)]
    [InlineData(Family.Cube, 8, 58.0 / 3)]
    [InlineData(Family.Cube, 27, 16959.0 / 70)]
    [InlineData(Family.Ladder, 6, 71.0 / 5)]
    [InlineData(Family.Ladder, 8, 214.0 / 7)]
    public void Families_have_their_closed_forms(Family family, int nodes, double index)
    {
        MemorySink sink = Run(TestNetworks.Of(family, nodes), Exact, out _);
        Assert.Equal(1, Assert.Single(sink["index"].Column<double>("kirchhoff_index")) / index, 1e-10);
        Assert.Equal(0, Assert.Single(sink["index"].Column<double>("kirchhoff_index_se")));
        Assert.Equal("exact", Assert.Single(sink["index"].Column<string>("method")));
    }

    // van Steenwijk, Am. J. Phys. 66:90, 1998 (from memory; the values are rational): all links of a Platonic solid are alike, p = (n-1)/m.
    [Fact]
    public void The_dodecahedron_has_its_resistances_by_distance()
    {
        (long, long)[] links =
        [
            .. Enumerable.Range(0, 5).SelectMany(i => ((long, long)[])
                [(i, (i + 1) % 5), (i, 5 + i), (5 + i, 10 + i), (5 + i, 10 + ((i + 4) % 5)), (10 + i, 15 + i), (15 + i, 15 + ((i + 1) % 5))]),
        ];
        Network network = TestNetworks.Unit(links);
        (int, int)[] pairs = [.. Enumerable.Range(1, 19).Select(v => (network.Node(0), network.Node(v)))];
        MemorySink sink = Run(network, Exact with { Want = Exact.Want | Want.Pairs }, out _, pairs);
        Assert.Equal(548.0 / 3, sink["index"].Column<double>("kirchhoff_index")[0], 1e-9);
        double[] byDistance = [19.0 / 30, 9.0 / 10, 16.0 / 15, 17.0 / 15, 7.0 / 6];
        int[] counts = [3, 6, 6, 3, 1];
        Assert.Equal(
            byDistance.SelectMany((r, i) => Enumerable.Repeat(r, counts[i])),
            sink["pairs"].Column<double>("resistance").Order(), (a, b) => Math.Abs(a - b) < 1e-10);
    }

    public static TheoryData<string, double> Published => new()
    {
        // van Steenwijk, Am. J. Phys. 66:90, 1998 (from memory; the values are rational): tetrahedron, octahedron; Petersen's graph (rational).
        { "0-1 0-2 0-3 1-2 1-3 2-3", 3 },
        { "0-2 0-3 0-4 0-5 1-2 1-3 1-4 1-5 2-4 2-5 3-4 3-5", 13.0 / 2 },
        { "0-1 1-2 2-3 3-4 4-0 0-5 1-6 2-7 3-8 4-9 5-7 7-9 9-6 6-8 8-5", 33 },
        // The icosahedron likewise, and the Clebsch graph (rational, from its parameters).
        { "0-1 0-2 0-3 0-4 0-5 1-2 2-3 3-4 4-5 5-1 11-6 11-7 11-8 11-9 11-10 6-7 7-8 8-9 9-10 10-6 1-6 2-7 3-8 4-9 5-10 1-7 2-8 3-9 4-10 5-6", 28 },
        { "0-1 0-2 0-4 0-8 0-15 1-3 1-5 1-9 1-14 2-3 2-6 2-10 2-13 3-7 3-11 3-12 4-5 4-6 4-11 4-12 "
            + "5-7 5-10 5-13 6-7 6-9 6-14 7-8 7-15 8-9 8-10 8-12 9-11 9-13 10-11 10-14 11-15 12-13 12-14 13-15 14-15", 50 },
        // K_{3,4}; wheels of 4 and 5 rim nodes; a fan of a path of 4 (rational); two hexagons in a row (Yang & Zhang 2008, from memory).
        { "0-3 0-4 0-5 0-6 1-3 1-4 1-5 1-6 2-3 2-4 2-5 2-6", 23.0 / 2 },
        { "0-1 0-2 0-3 0-4 1-2 2-3 3-4 4-1", 16.0 / 3 },
        { "0-1 0-2 0-3 0-4 0-5 1-2 2-3 3-4 4-5 5-1", 95.0 / 11 },
        { "0-1 0-2 0-3 0-4 1-2 2-3 3-4", 146.0 / 21 },
        { "0-1 1-2 2-3 3-4 4-5 5-0 2-6 6-7 7-8 8-9 9-3", 465.0 / 7 },
        // The Moebius ladder of eight nodes (Baigonakova & Mednykh 2019).
        { "0-1 1-2 2-3 3-4 4-5 5-6 6-7 7-0 0-4 1-5 2-6 3-7", 134.0 / 7 },
    };

    [Theory]
    [MemberData(nameof(Published))]
    public void Small_graphs_have_their_published_index(string links, double index)
    {
        Network network = TestNetworks.Unit([.. links.Split(' ').Select(link => link.Split('-')).Select(ends => (long.Parse(ends[0]), long.Parse(ends[1])))]);
        Assert.Equal(1, Run(network, Exact, out _)["index"].Column<double>("kirchhoff_index")[0] / index, 1e-10);
    }

    // Kirchhoff indices of the open networks as their note in tests/data gives them; power and netscience to ten digits by dense inverses.
    [Theory]
    [InlineData("karate.tsv", 470.268185)]
    [InlineData("power.tsv", 63769632.8041)]
    [InlineData("netscience.tsv", 148257.765)]
    [InlineData("as-22july06.tsv", 365839474.062)]
    public void Open_networks_have_their_published_index(string file, double index)
    {
        MemorySink sink = Run(TestNetworks.Open(file), Exact, out EstimateSummary summary);
        Assert.Equal(1, sink["index"].Column<double>("kirchhoff_index")[0] / index, 5e-9);
        Assert.Equal(1, summary.FosterSum!.Value / (summary.Nodes - summary.Components), 1e-9);
        Assert.All(sink["links"].Column<string>("method"), method => Assert.True(method is "exact" or "bridge"));
    }

    [Theory]
    [InlineData(0)]
    [InlineData(4)]
    public void Every_number_is_that_of_a_dense_inverse(double decades)
    {
        for (int seed = 1; seed <= 20; seed++)
        {
            Network network = TestNetworks.Random(60, 60 + (seed % 4 * 15), seed, decades);
            double[] weights = [.. Enumerable.Range(0, 60).Select(i => i * seed % 7.0)];
            (int, int)[] pairs = [.. Enumerable.Range(0, 60).Select(i => (i, (i * 17) % 60))];
            MemorySink sink = new();
            EstimateRun.Execute(network, Exact with { Want = Exact.Want | Want.Pairs },
                new EstimateInputs { NodeWeights = weights, Pairs = pairs }, sink, new SilentObserver(), default);
            Matrix<double> dense = network.DensePseudoInverse();
            double[] strengths = network.Strengths;
            Close(dense.Diagonal(), sink["nodes"].Column<double>("resistance_diagonal"));
            Close(pairs.Select(p => dense.Resistance(p.Item1, p.Item2)), sink["pairs"].Column<double>("resistance"));
            Close([60 * dense.Trace()], sink["index"].Column<double>("kirchhoff_index"));
            Close([SumOverPairs(dense, strengths)], sink["index"].Column<double>("degree_kirchhoff_index"));
            Close([SumOverPairs(dense, weights)], sink["index"].Column<double?>("node_weighted_kirchhoff_index").Select(x => x!.Value));
            double logTrees = Math.Log(network.DenseLaplacian().SubMatrix(1, 59, 1, 59).Determinant());
            Assert.Equal(logTrees, sink["index"].Column<double?>("log_spanning_trees")[0]!.Value, 1e-8);
            int row = 0;
            double[] resistances = sink["links"].Column<double>("resistance");
            for (int u = 0; u < 60; u++)
            {
                for (long k = network.FirstLaterArc(u); k < network.RowStart[u + 1]; k++)
                    Assert.Equal(1, resistances[row++] / dense.Resistance(u, network.Neighbours[k]), 1e-8);
            }
        }

        static void Close(IEnumerable<double> expected, IEnumerable<double> actual) =>
            Assert.All(expected.Zip(actual), pair => Assert.Equal(pair.First, pair.Second, 1e-8 * Math.Max(1e-3, Math.Abs(pair.First))));
    }

    // Cayley: n^(n-2). Hypercube: prod over k of (2k)^C(d,k) / 2^d (both common practice).
    [Fact]
    public void Spanning_trees_are_counted()
    {
        Assert.Equal(48 * Math.Log(50), LogTrees(Family.Complete, 50), 1e-9);
        Assert.Equal(0, LogTrees(Family.Path, 1000), 1e-9);
        Assert.Equal(Math.Log(1000), LogTrees(Family.Cycle, 1000), 1e-9);
        double hypercube = -10 * Math.Log(2), choose = 1;
        for (int k = 1; k <= 10; k++)
        {
            choose *= (11.0 - k) / k;
            hypercube += choose * Math.Log(2 * k);
        }
        Assert.Equal(1, LogTrees(Family.Hypercube, 1024) / hypercube, 1e-10);

        static double LogTrees(Family family, int nodes) =>
            Run(TestNetworks.Of(family, nodes), Exact, out _)["index"].Column<double?>("log_spanning_trees")[0]!.Value;
    }

    [Fact]
    public void Components_have_their_own_numbers()
    {
        // A cycle of five, a triangle, a link: Kf 10, 2, 1; 5, 3 and 1 spanning trees.
        Network network = TestNetworks.Unit((1, 2), (2, 3), (3, 4), (4, 5), (5, 1), (10, 11), (11, 12), (12, 10), (20, 21));
        (int, int)[] pairs = [(network.Node(1), network.Node(3)), (network.Node(1), network.Node(10)), (network.Node(20), network.Node(21))];
        MemorySink sink = Run(network, Exact with { Want = Exact.Want | Want.Pairs }, out _, pairs);
        Assert.Equal([10, 2, 1], sink["index"].Column<double>("kirchhoff_index"), (a, b) => Math.Abs(a - b) < 1e-12);
        Assert.Equal([Math.Log(5), Math.Log(3), 0], sink["index"].Column<double?>("log_spanning_trees").Select(x => x!.Value),
            (a, b) => Math.Abs(a - b) < 1e-12);
        Assert.Equal([6.0 / 5, double.PositiveInfinity, 1], sink["pairs"].Column<double>("resistance"), (a, b) => a == b || Math.Abs(a - b) < 1e-12);
        Assert.Equal(["exact", "exact", "bridge"], sink["pairs"].Column<string>("method"));
    }

    [Fact]
    public void Pairs_far_apart_in_the_tree_of_blocks_add_up()
    {
        // A chain of 500 triangles: each is crossed by 2/3.
        Network network = TestNetworks.Unit([.. Enumerable.Range(0, 500).SelectMany(i => ((long, long)[])
            [(2 * i, (2 * i) + 1), ((2 * i) + 1, (2 * i) + 2), (2 * i, (2 * i) + 2)])]);
        (int, int)[] pairs = [.. Enumerable.Range(0, 500).Select(i => (network.Node(2 * i), network.Node(1000 - i - (i % 2))))];
        double[] found = Run(network, Exact with { Want = Want.Pairs }, out _, pairs)["pairs"].Column<double>("resistance");
        for (int i = 0; i < 500; i++)
            Assert.Equal(Math.Abs((1000 - i - (i % 2)) - (2 * i)) / 2 * 2.0 / 3, found[i], 1e-10);
    }

    [Fact]
    public void What_does_not_fit_is_refused_with_the_figures()
    {
        Network cube = TestNetworks.Of(Family.Cube, 8000);
        string memory = Assert.Throws<BudgetException>(() => Run(cube, Exact with { MemoryBudget = 80_000_000 }, out _)).Message;
        Assert.Contains("--memory-budget", memory);
        Assert.Contains("GB", memory);
        string time = Assert.Throws<BudgetException>(() => Run(cube, Exact with { TimeBudget = TimeSpan.FromMilliseconds(20) }, out _)).Message;
        Assert.Contains("--time-budget", time);
    }

    // A cube that may not be factorised, with trees, cycles and a grid hanging off its nodes: all but the cube is exact.
    [Fact]
    public void Blocks_that_are_too_large_are_probed_and_the_others_are_exact()
    {
        List<(long, long)> links = [];
        Network cube = TestNetworks.Of(Family.Cube, 1000), grid = TestNetworks.Of(Family.Grid, 100);
        Copy(cube, 0);
        Copy(grid, 10_000);
        links.Add((0, 10_000));
        for (int i = 0; i < 300; i++)
            links.AddRange([(i, 20_000 + i), (20_000 + i, 30_000 + i), (30_000 + i, 40_000 + i), (40_000 + i, 20_000 + i)]);
        Network network = TestNetworks.Unit([.. links]);
        Matrix<double> dense = network.DensePseudoInverse();
        EstimatePlan plan = Exact with { Route = Route.Auto };
        ExactForecast all = RouteChoice.Of(Blocks.Find(network), plan, default).Forecast!;
        MemorySink sink = new();
        EstimateSummary summary = EstimateRun.Execute(
            network, plan with { AffordableSeconds = 0.9999 * all.Seconds }, new EstimateInputs(), sink, new SilentObserver(), default);
        Assert.Equal(1, summary.Exact!.ProbedBlocks);
        string[] methods = sink["links"].Column<string>("method");
        Assert.Equal(cube.LinkCount, methods.Count(method => method == "probe"));
        Assert.Equal(grid.LinkCount + 900, methods.Count(method => method == "exact"));
        Assert.Equal(301, methods.Count(method => method == "bridge"));
        double[] found = sink["links"].Column<double>("resistance"), lower = sink["links"].Column<double>("resistance_lower"),
            upper = sink["links"].Column<double>("resistance_upper");
        int row = 0, held = 0;
        for (int u = 0; u < network.NodeCount; u++)
        {
            for (long k = network.FirstLaterArc(u); k < network.RowStart[u + 1]; k++, row++)
            {
                double truth = dense.Resistance(u, network.Neighbours[k]);
                if (methods[row] == "probe")
                    held += lower[row] <= truth && truth <= upper[row] ? 1 : 0;
                else
                    Assert.Equal(truth, found[row], 1e-9);
            }
        }
        Assert.InRange((double)held / cube.LinkCount, 0.9, 0.98);
        double index = network.NodeCount * dense.Trace();
        Assert.InRange(index, sink["index"].Column<double>("kirchhoff_index_lower")[0], sink["index"].Column<double>("kirchhoff_index_upper")[0]);
        Assert.Equal(1, sink["index"].Column<double>("kirchhoff_index")[0] / index, 0.01);
        Assert.Null(sink["index"].Column<double?>("log_spanning_trees")[0]);

        void Copy(Network part, long offset)
        {
            for (int u = 0; u < part.NodeCount; u++)
            {
                for (long k = part.FirstLaterArc(u); k < part.RowStart[u + 1]; k++)
                    links.Add((offset + u, offset + part.Neighbours[k]));
            }
        }
    }

    private static double SumOverPairs(Matrix<double> dense, double[] w)
    {
        double sum = 0;
        for (int u = 0; u < w.Length; u++)
        {
            for (int v = 0; v < u; v++)
                sum += w[u] * w[v] * dense.Resistance(u, v);
        }
        return sum;
    }

    private static MemorySink Run(Network network, EstimatePlan plan, out EstimateSummary summary, (int, int)[]? pairs = null)
    {
        MemorySink sink = new();
        summary = EstimateRun.Execute(network, plan, new EstimateInputs { Pairs = pairs }, sink, new SilentObserver(), default);
        return sink;
    }
}
