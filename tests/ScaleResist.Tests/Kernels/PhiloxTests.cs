// The generator against the known answers of its authors, and the signs against what they promise.

using ScaleResist.DataGen.Networks;
using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Tests.Kernels;

public class PhiloxTests
{
    [Theory]
    // Known answers of Philox 4x32-10: Salmon, Moraes, Dror & Shaw, SC 2011 (its published test vectors, from memory).
    [InlineData(0u, 0u, 0u, 0u, 0ul, 0x6627e8d5u, 0xe169c58du, 0xbc57ac4cu, 0x9b00dbd8u)]
    [InlineData(0xffffffffu, 0xffffffffu, 0xffffffffu, 0xffffffffu, ulong.MaxValue, 0x408f276du, 0x41c83b0eu, 0xa20bc7c6u, 0x6d5451fdu)]
    [InlineData(0x243f6a88u, 0x85a308d3u, 0x13198a2eu, 0x03707344u, 0x299f31d0a4093822ul, 0xd16cfe09u, 0x94fdccebu, 0x5001e420u, 0x24126ea1u)]
    public void Blocks_equal_the_published_answers(
        uint c0, uint c1, uint c2, uint c3, ulong key, uint r0, uint r1, uint r2, uint r3)
    {
        Bits128 bits = Philox.Block(c0, c1, c2, c3, key);
        Assert.Equal(r0 | ((ulong)r1 << 32), bits.Low);
        Assert.Equal(r2 | ((ulong)r3 << 32), bits.High);
    }

    [Fact]
    public void Signs_are_opposite_from_the_two_ends_and_balanced_over_links_and_probes()
    {
        Network network = TestNetworks.Of(Family.Preferential, 2000);
        long ones = 0, agree = 0, count = 0;
        uint before = 0;
        for (int u = 0; u < network.NodeCount; u++)
        {
            for (long k = network.FirstLaterArc(u); k < network.RowStart[u + 1]; k++)
            {
                (ulong one, ulong other) = (network.NodeKeys[u], network.NodeKeys[network.Neighbours[k]]);
                for (int panel = 0; panel < 20; panel++)
                {
                    uint signs = ProbeKernels.Signs(one, other, 3, panel);
                    Assert.Equal(0xFFFFu, signs ^ ProbeKernels.Signs(other, one, 3, panel));
                    ones += uint.PopCount(signs);
                    agree += uint.PopCount(~(signs ^ before) & 0xFFFF);
                    before = signs;
                    count += 16;
                }
            }
        }
        double deviation = 0.5 / Math.Sqrt(count);
        Assert.InRange((double)ones / count, 0.5 - (4 * deviation), 0.5 + (4 * deviation));
        Assert.InRange((double)agree / count, 0.5 - (4 * deviation), 0.5 + (4 * deviation));
    }

    [Fact]
    public void A_link_keeps_its_signs_when_the_network_around_it_changes()
    {
        Network small = TestNetworks.Unit((10, 20), (20, 30), (30, 10));
        Network large = TestNetworks.Unit((5, 30), (5, 10), (30, 20), (40, 5), (10, 30), (20, 10));
        uint Sign(Network network) =>
            ProbeKernels.Signs(network.NodeKeys[network.Node(20)], network.NodeKeys[network.Node(30)], 9, 2);
        Assert.Equal(Sign(small), Sign(large));
    }
}
