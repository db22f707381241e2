// Sixteen probes of the nodes: x = L+ g for independent signs g, so that (x_u - x_v)^2 has the mean |L+ (e_u - e_v)|^2.
// Invariant: the sign of a node in a probe depends on (seed, probe, label) alone and on no sign of a link; unused lanes are 0 in b and x.

using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Estimating;

/// <summary>Right-hand sides b = g less its mean over each component, and solutions x = L+ b of 16 probes.</summary>
public sealed class NodeSignPanel : IDisposable
{
    private const uint Stream = 3; // of Philox: the probes have 0, smooth directions and preconditioners 1
    private const int RowsPerPiece = 1 << 16; // sums of signs are exact in floats up to 2^24
    private readonly Network network;
    private readonly ulong seed;
    private readonly ushort[] signs;

    /// <summary>Memory for a panel of the network; <see cref="Draw"/> fills it.</summary>
    public NodeSignPanel(Network network, ulong seed)
    {
        this.network = network;
        this.seed = seed;
        signs = new ushort[network.NodeCount];
        B = new Panel<float>(network.NodeCount);
        X = new Panel<float>(network.NodeCount);
    }

    /// <summary>How many of its lanes are in use.</summary>
    public int Probes { get; private set; }

    /// <summary>Right-hand sides, n x 16.</summary>
    public Panel<float> B { get; }

    /// <summary>Solutions, n x 16, to be filled by a solver.</summary>
    public Panel<float> X { get; }

    internal uint Lanes => ProbeKernels.LanesOf(Probes);

    /// <summary>Draws the right-hand sides of a panel.</summary>
    /// <param name="number">The panel's number.</param>
    /// <param name="probes">K, the probes of the whole run; the last panel may use fewer than 16 lanes.</param>
    /// <param name="threads">Threads to share the rows among.</param>
    public void Draw(int number, int probes, int threads)
    {
        Probes = Math.Min(ProbePanel.Width, probes - (number * ProbePanel.Width));
        ParallelOptions options = new() { MaxDegreeOfParallelism = threads };
        foreach (Component component in network.Components)
        {
            if (component.Nodes == 1)
                break; // single nodes come last, and L+ is 0 there
            int pieces = (component.Nodes + RowsPerPiece - 1) / RowsPerPiece;
            float[][] sums = new float[pieces][];
            InPieces(i => sums[i] = DrawSigns(number, component.Start + (i * RowsPerPiece), EndOf(component, i)));
            float[] centre = new float[ProbePanel.Width];
            for (int lane = 0; lane < ProbePanel.Width; lane++)
                centre[lane] = (float)(sums.Sum(sum => (double)sum[lane]) / component.Nodes);
            InPieces(i => Fill(component.Start + (i * RowsPerPiece), EndOf(component, i), centre));

            void InPieces(Action<int> work)
            {
                if (pieces == 1)
                    work(0);
                else
                    Parallel.For(0, pieces, options, work);
            }
        }
    }

    /// <summary>The signs of a node: bit j is set where g = -1 in probe j.</summary>
    internal uint Signs(int node) => signs[node];

    private static int EndOf(Component component, int piece) => (int)Math.Min(component.End, component.Start + ((piece + 1L) * RowsPerPiece));

    private unsafe float[] DrawSigns(int panel, int start, int end)
    {
        float[] sum = new float[ProbePanel.Width];
        fixed (float* row = sum)
        {
            for (int u = start; u < end; u++)
            {
                ulong key = network.NodeKeys[u];
                Bits128 bits = Philox.Block((uint)key, (uint)(key >> 32), (uint)panel >> 3, Stream, seed);
                ulong half = (panel & 4) == 0 ? bits.Low : bits.High;
                signs[u] = (ushort)(half >> ((panel & 3) * 16));
                ProbeKernels.AddLink(row, 1, signs[u], Lanes);
            }
        }
        return sum;
    }

    private unsafe void Fill(int start, int end, float[] centre)
    {
        for (int u = start; u < end; u++)
        {
            Span<float> row = B.Row(u);
            for (int lane = 0; lane < ProbePanel.Width; lane++)
                row[lane] = -centre[lane];
            ProbeKernels.AddLink(B.Pointer + ((long)u * ProbePanel.Width), 1, signs[u], Lanes);
        }
    }

    /// <inheritdoc/>
    public void Dispose()
    {
        B.Dispose();
        X.Dispose();
    }
}
