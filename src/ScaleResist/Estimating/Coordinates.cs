// K coordinates a node, r_u = z_u - b_u / d_u, from which the resistance of any pair follows without the network.
//
// For two nodes of one component joined by conductance c (0 if not), Cov(z) = L+, Cov(z, b) = I - 11'/n, Cov(b) = L give
//     R = 1/d_u + 1/d_v - 2 c / (d_u d_v) + E (r_u - r_v)^2.

using ScaleResist.Graphs;

namespace ScaleResist.Estimating;

/// <summary>n x K coordinates, row-major.</summary>
/// <param name="network">The network.</param>
public sealed class Coordinates(Network network)
{
    private readonly List<float[]> byPanel = [];

    /// <summary>K, the probes added so far.</summary>
    public int Probes { get; private set; }

    /// <summary>Takes a solved panel. Panels are added in order of their numbers.</summary>
    public void Add(ProbePanel panel)
    {
        float[] values = new float[(long)network.NodeCount * panel.Probes];
        for (int u = 0; u < network.NodeCount; u++)
        {
            if (network.Strengths[u] == 0)
                continue;
            float inverse = (float)(1 / network.Strengths[u]);
            ReadOnlySpan<float> z = panel.Z.Row(u), b = panel.B.Row(u);
            Span<float> to = values.AsSpan(u * panel.Probes, panel.Probes);
            for (int j = 0; j < to.Length; j++)
                to[j] = z[j] - (b[j] * inverse);
        }
        byPanel.Add(values);
        Probes += panel.Probes;
    }

    /// <summary>Copies the K coordinates of a node.</summary>
    public void CopyTo(int node, Span<float> to)
    {
        foreach (float[] values in byPanel)
        {
            int width = values.Length / network.NodeCount;
            values.AsSpan(node * width, width).CopyTo(to);
            to = to[width..];
        }
    }
}
