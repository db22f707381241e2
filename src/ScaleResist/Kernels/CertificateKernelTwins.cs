// The plain twins of CertificateKernels: what each kernel means, column by column, in the same order of operations.

using ScaleResist.Graphs;

namespace ScaleResist.Kernels;

/// <summary>Reference kernels; see <see cref="CertificateKernels"/> for each one's meaning.</summary>
internal static class CertificateKernelTwins
{
    public static LaneSums Flows(Laplacian laplacian, Panel<double> x, Panel<double> r, Panel<double> slack, int start, int end)
    {
        LaneSums sums = default;
        for (int chunk = start; chunk < end; chunk += LaneSums.ChunkRows)
        {
            int chunkEnd = Math.Min(end, chunk + LaneSums.ChunkRows);
            for (int lane = 0; lane < Panel<double>.Width; lane++)
            {
                double energy = 0;
                for (int u = chunk; u < chunkEnd; u++)
                {
                    double net = 0, size = 0, heat = 0, b = r.Row(u)[lane];
                    for (long k = laplacian.RowStart[u]; k < laplacian.RowStart[u + 1]; k++)
                    {
                        double fall = x.Row(u)[lane] - x.Row(laplacian.Neighbours[k])[lane];
                        double flow = laplacian.Conductances is null ? fall : laplacian.Conductances[k] * fall;
                        net += flow;
                        size += Math.Abs(flow);
                        heat += flow * fall;
                    }
                    r.Row(u)[lane] = b - net;
                    slack.Row(u)[lane] = (laplacian.RowStart[u + 1] - laplacian.RowStart[u] + 3) * CertificateKernels.Unit * (size + Math.Abs(b));
                    energy += heat;
                }
                sums[lane] += energy;
            }
        }
        for (int lane = 0; lane < Panel<double>.Width; lane++)
            sums[lane] /= 2;
        return sums;
    }

    public static LaneSums Route(int[] parent, double[] resistance, Panel<double> r, Panel<double> slack, int start, int end)
    {
        LaneSums sums = default;
        for (int chunkEnd = end; chunkEnd > start + 1; chunkEnd -= LaneSums.ChunkRows)
        {
            int chunk = Math.Max(start + 1, chunkEnd - LaneSums.ChunkRows);
            for (int lane = 0; lane < Panel<double>.Width; lane++)
            {
                double energy = 0;
                for (int u = chunkEnd - 1; u >= chunk; u--)
                {
                    double flow = r.Row(u)[lane], doubt = slack.Row(u)[lane];
                    double most = Math.Abs(flow) + doubt;
                    energy += resistance[u] * most * most;
                    double sum = r.Row(parent[u])[lane] + flow;
                    r.Row(parent[u])[lane] = sum;
                    slack.Row(parent[u])[lane] += doubt + (CertificateKernels.Unit * Math.Abs(sum));
                }
                sums[lane] += energy;
            }
        }
        return sums;
    }
}
