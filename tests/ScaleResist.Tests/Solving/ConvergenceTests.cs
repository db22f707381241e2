// Doubles to 1e-8 on every family, also with conductances over six decades, and on every open network.

using ScaleResist.DataGen.Networks;
using ScaleResist.Graphs;
using ScaleResist.Kernels;
using ScaleResist.Solving;
using Xunit.Abstractions;

namespace ScaleResist.Tests.Solving;

public class ConvergenceTests(ITestOutputHelper output)
{
    public static TheoryData<Family, double> Everything
    {
        get
        {
            TheoryData<Family, double> data = [];
            foreach (Family family in Enum.GetValues<Family>())
            {
                if (family != Family.Complete)
                {
                    data.Add(family, 0);
                    data.Add(family, 6);
                }
            }
            return data;
        }
    }

    [Theory]
    [MemberData(nameof(Everything))]
    public void Ten_thousand_nodes_reach_1e_8(Family family, double decades) => Reach(TestNetworks.Of(family, 10_000, decades: decades));

    [Theory]
    [Trait("Category", "Slow")]
    [MemberData(nameof(Everything))]
    public void A_million_nodes_reach_1e_8(Family family, double decades) => Reach(TestNetworks.Of(family, 1_000_000, decades: decades));

    [Theory]
    [InlineData("karate.tsv", WeightMeaning.None)]
    [InlineData("dolphins.tsv", WeightMeaning.None)]
    [InlineData("lesmis.tsv", WeightMeaning.Conductance)]
    [InlineData("netscience.tsv", WeightMeaning.Conductance)]
    [InlineData("power.tsv", WeightMeaning.None)]
    [InlineData("as-22july06.tsv", WeightMeaning.None)]
    [InlineData("us-states.tsv", WeightMeaning.None)]
    public void Open_networks_reach_1e_8(string file, WeightMeaning weights) => Reach(TestNetworks.Open(file, weights));

    private void Reach(Network network)
    {
        LaplacianSolver solver = new(network);
        using Panel<double> b = new(network.NodeCount), x = new(network.NodeCount);
        using SolverWorkspace<double> workspace = solver.NewWorkspace<double>();
        Random random = new(1);
        for (int u = 0; u < network.NodeCount; u++)
        {
            for (int j = 0; j < 8; j++)
                b.Row(u)[j] = random.NextDouble() - 0.5;
        }
        foreach (Component component in network.Components)
            PanelKernels.Centre(b, component.Start, component.End);
        solver.Solve(b, x, 8, 1e-8, workspace, default);
        output.WriteLine($"{network.LinkCount} links, {solver.Preconditioner}, {solver.Statistics.MostIterations} iterations, "
            + $"error {solver.Statistics.LargestEnergyError:0.0e0}, residual {solver.Statistics.LargestResidual:0.0e0}");
        Assert.InRange(solver.Statistics.LargestEnergyError, 0, 1e-8);
    }
}
