// Walks around a link: moments against dense powers, the residual's variance against a dense L+, and the bound against the resistance.
// Reference: dense matrices by MathNet.Numerics.

using MathNet.Numerics.LinearAlgebra;
using ScaleResist.DataGen.Networks;
using ScaleResist.Estimating;
using ScaleResist.Graphs;

namespace ScaleResist.Tests.Estimating;

public class LinkStepsTests
{
    public static TheoryData<int, int, double, int, int> Networks => new()
    {
        // nodes, links, decades, steps, the most neighbours of a node that walks pass
        { 3, 3, 0, 2, 99 },
        { 3, 3, 2, 3, 99 },
        { 4, 6, 0, 3, 99 },
        { 6, 15, 1, 2, 99 },
        { 12, 20, 2, 3, 99 },
        { 25, 40, 0, 2, 4 },
        { 25, 60, 3, 3, 5 },
        { 40, 60, 6, 2, 99 },
        { 40, 60, 6, 3, 3 },
    };

    [Theory]
    [MemberData(nameof(Networks))]
    public void Residual_of_the_steps_kept_has_the_variance_that_the_raised_bound_claims(int nodes, int links, double decades, int count, int most)
    {
        for (int seed = 1; seed <= 5; seed++)
        {
            Network network = TestNetworks.Random(nodes, links, seed, decades);
            LinkSteps steps = LinkSteps.Of(network, WalkReach.Through(network, count, most), 1, default);
            Matrix<double> inverse = network.DensePseudoInverse(), signs = OfSigns(network);
            Matrix<double>[] walks = Walks(network, count, most);
            int gained = 0;
            foreach ((long link, int u, int v, double c) in Links(network))
            {
                LinkBounds bounds = LinkBounds.Of(c, network.Strengths[u], network.Strengths[v]);
                if (bounds.Range == 0)
                    continue;
                Vector<double> phi = Vector<double>.Build.Dense(nodes);
                phi[u] += bounds.FactorU;
                phi[v] -= bounds.FactorV;
                ReadOnlySpan<ushort> kept = steps.Corrections(link);
                for (int k = 0; k < count; k++)
                {
                    phi += LinkSteps.Widen(kept[2 * k]) * walks[k].Row(u);
                    phi -= LinkSteps.Widen(kept[(2 * k) + 1]) * walks[k].Row(v);
                }
                Vector<double> e = Vector<double>.Build.Dense(nodes);
                (e[u], e[v]) = (1, -1);
                double resistance = inverse.Resistance(u, v);

                // As vectors over the links' independent signs: z_u - z_v - phi'b and z_u - z_v - q / sqrt(c).
                Vector<double> solved = inverse * e;
                Vector<double> one = signs.TransposeThisAndMultiply(solved - phi), other = signs.TransposeThisAndMultiply(solved);
                other[(int)link] -= 1 / Math.Sqrt(c);
                LinkBounds raised = bounds.Raised(steps.Gains[(int)link]);
                Assert.Equal(resistance - raised.Lower, one * one, 1e-6 * resistance);
                Assert.Equal(raised.Upper - resistance, other * other, 1e-6 * resistance);
                Assert.Equal(0, one * other, 1e-6 * resistance);
                Assert.InRange(raised.Lower, bounds.Lower, resistance * (1 + 1e-9));
                gained += steps.Gains[(int)link] > 0.01 * bounds.Range ? 1 : 0;
            }
            if (nodes > 6)
                Assert.True(gained > links / 4, $"only {gained} of {links} links gain");
        }
    }

    [Theory]
    [InlineData(Family.Preferential)]
    [InlineData(Family.SmallWorld)]
    [InlineData(Family.Road)]
    [InlineData(Family.Cube)]
    public void More_steps_never_lower_a_links_bound_and_never_pass_its_resistance(Family family)
    {
        Network network = TestNetworks.Of(family, 500);
        Matrix<double> inverse = network.DensePseudoInverse();
        LinkSteps two = LinkSteps.Of(network, WalkReach.Through(network, 2, int.MaxValue), 2, default);
        LinkSteps three = LinkSteps.Of(network, WalkReach.Through(network, 3, int.MaxValue), 1, default);
        foreach ((long link, int u, int v, double c) in Links(network))
        {
            LinkBounds bounds = LinkBounds.Of(c, network.Strengths[u], network.Strengths[v]);
            double resistance = inverse.Resistance(u, v);
            double second = two.Gains[(int)link], third = three.Gains[(int)link];
            Assert.InRange(second, 0, resistance - bounds.Lower + (1e-9 * resistance));
            Assert.InRange(third, second - (1e-4 * bounds.Range), resistance - bounds.Lower + (1e-9 * resistance));
        }
    }

    [Fact]
    public void Steps_do_not_depend_on_threads()
    {
        Network network = TestNetworks.Of(Family.Preferential, 60_000);
        WalkReach reach = WalkReach.Of(network, WalkReach.MostSteps);
        LinkSteps one = LinkSteps.Of(network, reach, 1, default), two = LinkSteps.Of(network, reach, 3, default);
        Assert.True(one.Gains.SequenceEqual(two.Gains));
        for (long link = 0; link < network.LinkCount; link += 97)
            Assert.True(one.Corrections(link).SequenceEqual(two.Corrections(link)));
    }

    [Theory]
    [InlineData(Family.Grid, 10_000, 3)]
    [InlineData(Family.SmallWorld, 10_000, 3)]
    [InlineData(Family.Road, 10_000, 3)]
    [InlineData(Family.Preferential, 10_000, 2)]
    [InlineData(Family.Star, 10_000, 2)]
    public void Counted_work_chooses_three_steps_on_meshes_and_two_around_hubs(Family family, int nodes, int steps) =>
        Assert.Equal(steps, WalkReach.Of(TestNetworks.Of(family, nodes), WalkReach.MostSteps).Steps);

    [Fact]
    public void Too_little_memory_leaves_one_step() =>
        Assert.Null(LinkSteps.Of(TestNetworks.Of(Family.Grid, 400), 1000, 1, default));

    // p_k as rows: (D^-1 A W)^k D^-1 with W the nodes that may be passed, by dense products.
    private static Matrix<double>[] Walks(Network network, int count, int most)
    {
        Matrix<double> step = -network.DenseLaplacian();
        Matrix<double> share = Matrix<double>.Build.Dense(network.NodeCount, network.NodeCount);
        for (int u = 0; u < network.NodeCount; u++)
            (step[u, u], share[u, u]) = (0, 1 / network.Strengths[u]);
        step = share * step;
        for (int x = 0; x < network.NodeCount; x++)
        {
            if (network.Degree(x) > most)
                step.ClearColumn(x);
        }
        Matrix<double>[] walks = [share, .. new Matrix<double>[count - 1]];
        for (int k = 1; k < count; k++)
            walks[k] = step * walks[k - 1];
        // y_0 stands for b itself: its factors carry no 1/d.
        walks[0] = Matrix<double>.Build.DenseIdentity(network.NodeCount);
        return walks;
    }

    // B' C^(1/2): b of each link's sign.
    private static Matrix<double> OfSigns(Network network)
    {
        Matrix<double> signs = Matrix<double>.Build.Dense(network.NodeCount, (int)network.LinkCount);
        foreach ((long link, int u, int v, double c) in Links(network))
            (signs[u, (int)link], signs[v, (int)link]) = (Math.Sqrt(c), -Math.Sqrt(c));
        return signs;
    }

    private static IEnumerable<(long Link, int U, int V, double C)> Links(Network network)
    {
        long link = 0;
        for (int u = 0; u < network.NodeCount; u++)
        {
            for (long k = network.FirstLaterArc(u); k < network.RowStart[u + 1]; k++, link++)
                yield return (link, u, network.Neighbours[k], network.Conductance(k));
        }
    }
}
