// The plain twins of GaussSeidelKernels, lane by lane, in the same order of operations.

using System.Numerics;
using ScaleResist.Graphs;

namespace ScaleResist.Kernels;

/// <summary>Reference kernels; see <see cref="GaussSeidelKernels"/> for each one's meaning.</summary>
internal static class GaussSeidelKernelTwins
{
    public static void Start<T>(
        SplitLaplacian split, Panel<T> r, Panel<T> rho, int start, int end, ref LaneSums squares, ref LaneSums energies)
        where T : unmanaged, INumber<T>
    {
        for (int chunk = start; chunk < end; chunk += LaneSums.ChunkRows)
        {
            for (int lane = 0; lane < Panel<T>.Width; lane++)
            {
                T square = T.Zero, energy = T.Zero;
                for (int v = chunk; v < Math.Min(end, chunk + LaneSums.ChunkRows); v++)
                {
                    T residual = r.Row(v)[lane];
                    T scaled = (residual + Earlier(split, rho, v, lane)) * Inverse<T>(split, v);
                    rho.Row(v)[lane] = scaled;
                    square += residual * residual;
                    energy += Strength<T>(split, v) * scaled * scaled;
                }
                squares[lane] += double.CreateTruncating(square);
                energies[lane] += double.CreateTruncating(energy);
            }
        }
    }

    public static LaneSums Back<T>(SplitLaplacian split, Panel<T> rho, Panel<T> pi, Panel<T> t, in LaneSums factors, int start, int end)
        where T : unmanaged, INumber<T>
    {
        LaneSums sums = default;
        for (int chunkEnd = end; chunkEnd > start; chunkEnd -= LaneSums.ChunkRows)
        {
            for (int lane = 0; lane < Panel<T>.Width; lane++)
            {
                T beta = T.CreateTruncating(factors[lane]), products = T.Zero;
                for (int v = chunkEnd - 1; v >= Math.Max(start, chunkEnd - LaneSums.ChunkRows); v--)
                {
                    T around = T.Zero;
                    for (long k = split.Laplacian.RowStart[v + 1] - 1; k >= split.Laplacian.RowStart[v] + split.Earlier[v]; k--)
                        around += Term(split.Laplacian, t, lane, k);
                    T direction = rho.Row(v)[lane];
                    if (beta != T.Zero)
                        direction += beta * pi.Row(v)[lane];
                    pi.Row(v)[lane] = direction;
                    T solved = direction + (Inverse<T>(split, v) * around);
                    t.Row(v)[lane] = solved;
                    products += solved * ((Strength<T>(split, v) * direction) - around);
                }
                sums[lane] += double.CreateTruncating(products);
            }
        }
        return sums;
    }

    public static LaneSums Forward<T>(
        SplitLaplacian split, Panel<T> x, Panel<T> rho, Panel<T> pi, Panel<T> t, in LaneSums factors, int start, int end)
        where T : unmanaged, INumber<T>
    {
        LaneSums sums = default;
        for (int chunk = start; chunk < end; chunk += LaneSums.ChunkRows)
        {
            for (int lane = 0; lane < Panel<T>.Width; lane++)
            {
                T a = T.CreateTruncating(factors[lane]), energy = T.Zero;
                for (int v = chunk; v < Math.Min(end, chunk + LaneSums.ChunkRows); v++)
                {
                    T both = pi.Row(v)[lane] + (Inverse<T>(split, v) * Earlier(split, t, v, lane));
                    T solved = t.Row(v)[lane];
                    t.Row(v)[lane] = both - solved;
                    x.Row(v)[lane] += a * solved;
                    T residual = rho.Row(v)[lane] - (a * both);
                    rho.Row(v)[lane] = residual;
                    energy += Strength<T>(split, v) * residual * residual;
                }
                sums[lane] += double.CreateTruncating(energy);
            }
        }
        return sums;
    }

    private static T Earlier<T>(SplitLaplacian split, Panel<T> panel, int node, int lane)
        where T : unmanaged, INumber<T>
    {
        T around = T.Zero;
        for (long k = split.Laplacian.RowStart[node]; k < split.Laplacian.RowStart[node] + split.Earlier[node]; k++)
            around += Term(split.Laplacian, panel, lane, k);
        return around;
    }

    private static T Term<T>(Laplacian laplacian, Panel<T> panel, int lane, long arc)
        where T : unmanaged, INumber<T>
    {
        T neighbour = panel.Row(laplacian.Neighbours[arc])[lane];
        return laplacian.Conductances is null ? neighbour : T.CreateTruncating(laplacian.Conductances[arc]) * neighbour;
    }

    private static T Strength<T>(SplitLaplacian split, int node)
        where T : unmanaged, INumber<T> => T.CreateTruncating(split.Laplacian.Strengths[node]);

    private static T Inverse<T>(SplitLaplacian split, int node)
        where T : unmanaged, INumber<T> => T.CreateTruncating(GaussSeidelKernels.Inverse(split.Laplacian.Strengths[node]));
}
