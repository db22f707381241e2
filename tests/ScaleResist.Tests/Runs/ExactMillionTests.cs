// The exact route at a million nodes, against closed forms and published values.

using ScaleResist.DataGen.Networks;
using ScaleResist.Graphs;
using ScaleResist.Runs;
using ScaleResist.Solving;

namespace ScaleResist.Tests.Runs;

[Trait("Category", "Slow")]
public sealed class ExactMillionTests
{
    private static readonly EstimatePlan Plan = new() { Route = Route.Exact, Want = Want.Index | Want.Links };

    // Spectrum of the torus: R of a link is (n-1)/m by symmetry, Kf = n sum of 1/lambda, the latter summed once in closed form.
    [Fact]
    public void A_torus_has_its_closed_form()
    {
        MemorySink sink = Run(TestNetworks.Of(Family.Torus, 1_000_000), Plan);
        Assert.Equal(1, sink["index"].Column<double>("kirchhoff_index")[0] / 1.148169002248e12, 1e-9);
        Assert.All(sink["links"].Column<double>("resistance"), r => Assert.Equal(1, r / 0.4999995, 1e-9));
        double log = -2 * Math.Log(1000);
        for (int i = 0; i < 1000; i++)
        {
            for (int j = i == 0 ? 1 : 0; j < 1000; j++)
                log += Math.Log(4 - (2 * Math.Cos(2 * Math.PI * i / 1000)) - (2 * Math.Cos(2 * Math.PI * j / 1000)));
        }
        Assert.Equal(1, sink["index"].Column<double?>("log_spanning_trees")[0]!.Value / log, 1e-10);
    }

    // Infinite square lattice (Cserti, Am. J. Phys. 68:896, 2000; Atkinson & van Steenwijk, Am. J. Phys. 67:486, 1999), at the middle of a grid: the
    // boundary adds about (r/N)^2. Corner to corner (Essam & Wu, J. Phys. A 42, 2009), whose constants have six digits.
    [Fact]
    public void A_grid_has_the_lattices_values_at_its_middle_and_between_its_corners()
    {
        Network network = TestNetworks.Of(Family.Grid, 1_000_000);
        (int X, int Y, double R)[] lattice =
        [
            (1, 0, 0.5), (1, 1, 2 / Math.PI), (2, 0, 2 - (4 / Math.PI)), (2, 1, (4 / Math.PI) - 0.5), (2, 2, 8 / (3 * Math.PI)),
            (3, 0, 8.5 - (24 / Math.PI)), (3, 1, (46 / (3 * Math.PI)) - 4), (4, 1, (80 / Math.PI) - 24.5), (5, 0, 1.025804658),
        ];
        (int, int)[] pairs =
        [
            .. lattice.Select(p => (At(500, 500), At(500 + p.X, 500 + p.Y))), (At(0, 0), At(999, 999)),
        ];
        double[] found = Run(network, Plan with { Want = Want.Pairs }, pairs)["pairs"].Column<double>("resistance");
        for (int i = 0; i < lattice.Length; i++)
            Assert.Equal(lattice[i].R, found[i], 1e-4 * ((lattice[i].X * lattice[i].X) + (lattice[i].Y * lattice[i].Y)) / 25 + 2e-6);
        Assert.Equal((4 / Math.PI * Math.Log(1000)) + 0.077318 + (0.266070 / 1e6), found[^1], 2e-6);

        int At(int x, int y) => network.Node((1000 * y) + x);
    }

    [Fact]
    public void A_path_of_a_million_nodes_is_a_tree_of_blocks_of_that_depth()
    {
        const double n = 1_000_000;
        Network network = TestNetworks.Of(Family.Path, 1_000_000);
        MemorySink sink = Run(network, Plan with { Want = Want.Index | Want.Nodes | Want.Pairs },
            [(network.Node(0), network.Node(999_999)), (network.Node(17), network.Node(800_000))]);
        Assert.Equal(1, sink["index"].Column<double>("kirchhoff_index")[0] / (n * ((n * n) - 1) / 6), 1e-12);
        Assert.Equal([999_999, 799_983], sink["pairs"].Column<double>("resistance"));
    }

    // Chains of bridges with a cycle, a grid or a complete graph between them, trees hanging off: by blocks, and by one factor of the whole.
    [Fact]
    public void Three_hundred_thousand_bridges_and_a_thousand_blocks_give_one_index_by_blocks_and_as_a_whole()
    {
        Random random = new(1);
        List<(long, long)> links = [];
        long nodes = 1;
        for (int block = 0; block < 1000; block++)
        {
            long at = random.NextInt64(nodes), first = nodes;
            links.Add((at, first));
            int size = 5 + random.Next(40);
            for (int i = 0; i < size; i++)
            {
                links.Add((first + i, first + ((i + 1) % size)));
                if (i >= 2 && i < size - 1 && random.Next(3) == 0)
                    links.Add((first + i, first + random.Next(i - 1)));
            }
            nodes += size;
        }
        while (links.Count < 400_000 && nodes < 330_000)
        {
            links.Add((random.NextInt64(Math.Max(1, nodes - 50), nodes), nodes));
            nodes++;
        }
        Network network = TestNetworks.Unit([.. links.DistinctBy(l => (Math.Min(l.Item1, l.Item2), Math.Max(l.Item1, l.Item2)))]);
        Blocks blocks = Blocks.Find(network);
        Assert.True(blocks.Bridges.Count >= 300_000, $"{blocks.Bridges.Count} bridges");
        Assert.Equal(1000, blocks.Count - blocks.Bridges.Count);
        double byBlocks = Run(network, Plan)["index"].Column<double>("kirchhoff_index")[0];

        Laplacian whole = network.Laplacian;
        SymbolicCholesky symbolic = SymbolicCholesky.Of(whole, FillReducingOrder.Of(whole, 2, default));
        using CholeskyFactor factor = CholeskyFactor.Of(symbolic, whole, 2, default);
        SelectedInverse inverse = factor.Invert(2, default);
        using ScaleResist.Kernels.Panel<double> ones = new(network.NodeCount);
        for (int u = 0; u < network.NodeCount; u++)
            ones.Row(u)[0] = 1;
        using (SubstitutionWorkspace workspace = factor.NewWorkspace(8))
            factor.Solve(ones, ones, workspace);
        double trace = 0, sum = 0;
        for (int u = 0; u < network.NodeCount; u++)
        {
            trace += inverse.Diagonal(u);
            sum += ones.Row(u)[0];
        }
        Assert.Equal(1, byBlocks / ((network.NodeCount * trace) - sum), 1e-9);
    }

    private static MemorySink Run(Network network, EstimatePlan plan, (int, int)[]? pairs = null)
    {
        MemorySink sink = new();
        EstimateRun.Execute(network, plan, new EstimateInputs { Pairs = pairs }, sink, new SilentObserver(), default);
        return sink;
    }
}
