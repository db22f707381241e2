// The kernels of refined solves and of certificates against their scalar twins, bit for bit, and against what they promise.

using ScaleResist.DataGen.Networks;
using ScaleResist.Estimating;
using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Tests.Kernels;

public class RefineKernelTests
{
    [Theory]
    [InlineData(0)]
    [InlineData(3)]
    public void Kernels_equal_their_scalar_twins(double decades)
    {
        for (int n = 3; n <= 256; n += n < 40 ? 1 : 9)
            Compare(TestNetworks.Of(Family.Cycle, n, decades: decades), 0);
        Compare(TestNetworks.Of(Family.Grid, 900, decades: decades), 0);
        Compare(TestNetworks.Of(Family.SmallWorld, 700, decades: decades), 130);
    }

    private static void Compare(Network network, int start)
    {
        int n = network.NodeCount;
        RoutingTree tree = new(network);
        using PanelPair b = Filled(n, 1), x = Filled(n, 2), b2 = Filled(n, 1), x2 = Filled(n, 2);
        using Panel<float> r = new(n), r2 = new(n), d = new(n), d2 = new(n);
        using Panel<double> slack = new(n), slack2 = new(n);
        LaneSums scales = default;
        for (int lane = 0; lane < 16; lane++)
            scales[lane] = 0.3 * (lane + 1);
        List<LaneSums> vector = [];
        RefineKernels.Narrow(b, scales, r, start, n);
        RefineKernels.Narrow(b, scales, d, start, n);
        vector.Add(RefineKernels.Residual(network.Laplacian, b, x, scales, r, start, n));
        RefineKernels.Correct(x, d, scales, start, n);
        vector.Add(CertificateKernels.Flows(network.Laplacian, x.Second, b.Second, slack, start, n));
        if (start == 0)
            vector.Add(CertificateKernels.Route(tree.Parent, tree.Resistance, b.Second, slack, start, n));

        List<LaneSums> scalar = [];
        RefineKernelTwins.Narrow(b2, scales, r2, start, n);
        RefineKernelTwins.Narrow(b2, scales, d2, start, n);
        scalar.Add(RefineKernelTwins.Residual(network.Laplacian, b2, x2, scales, r2, start, n));
        RefineKernelTwins.Correct(x2, d2, scales, start, n);
        scalar.Add(CertificateKernelTwins.Flows(network.Laplacian, x2.Second, b2.Second, slack2, start, n));
        if (start == 0)
            scalar.Add(CertificateKernelTwins.Route(tree.Parent, tree.Resistance, b2.Second, slack2, start, n));

        for (int u = 0; u < n; u++)
        {
            Assert.True(r.Row(u).SequenceEqual(r2.Row(u)) && d.Row(u).SequenceEqual(d2.Row(u)), $"row {u}");
            Assert.True(x.First.Row(u).SequenceEqual(x2.First.Row(u)) && x.Second.Row(u).SequenceEqual(x2.Second.Row(u)), $"row {u}");
            Assert.True(b.Second.Row(u).SequenceEqual(b2.Second.Row(u)) && slack.Row(u).SequenceEqual(slack2.Row(u)), $"row {u}");
        }
        for (int i = 0; i < vector.Count; i++)
        {
            for (int lane = 0; lane < 16; lane++)
                Assert.Equal(scalar[i][lane], vector[i][lane]);
        }
    }

    private static PanelPair Filled(int rows, int seed)
    {
        PanelPair pair = new(rows);
        Random random = new(seed);
        for (int u = 0; u < rows; u++)
        {
            for (int column = 0; column < 16; column++)
                pair.At(u, column) = random.NextDouble() - 0.5;
        }
        return pair;
    }
}
