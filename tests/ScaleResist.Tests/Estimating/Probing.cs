// Probed estimates of a whole network for tests, with plain projection on the same probes as the yardstick.

using ScaleResist.Estimating;
using ScaleResist.Graphs;
using ScaleResist.Solving;

namespace ScaleResist.Tests.Estimating;

internal sealed class Probing
{
    private readonly LinkSums sums;
    private readonly double[] plain;

    public Probing(Network network, int probes, ulong seed, double modeError = 1e-3, double[]? weights = null)
    {
        Network = network;
        Blocks blocks = Blocks.Find(network);
        Bridges = blocks.Bridges;
        sums = new LinkSums(network, Bridges, LinkSteps.Of(network, double.PositiveInfinity, 1, default));
        Nodes = new NodeSums(blocks, weights);
        plain = new double[network.LinkCount];
        Panels(network, probes, seed, modeError, panel =>
        {
            sums.Add(panel, 1);
            Nodes.Add(panel, 1);
            AddPlain(panel, probes);
        });
    }

    /// <summary>Draws and solves panels one by one.</summary>
    public static void Panels(Network network, int probes, ulong seed, double modeError, Action<ProbePanel> add)
    {
        LaplacianSolver solver = new(network);
        using ProbePanel panel = new(network, seed);
        using SolverWorkspace<float> workspace = solver.NewWorkspace<float>();
        for (int i = 0; i < ProbePanel.CountFor(probes); i++)
        {
            panel.Draw(i, probes, 1);
            panel.Solve(solver, modeError, workspace, default);
            add(panel);
        }
    }

    public Network Network { get; }

    public Bridges Bridges { get; }

    public NodeSums Nodes { get; }

    /// <summary>mean (z_u - z_v)^2 by link: plain projection.</summary>
    public IReadOnlyList<double> Plain => plain;

    public LinkResult[] Links(double confidence = 0.95)
    {
        LinkResult[] links = new LinkResult[Network.LinkCount];
        new LinkResistances(Network, Bridges, sums, confidence).Fill(0, links);
        return links;
    }

    private void AddPlain(ProbePanel panel, int probes)
    {
        long link = 0;
        for (int u = 0; u < Network.NodeCount; u++)
        {
            for (long k = Network.FirstLaterArc(u); k < Network.RowStart[u + 1]; k++, link++)
            {
                for (int j = 0; j < panel.Probes; j++)
                {
                    double difference = panel.Z.Row(u)[j] - panel.Z.Row(Network.Neighbours[k])[j];
                    plain[link] += difference * difference / probes;
                }
            }
        }
    }
}
