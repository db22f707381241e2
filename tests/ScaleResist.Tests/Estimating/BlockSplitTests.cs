// Indices and diagonals split over blocks: identities against a dense L+ (MathNet.Numerics), closed forms of trees, and coverage
// where weak bridges and weak blocks would drown the probes.

using MathNet.Numerics.LinearAlgebra;
using ScaleResist.DataGen.Networks;
using ScaleResist.Estimating;
using ScaleResist.Graphs;
using ScaleResist.Runs;
using ScaleResist.Tests.Runs;
using Xunit.Abstractions;

namespace ScaleResist.Tests.Estimating;

public class BlockSplitTests(ITestOutputHelper output)
{
    [Theory]
    [InlineData(1, 0)]
    [InlineData(2, 0)]
    [InlineData(3, 4)]
    [InlineData(4, 8)]
    public void Exact_blocks_add_up_to_the_indices_and_diagonals_of_the_whole(int seed, double decades)
    {
        Network network = TestNetworks.Random(60, 60 + (6 * seed), seed, decades);
        Blocks blocks = Blocks.Find(network);
        double[] w = Weights(network);
        NodeSums sums = new(blocks, w, Exact(network, blocks, w, _ => true));
        Matrix<double> dense = network.DensePseudoInverse();
        Assert.True(sums.IsExact(0));
        Near(Index(dense, _ => 1), sums.KirchhoffIndex(0, 0.95));
        Near(Index(dense, u => network.Strengths[u]), sums.DegreeKirchhoffIndex(0, 0.95));
        Near(Index(dense, u => w[u]), sums.WeightedKirchhoffIndex(0, 0.95)!.Value);
        Estimate[] diagonals = sums.Diagonals(2);
        for (int u = 0; u < network.NodeCount; u++)
            Near(dense[u, u], diagonals[u]);

        static void Near(double truth, Estimate estimate)
        {
            Assert.Equal(truth, estimate.Value, Math.Abs(truth) * 1e-7); // as far as the dense inverse goes over eight decades
            Assert.Equal(0, estimate.StandardError);
        }
    }

    [Fact]
    public void An_exact_block_leaves_the_noise_of_the_others_alone()
    {
        Network network = Towns(seed: 5, weak: 1e-3);
        Blocks blocks = Blocks.Find(network);
        double truth = Index(network.DensePseudoInverse(), _ => 1);
        int largest = Enumerable.Range(0, blocks.Count).MaxBy(blocks.NodesOf);
        Estimate all = Probed(null), some = Probed(Exact(network, blocks, null, b => b == largest));
        Assert.InRange(some.StandardError, all.StandardError * 0.05, all.StandardError * 0.95);
        Assert.InRange(truth, some.Value - (4 * some.StandardError), some.Value + (4 * some.StandardError));

        Estimate Probed(ExactBlocks? exact)
        {
            NodeSums sums = new(blocks, null, exact);
            Probing.Panels(network, 64, 1, 1e-3, panel => sums.Add(panel, 2));
            return sums.KirchhoffIndex(0, 0.95);
        }
    }

    [Theory]
    // Kf of a path (n-1) n (n+1) / 6; of a star (n-1)^2 (Lukovits, Nikolic & Trinajstic 1999). Degree-Kirchhoff of a tree:
    // 4 Kf - (n-1)(2n-1) (Gutman 1994, for the distances of a tree; both from memory).
    [InlineData(Family.Path, 5000, 5000.0 * 4999 * 5001 / 6)]
    [InlineData(Family.Star, 5000, 4999.0 * 4999)]
    public void Trees_are_exact(Family family, int n, double index)
    {
        MemorySink sink = new();
        IndexEntry entry = EstimateRun.Execute(
            TestNetworks.Of(family, n), new EstimatePlan { Probes = 4 }, new EstimateInputs(), sink, new SilentObserver(), default).Index[0];
        Assert.Equal(("exact", 0), (entry.Method, entry.Probes));
        Assert.Equal(index, entry.KirchhoffIndex.Value, index * 1e-12);
        Assert.Equal((0, entry.KirchhoffIndex.Value), (entry.KirchhoffIndex.StandardError, entry.KirchhoffIndex.Upper));
        double degree = (4 * index) - ((n - 1.0) * ((2.0 * n) - 1));
        Assert.Equal(degree, entry.DegreeKirchhoffIndex, degree * 1e-12);
        Assert.All(sink["nodes"].Column<string>("method"), method => Assert.Equal("exact", method));
        Assert.All(sink["nodes"].Column<double>("resistance_diagonal_se"), error => Assert.Equal(0, error));
        Assert.Equal(2 * index, sink["nodes"].Column<double>("total_resistance").Sum(), index * 1e-10);
    }

    [Fact]
    public void The_parts_of_right_hand_sides_in_blocks_add_up_and_hubs_find_their_links()
    {
        // Triangles and one larger block around a hub of 200 links: looked up from either side.
        List<(long, long)> links = [];
        for (long i = 0; i < 90; i++)
            links.AddRange([(0, 1 + (2 * i)), (0, 2 + (2 * i)), (1 + (2 * i), 2 + (2 * i))]);
        for (long i = 1000; i < 1020; i++)
            links.AddRange([(0, i), (i, 1000 + ((i + 1) % 20))]);
        Network network = TestNetworks.Unit([.. links]);
        Blocks blocks = Blocks.Find(network);
        BlockRows rows = new(blocks);
        int hub = network.Node(0);
        using ProbePanel panel = new(network, 3);
        panel.Draw(1, 28, 1);
        double[] sum = new double[16];
        double strength = 0;
        unsafe
        {
            float* row = stackalloc float[16];
            for (int b = 0; b < blocks.Count; b++)
            {
                if (blocks.Head(b) != hub && blocks.BlockOf(hub) != b)
                    continue;
                rows.Gather(panel, b, hub, row, []);
                strength += blocks.Head(b) == hub ? rows.OfHead(b) : rows.OfMember(hub);
                for (int lane = 0; lane < 16; lane++)
                    sum[lane] += row[lane];
            }
        }
        Assert.Equal((91, 200.0), (blocks.Count, strength));
        Assert.Equal(panel.B.Row(hub).ToArray(), sum.Select(x => (float)x));
        Assert.All(sum[12..], unused => Assert.Equal(0, unused));
        Assert.Contains(sum, x => x != 0);
    }

    public static TheoryData<string> Small => ["towns", "cactus", "decades"];

    [Theory]
    [MemberData(nameof(Small))]
    public void Intervals_and_errors_are_true_beside_weak_bridges(string name)
    {
        Network network = name switch
        {
            "towns" => Towns(seed: 2, weak: 1e-4),
            "cactus" => TestNetworks.Random(120, 140, 7, decades: 0),
            _ => TestNetworks.Random(120, 170, 8, decades: 3),
        };
        double[] w = Weights(network);
        Matrix<double> dense = network.DensePseudoInverse();
        double[] truth = [Index(dense, _ => 1), Index(dense, u => network.Strengths[u]), Index(dense, u => w[u])];
        const int seeds = 200;
        int[] covered = new int[3];
        double[] sum = new double[3], squares = new double[3], claimed = new double[3];
        double ofDiagonals = 0, squaresOfDiagonals = 0, claimedOfDiagonals = 0;
        for (ulong seed = 1; seed <= seeds; seed++)
        {
            NodeSums sums = new Probing(network, 32, seed, weights: w).Nodes;
            Estimate[] found =
                [sums.KirchhoffIndex(0, 0.95), sums.DegreeKirchhoffIndex(0, 0.95), sums.WeightedKirchhoffIndex(0, 0.95)!.Value];
            for (int i = 0; i < 3; i++)
            {
                covered[i] += truth[i] >= found[i].Lower && truth[i] <= found[i].Upper ? 1 : 0;
                double error = found[i].Value - truth[i];
                sum[i] += error;
                squares[i] += error * error;
                claimed[i] += found[i].StandardError * found[i].StandardError;
            }
            Estimate[] diagonals = sums.Diagonals(Quantiles.Normal(0.95));
            for (int u = 0; u < network.NodeCount; u++)
            {
                double error = (diagonals[u].Value - dense[u, u]) / dense[u, u], said = diagonals[u].StandardError / dense[u, u];
                // Exact where only bridges lie around, to the digits of the dense inverse.
                ofDiagonals += dense[u, u] >= diagonals[u].Lower - 1e-9 && dense[u, u] <= diagonals[u].Upper + 1e-9 ? 1 : 0;
                squaresOfDiagonals += error * error;
                claimedOfDiagonals += said * said;
            }
        }
        ofDiagonals /= seeds * network.NodeCount;
        output.WriteLine($"{name}: covered {string.Join(", ", covered)} of {seeds}, diagonals {ofDiagonals:0.000}; "
            + $"spread {Math.Sqrt(squares[0] / seeds) / truth[0]:0.00000}, bias {sum[0] / seeds / truth[0]:0.00000}, "
            + $"claimed/true {Math.Sqrt(claimed[0] / squares[0]):0.00}, of diagonals {Math.Sqrt(claimedOfDiagonals / squaresOfDiagonals):0.00}");
        for (int i = 0; i < 3; i++)
        {
            // 95 % of 200 is 190 +- 3.1; samples are skewed, which costs a little.
            Assert.InRange(covered[i], 178, 199);
            Assert.InRange(Math.Abs(sum[i] / seeds), 0, 3.5 * Math.Sqrt(squares[i] / seeds / seeds));
            Assert.InRange(Math.Sqrt(claimed[i] / squares[i]), 0.85, 1.15);
        }
        Assert.InRange(ofDiagonals, 0.92, 0.98);
        Assert.InRange(Math.Sqrt(claimedOfDiagonals / squaresOfDiagonals), 0.85, 1.15);
    }

    [Fact]
    public void A_weak_bridge_brings_no_noise()
    {
        // The bridge of conductance 1e-4 between the two halves holds nearly all of the index; plain probing would be off by
        // sqrt(2/64) = 18 % of it.
        Network network = Towns(seed: 3, weak: 1e-4);
        NodeSums sums = new Probing(network, 64, 1).Nodes;
        Estimate index = sums.KirchhoffIndex(0, 0.95);
        double truth = Index(network.DensePseudoInverse(), _ => 1);
        Assert.InRange(index.StandardError, truth * 1e-9, truth * 1e-4);
        Assert.InRange(truth, index.Value - (4 * index.StandardError), index.Value + (4 * index.StandardError));
    }

    // Four small worlds of 25 nodes in a row, joined by bridges of which the middle one is weak, with a shared node between two.
    private static Network Towns(int seed, double weak)
    {
        Random random = new(seed);
        List<(long, long, double)> links = [];
        for (int town = 0; town < 4; town++)
        {
            long first = 25 * town;
            for (int i = 0; i < 25; i++)
            {
                links.Add((first + i, first + ((i + 1) % 25), 0.5 + random.NextDouble()));
                links.Add((first + i, first + ((i + 2 + random.Next(20)) % 25), 0.5 + random.NextDouble()));
            }
        }
        links.AddRange([(3, 25, 0.3), (40, 60, weak), (55, 75, 1), (55, 80, 1), (90, 200, 0.01), (200, 201, 2), (201, 202, 1), (202, 200, 3)]);
        return TestNetworks.Of([.. links]);
    }

    private static double[] Weights(Network network) =>
        [.. Enumerable.Range(0, network.NodeCount).Select(u => network.Labels.Integers[u] % 5 * 0.75)];

    private static double Index(Matrix<double> pseudoInverse, Func<int, double> weight)
    {
        double sum = 0;
        for (int u = 0; u < pseudoInverse.RowCount; u++)
        {
            for (int v = 0; v < u; v++)
                sum += weight(u) * weight(v) * pseudoInverse.Resistance(u, v);
        }
        return sum;
    }

    // Resistances between nodes of a block are those of the whole, so a dense L+ of the whole gives every block.
    private static ExactBlocks Exact(Network network, Blocks blocks, double[]? w, Func<int, bool> which)
    {
        Matrix<double> dense = network.DensePseudoInverse();
        HangingWeights sizes = HangingWeights.Of(blocks, null);
        HangingWeights[] kinds = [sizes, HangingWeights.Of(blocks, network.Strengths), HangingWeights.Of(blocks, w ?? new double[network.NodeCount])];
        ExactBlocks exact = new(blocks);
        foreach (int b in Enumerable.Range(0, blocks.Count).Where(which))
        {
            int[] nodes = [.. blocks.Members(b), blocks.Head(b)];
            double Hanging(HangingWeights kind, int i) => i == nodes.Length - 1 ? kind.OfHead(b) : kind.OfMember(nodes[i]);
            double[] index = [.. kinds.Select(kind =>
            {
                double sum = 0;
                for (int i = 0; i < nodes.Length; i++)
                {
                    for (int j = 0; j < i; j++)
                        sum += Hanging(kind, i) * Hanging(kind, j) * dense.Resistance(nodes[i], nodes[j]);
                }
                return sum;
            })];
            double n = network.NodeCount;
            double[] m = [.. nodes.Select(u =>
                (Enumerable.Range(0, nodes.Length).Sum(j => Hanging(sizes, j) * dense.Resistance(u, nodes[j])) / n) - (index[0] / n / n))];
            exact.Set(b, (index[0], index[1], index[2]), m.AsSpan(..^1), m[^1]);
        }
        return exact;
    }
}
