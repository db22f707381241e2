// The plain twins of RefineKernels: what each kernel means, column by column, in the same order of operations.

using ScaleResist.Graphs;

namespace ScaleResist.Kernels;

/// <summary>Reference kernels; see <see cref="RefineKernels"/> for each one's meaning.</summary>
internal static class RefineKernelTwins
{
    public static LaneSums Residual(
        Laplacian laplacian, PanelPair b, PanelPair x, in LaneSums scales, Panel<float> r, int start, int end)
    {
        LaneSums sums = default;
        for (int chunk = start; chunk < end; chunk += LaneSums.ChunkRows)
        {
            int chunkEnd = Math.Min(end, chunk + LaneSums.ChunkRows);
            for (int column = 0; column < PanelPair.Width; column++)
            {
                double squares = 0;
                for (int u = chunk; u < chunkEnd; u++)
                {
                    double around = 0;
                    for (long k = laplacian.RowStart[u]; k < laplacian.RowStart[u + 1]; k++)
                    {
                        double neighbour = x.At(laplacian.Neighbours[k], column);
                        around += laplacian.Conductances is null ? neighbour : neighbour * laplacian.Conductances[k];
                    }
                    double left = b.At(u, column) - ((laplacian.Strengths[u] * x.At(u, column)) - around);
                    squares += left * left;
                    r.Row(u)[column] = (float)(scales[column] * left);
                }
                sums[column] += squares;
            }
        }
        return sums;
    }

    public static void Narrow(PanelPair b, in LaneSums scales, Panel<float> r, int start, int end)
    {
        for (int u = start; u < end; u++)
        {
            for (int column = 0; column < PanelPair.Width; column++)
                r.Row(u)[column] = (float)(scales[column] * b.At(u, column));
        }
    }

    public static void Correct(PanelPair x, Panel<float> d, in LaneSums factors, int start, int end)
    {
        for (int u = start; u < end; u++)
        {
            for (int column = 0; column < PanelPair.Width; column++)
                x.At(u, column) += factors[column] * d.Row(u)[column];
            d.Row(u).Clear();
        }
    }
}
