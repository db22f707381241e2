// Deflated indices and diagonals: unbiased to the last digit of floats, true intervals, and what is gained; against a dense L+
// (MathNet.Numerics).

using MathNet.Numerics.LinearAlgebra;
using ScaleResist.DataGen.Networks;
using ScaleResist.Estimating;
using ScaleResist.Graphs;
using ScaleResist.Runs;
using ScaleResist.Solving;
using ScaleResist.Tests.Runs;
using Xunit.Abstractions;

namespace ScaleResist.Tests.Estimating;

public class DeflationTests(ITestOutputHelper output)
{
    [Theory]
    [InlineData(0)]
    [InlineData(3)]
    public void The_mean_over_all_signs_is_the_dense_value(double decades)
    {
        // A sample is a quadratic form in the signs q, which are independent: its mean is the sum of its values at the m unit vectors.
        Network network = TestNetworks.Of(Family.Grid, 324, decades: decades);
        Matrix<double> dense = network.DensePseudoInverse();
        double[] w = Weights(network);
        NodeSums sums = new(Blocks.Find(network), w);
        using ProbePanel panel = new(network, 1);
        Deflate(sums, network, panel, 1);
        Assert.Equal(32, sums.DeflationSolves);
        double[] known = Values();
        int m = (int)network.LinkCount, link = 0;
        for (int u = 0; u < network.NodeCount; u++)
        {
            for (long k = network.FirstLaterArc(u); k < network.RowStart[u + 1]; k++, link++)
            {
                int lane = link % ProbePanel.Width, v = network.Neighbours[k];
                if (lane == 0)
                {
                    panel.Draw(link / ProbePanel.Width, m, 1);
                    for (int i = 0; i < network.NodeCount; i++)
                    {
                        panel.B.Row(i).Clear();
                        panel.Z.Row(i).Clear(); // lanes not in use are 0
                    }
                }
                double root = Math.Sqrt(network.Conductance(k));
                (panel.B.Row(u)[lane], panel.B.Row(v)[lane]) = ((float)root, -(float)root);
                for (int i = 0; i < network.NodeCount; i++)
                    panel.Z.Row(i)[lane] = (float)(root * (dense[i, u] - dense[i, v]));
                if (lane + 1 == panel.Probes)
                    sums.Add(panel, 2);
            }
        }
        double[] mean = Values(), truth =
        [
            Index(dense, _ => 1), Index(dense, u => network.Strengths[u]), Index(dense, u => w[u]), .. dense.Diagonal(),
        ];
        for (int i = 0; i < truth.Length; i++)
            Assert.Equal(1, (known[i] + (m * (mean[i] - known[i]))) / truth[i], 2e-5);

        double[] Values() =>
        [
            sums.KirchhoffIndex(0, 0.95).Value, sums.DegreeKirchhoffIndex(0, 0.95).Value, sums.WeightedKirchhoffIndex(0, 0.95)!.Value.Value,
            .. sums.Diagonals(1).Select(l => l.Value),
        ];
    }

    [Theory]
    [InlineData(0)]
    [InlineData(2)]
    public void Intervals_cover_across_cut_nodes_and_bridges(double decades)
    {
        Network network = Towns(decades);
        Blocks blocks = Blocks.Find(network);
        Matrix<double> dense = network.DensePseudoInverse();
        double[] w = Weights(network);
        double[] truth = [Index(dense, _ => 1), Index(dense, u => network.Strengths[u]), Index(dense, u => w[u])];
        LaplacianSolver solver = new(network);
        using SolverWorkspace<float> workspace = solver.NewWorkspace<float>();
        int[] covered = new int[3];
        int diagonals = 0;
        double squares = 0, claimed = 0;
        const int seeds = 80, probes = 32;
        for (ulong seed = 1; seed <= seeds; seed++)
        {
            NodeSums sums = new(blocks, w);
            using ProbePanel drawn = new(network, seed);
            for (int i = 0; i < 2; i++)
            {
                drawn.Draw(i, probes, 1);
                solver.SolveProbes(drawn.B, drawn.Z, 16, 1e-3, workspace, default);
                if (i == 0)
                    sums.AddFirst(drawn, probes, solver, workspace, seed, 1, default);
                else
                    sums.Add(drawn, 1);
            }
            Assert.Equal(32, sums.DeflationSolves);
            Estimate[] indices = [sums.KirchhoffIndex(0, 0.95), sums.DegreeKirchhoffIndex(0, 0.95), sums.WeightedKirchhoffIndex(0, 0.95)!.Value];
            for (int i = 0; i < 3; i++)
                covered[i] += truth[i] >= indices[i].Lower && truth[i] <= indices[i].Upper ? 1 : 0;
            squares += Math.Pow(indices[0].Value - truth[0], 2);
            claimed += Math.Pow(indices[0].StandardError, 2);
            Estimate[] all = sums.Diagonals(Quantiles.Normal(0.95));
            Assert.Equal(indices[0].Value, network.NodeCount * all.Sum(l => l.Value), indices[0].Value * 1e-6);
            diagonals += all.Where((l, u) => dense[u, u] >= l.Lower && dense[u, u] <= l.Upper).Count();
        }
        output.WriteLine($"{string.Join(" ", covered)} of {seeds}, diagonals {(double)diagonals / seeds / network.NodeCount:0.000}, "
            + $"claimed over true error {Math.Sqrt(claimed / squares):0.00}, relative {Math.Sqrt(squares / seeds) / truth[0]:0.0000}");
        Assert.All(covered, count => Assert.InRange((double)count / seeds, 0.88, 1));
        Assert.InRange((double)diagonals / seeds / network.NodeCount, 0.92, 0.98);
        Assert.InRange(Math.Sqrt(claimed / squares), 0.8, 1.25);
    }

    [Theory]
    [InlineData(Family.Grid, 4)]
    [InlineData(Family.Road, 3)]
    public void Two_panels_of_solves_cut_the_spread_of_meshes(Family family, double gain)
    {
        Network network = TestNetworks.Of(family, 4000);
        NodeSums plain = new Probing(network, 64, 1).Nodes;
        IndexEntry deflated = Run(network, 2).Index[0];
        Assert.InRange(deflated.KirchhoffIndex.StandardError, 0, plain.KirchhoffIndex(0, 0.95).StandardError / gain);
    }

    [Fact]
    public void Threads_change_nothing()
    {
        Network network = TestNetworks.Of(Family.Grid, 10_000); // a block in pieces
        EstimateSummary one = Run(network, 1), two = Run(network, 2);
        Assert.Equal(32, one.Solver!.DeflationSolves);
        Assert.Equal(one.Index[0].KirchhoffIndex, two.Index[0].KirchhoffIndex);
        Assert.Equal(one.Index[0].DegreeKirchhoffIndex, two.Index[0].DegreeKirchhoffIndex);
    }

    [Fact]
    public void Social_cores_and_few_probes_spend_no_further_solves()
    {
        Assert.Equal(0, Run(TestNetworks.Of(Family.Preferential, 10_000), 2).Solver!.DeflationSolves);
        Assert.Equal(0, Run(TestNetworks.Of(Family.Grid, 1024), 2, probes: 15).Solver!.DeflationSolves);
        Assert.Equal(16, Run(TestNetworks.Of(Family.Grid, 1024), 2, probes: 16).Solver!.DeflationSolves);
    }

    private static EstimateSummary Run(Network network, int threads, int probes = 64) => EstimateRun.Execute(
        network, new EstimatePlan { Want = Want.Index, Route = Route.Probe, Threads = threads, Probes = probes }, new EstimateInputs(),
        new MemorySink(), new SilentObserver(), default);

    private static void Deflate(NodeSums sums, Network network, ProbePanel panel, ulong seed)
    {
        LaplacianSolver solver = new(network);
        using SolverWorkspace<float> workspace = solver.NewWorkspace<float>();
        panel.Draw(0, 32, 1);
        solver.SolveProbes(panel.B, panel.Z, 16, 1e-3, workspace, default);
        sums.AddFirst(panel, 32, solver, workspace, seed, 1, default);
        sums.Clear();
    }

    // Two grids of 18 x 18 that share a corner, a bridge to a triangle, and a pendant node inside.
    private static Network Towns(double decades)
    {
        Random random = new(7);
        List<(long, long, double)> links = [];
        for (int i = 0; i < 18; i++)
        {
            for (int j = 0; j < 18; j++)
            {
                for (int town = 0; town < 2; town++)
                {
                    if (i < 17)
                        Add(Node(town, i, j), Node(town, i + 1, j));
                    if (j < 17)
                        Add(Node(town, i, j), Node(town, i, j + 1));
                }
            }
        }
        Add(Node(1, 17, 3), 2001);
        Add(2001, 2002);
        Add(2002, 2003);
        Add(2003, 2001);
        Add(Node(0, 5, 5), 2004);
        return TestNetworks.Of([.. links]);

        long Node(int town, int i, int j) => i + j == 0 ? 0 : (town * 1000) + (i * 18) + j;

        void Add(long u, long v) => links.Add((u, v, Math.Pow(10, decades * (random.NextDouble() - 0.5))));
    }

    private static double[] Weights(Network network) => [.. Enumerable.Range(0, network.NodeCount).Select(u => u % 5 == 0 ? 0 : 1.0 + (u % 7))];

    private static double Index(Matrix<double> dense, Func<int, double> weight)
    {
        double sum = 0;
        for (int u = 0; u < dense.RowCount; u++)
        {
            for (int v = u + 1; v < dense.RowCount; v++)
                sum += weight(u) * weight(v) * dense.Resistance(u, v);
        }
        return sum;
    }
}
