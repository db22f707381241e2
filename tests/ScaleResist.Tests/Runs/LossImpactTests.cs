// loss_impact against what it stands for: the Kirchhoff index of the network without the link, less that with it.

using MathNet.Numerics.LinearAlgebra;
using ScaleResist.DataGen.Networks;
using ScaleResist.Graphs;
using ScaleResist.Runs;

namespace ScaleResist.Tests.Runs;

public sealed class LossImpactTests
{
    private static readonly EstimatePlan Exact = new() { Route = Route.Exact, Want = Want.Links };

    // A cycle becomes a path, n (n^2-1)/6 - n (n^2-1)/12 (Gutman & Mohar 1996); K_n without a link has eigenvalues n (n-2 times) and n - 2.
    [Fact]
    public void Cycles_and_complete_graphs_have_closed_forms()
    {
        Assert.All(Impacts(TestNetworks.Of(Family.Cycle, 50), Exact), rise => Assert.Equal(50.0 * 2499 / 12, rise!.Value, 1e-8));
        Assert.All(Impacts(TestNetworks.Of(Family.Complete, 50), Exact), rise => Assert.Equal(2.0 / 48, rise!.Value, 1e-12));
        Assert.All(Impacts(TestNetworks.Of(Family.Path, 50), Exact), rise => Assert.Null(rise));
    }

    // Dense pseudo-inverses by MathNet.Numerics, of the network and of it without each link that is no bridge.
    [Theory]
    [InlineData(0)]
    [InlineData(3)]
    public void Exact_impacts_are_the_differences_of_dense_indices(double decades)
    {
        for (int seed = 1; seed <= 6; seed++)
        {
            Network network = TestNetworks.Random(40, 40 + (seed * 5), seed, decades); // cut nodes and bridges abound
            double?[] impacts = Impacts(network, Exact);
            Bridges bridges = Blocks.Find(network).Bridges;
            Matrix<double> laplacian = network.DenseLaplacian();
            double index = Index(laplacian);
            int row = 0;
            for (int u = 0; u < network.NodeCount; u++)
            {
                for (long k = network.FirstLaterArc(u); k < network.RowStart[u + 1]; k++, row++)
                {
                    if (bridges.Contains(row))
                    {
                        Assert.Null(impacts[row]);
                        continue;
                    }
                    double rise = Index(Without(laplacian, u, network.Neighbours[k], network.Conductance(k))) - index;
                    Assert.Equal(rise, impacts[row]!.Value, (1e-8 * rise) + (1e-11 * index));
                }
            }
        }
    }

    // Rayleigh 1877: no loss brings any two nodes closer, so the index cannot fall.
    [Fact]
    public void No_loss_lowers_the_index()
    {
        for (int seed = 1; seed <= 20; seed++)
            Assert.All(Impacts(TestNetworks.Random(200, 280, seed, seed % 7), Exact), rise => Assert.True(rise is null or > 0));
    }

    [Fact]
    public void Some_losses_in_the_power_network_are_those_of_a_run_without_the_link() => AgainstRuns(TestNetworks.Open("power.tsv"), 400);

    // Separators of two hundred nodes and more: fronts of many panels.
    [Fact]
    public void Some_losses_in_a_cube_are_those_of_a_run_without_the_link() => AgainstRuns(TestNetworks.Of(Family.Cube, 3375), 2000);

    [Fact]
    [Trait("Category", "Slow")]
    public void Every_loss_in_the_power_network_is_that_of_a_run_without_the_link() => AgainstRuns(TestNetworks.Open("power.tsv"), 1);

    [Fact]
    public void Impacts_are_the_same_to_the_bit_with_1_2_and_3_threads()
    {
        Network network = TestNetworks.Of(Family.Road, 20_000);
        double?[] one = Impacts(network, Exact with { Threads = 1 });
        Assert.Equal(one, Impacts(network, Exact with { Threads = 2 }));
        Assert.Equal(one, Impacts(network, Exact with { Threads = 3 }));
    }

    private static void AgainstRuns(Network network, int step)
    {
        double?[] impacts = Impacts(network, Exact);
        double index = KirchhoffIndex(network);
        List<(int U, int V, double C)> links = [];
        for (int u = 0; u < network.NodeCount; u++)
        {
            for (long k = network.FirstLaterArc(u); k < network.RowStart[u + 1]; k++)
                links.Add((u, network.Neighbours[k], network.Conductance(k)));
        }
        Parallel.For(0, links.Count, new ParallelOptions { MaxDegreeOfParallelism = 2 }, lost =>
        {
            if (lost % step > 0 || impacts[lost] is not double rise)
                return;
            Network left = TestNetworks.Of([.. links.Where((_, i) => i != lost).Select(link => ((long)link.U, (long)link.V, link.C))]);
            Assert.Equal(rise, KirchhoffIndex(left) - index, (1e-8 * rise) + (1e-11 * index));
        });
    }

    private static double KirchhoffIndex(Network network)
    {
        MemorySink sink = new();
        EstimateRun.Execute(
            network, new EstimatePlan { Route = Route.Exact, Want = Want.Index, Threads = 1 }, new EstimateInputs(), sink, new SilentObserver(), default);
        return sink["index"].Column<double>("kirchhoff_index")[0];
    }

    private static double?[] Impacts(Network network, EstimatePlan plan)
    {
        MemorySink sink = new();
        EstimateRun.Execute(network, plan, new EstimateInputs(), sink, new SilentObserver(), default);
        return sink["links"].Column<double?>("loss_impact");
    }

    private static Matrix<double> Without(Matrix<double> laplacian, int u, int v, double c)
    {
        Matrix<double> left = laplacian.Clone();
        left[u, u] -= c;
        left[v, v] -= c;
        left[u, v] += c;
        left[v, u] += c;
        return left;
    }

    // n tr L+.
    private static double Index(Matrix<double> laplacian)
    {
        int n = laplacian.RowCount;
        double share = 1.0 / n;
        return n * (laplacian.Add(share).Cholesky().Solve(Matrix<double>.Build.DenseIdentity(n)).Trace() - 1);
    }
}
