// What all probes say of the loss of links: the Kirchhoff index of a component of n nodes rises by n c |v|^2 / (1 - p), v = L+ (e_u - e_v), p = cR.
//
// Signs g on the nodes give x = L+ g and D = x_u - x_v = v'g, so that E D^2 = |v|^2. Two entries of v are known without them:
//     v_u - v_v = R,     v_u + v_v = l_u - l_v = delta     (l the diagonal of L+; both from the signs on the links),
// and only the rest of v is left to the probes. For any coefficients a = v_u, b = v_v taken for known,
//     |v|^2 = v_u^2 + v_v^2 + E (D - a g_u - b g_v)^2.
// R is known well. The noise of delta is that of smooth modes, which on meshes and roads would spoil more than delta explains: so each link takes
// delta or 0 for v_u + v_v, whichever is foreseen to leave the smaller error; either is unbiased to first order. Social networks gain most: there v is
// little more than its two entries.
// Error: sqrt(2/K) of the rest, R (se of R) and delta (se of delta) of the known part, and c (se of R) / (1 - p) of what the loss is divided by.
// Memory: 14 bytes a link and 4 a node.

using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Estimating;

/// <summary>Sums for the loss of every link, panel by panel.</summary>
public sealed class LossSums
{
    private const double Rounding = 1e-10; // of 1 - p: below it the link is a bridge for all that floats can say
    private readonly Network network;
    private readonly Bridges bridges;
    private readonly int[] componentOf;
    private readonly float[] squares, withU, withV; // of D^2, D g_u, D g_v
    private readonly ushort[] differ; // probes with g_u <> g_v
    private readonly float[] nodeSquares; // of z - (1 - 1/n) b/d
    private readonly List<(int Start, int End)> chunks;

    /// <summary>Empty sums for the network's links.</summary>
    public LossSums(Network network, Bridges bridges)
    {
        this.network = network;
        this.bridges = bridges;
        componentOf = network.ComponentOfNodes();
        squares = new float[network.LinkCount];
        withU = new float[network.LinkCount];
        withV = new float[network.LinkCount];
        differ = new ushort[network.LinkCount];
        nodeSquares = new float[network.NodeCount];
        chunks = RowChunks.Of(network);
    }

    /// <summary>Probes added so far.</summary>
    public int Probes { get; private set; }

    /// <summary>Adds two solved panels of as many probes; panels are added in order of their numbers.</summary>
    public void Add(ProbePanel panel, NodeSignPanel nodes, int threads)
    {
        if (panel.Probes != nodes.Probes)
            throw new ArgumentException("Signs on nodes and on links come in equal numbers.", nameof(nodes));
        Parallel.For(0, chunks.Count, new ParallelOptions { MaxDegreeOfParallelism = threads }, i =>
        {
            AddNodes(panel, chunks[i].Start, chunks[i].End);
            AddLinks(nodes, chunks[i].Start, chunks[i].End);
        });
        Probes += panel.Probes;
    }

    private unsafe void AddNodes(ProbePanel panel, int start, int end)
    {
        for (int u = start; u < end; u++)
        {
            double d = network.Strengths[u];
            if (d > 0)
                nodeSquares[u] += LossKernels.NodeSquares(panel.Z.Pointer + (u * 16L), panel.B.Pointer + (u * 16L), (float)(Share(u) / d));
        }
    }

    private unsafe void AddLinks(NodeSignPanel nodes, int start, int end)
    {
        float* x = nodes.X.Pointer;
        int nextBridge = bridges.FirstFrom(network.LinkStart[start]);
        for (int u = start; u < end; u++)
        {
            uint signsU = nodes.Signs(u);
            long link = network.LinkStart[u];
            for (long k = network.FirstLaterArc(u); k < network.RowStart[u + 1]; k++, link++)
            {
                if (nextBridge < bridges.Count && bridges.Links[nextBridge] == link)
                {
                    nextBridge++;
                    continue;
                }
                int v = network.Neighbours[k];
                uint signsV = nodes.Signs(v);
                (float square, float one, float other) = LossKernels.LinkMoments(x + (u * 16L), x + (v * 16L), signsU, signsV);
                squares[link] += square;
                withU[link] += one;
                withV[link] += other;
                differ[link] += (ushort)System.Numerics.BitOperations.PopCount((signsU ^ signsV) & nodes.Lanes);
            }
        }
    }

    /// <summary>The estimate for a link that is no bridge; null where it is one but for what rounding hides. Interval symmetric in its logarithm.</summary>
    /// <param name="link">Its number.</param>
    /// <param name="arc">Its arc from u.</param>
    /// <param name="u">Its smaller node.</param>
    /// <param name="resistance">R.</param>
    /// <param name="quantile">Of the standard normal.</param>
    internal Estimate? Estimate(long link, long arc, int u, in Estimate resistance, double quantile)
    {
        int v = network.Neighbours[arc];
        double c = network.Conductance(arc), r = resistance.Value, error = resistance.StandardError, rest = 1 - (c * r);
        if (!(rest > Rounding))
            return null;
        (double delta, double deltaVariance) = Delta(u, v, c, r);
        double fall = 2.0 / Probes;
        double without = Rest(link, r / 2, -r / 2), with = Rest(link, (delta + r) / 2, (delta - r) / 2);
        double variance = fall * without * without;
        double varianceWith = (fall * with * with) + (delta * delta * deltaVariance) + (3 * deltaVariance * deltaVariance);
        double spread = (r * r / 2) + without;
        if (varianceWith < variance)
        {
            variance = varianceWith;
            spread = (((r * r) + (delta * delta)) / 2) + with;
        }
        double value = network.Components[componentOf[u]].Nodes * c * spread / rest;
        double ofResistance = (r * error / spread) + (c * error / rest);
        double relative = Math.Sqrt((variance / (spread * spread)) + (ofResistance * ofResistance));
        double stretch = Math.Exp(quantile * relative);
        return new Estimate(value, value * relative, value / stretch, value * stretch);
    }

    // mean (D - a g_u - b g_v)^2.
    private double Rest(long link, double a, double b)
    {
        double k = Probes, alike = 1 - (2 * differ[link] / k);
        return Math.Max(0, ((squares[link] - (2 * ((a * withU[link]) + (b * withV[link])))) / k) + (a * a) + (b * b) + (2 * a * b * alike));
    }

    // l_u - l_v and its variance. With r = z - (1 - 1/n) b/d: l = (1 - 1/n)^2/d + E r^2, and E (r_u - r_v)^2 = R - 1/d_u - 1/d_v + 2c/(d_u d_v).
    private (double Delta, double Variance) Delta(int u, int v, double c, double r)
    {
        double du = network.Strengths[u], dv = network.Strengths[v], share = Share(u);
        double one = nodeSquares[u] / (double)Probes, other = nodeSquares[v] / (double)Probes;
        double apart = Math.Max(0, r - (1 / du) - (1 / dv) + (2 * c / (du * dv)));
        double common = Math.Clamp((one + other - apart) / 2, 0, Math.Sqrt(one * other));
        double delta = (share * share * ((1 / du) - (1 / dv))) + one - other;
        return (delta, 2.0 / Probes * ((one * one) + (other * other) - (2 * common * common)));
    }

    private double Share(int node) => 1 - (1.0 / network.Components[componentOf[node]].Nodes);
}
