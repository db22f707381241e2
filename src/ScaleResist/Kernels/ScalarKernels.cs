// The plain twins of VectorKernels: what each kernel means, lane by lane, in the same order of operations.
// Tests hold the vector kernels against these for every length; SCALERESIST_KERNELS=scalar runs them instead.

using System.Numerics;
using ScaleResist.Graphs;

namespace ScaleResist.Kernels;

/// <summary>Reference kernels; see <see cref="VectorKernels"/> for each one's meaning.</summary>
internal static unsafe class ScalarKernels
{
    public static void Multiply<T>(Laplacian laplacian, T* x, T* y, int start, int end, ref LaneSums sums)
        where T : unmanaged, INumber<T>
    {
        for (int chunk = start; chunk < end; chunk += LaneSums.ChunkRows)
        {
            int chunkEnd = Math.Min(end, chunk + LaneSums.ChunkRows);
            for (int lane = 0; lane < Panel<T>.Width; lane++)
            {
                T products = T.Zero;
                for (int u = chunk; u < chunkEnd; u++)
                {
                    ref T own = ref At(x, u, lane);
                    T result = (T.CreateTruncating(laplacian.Strengths[u]) * own) - Around(laplacian, x, u, lane);
                    At(y, u, lane) = result;
                    products += own * result;
                }
                sums[lane] += double.CreateTruncating(products);
            }
        }
    }

    public static void Residual<T>(Laplacian laplacian, T* b, T* x, T* r, int start, int end, ref LaneSums sums)
        where T : unmanaged, INumber<T>
    {
        for (int chunk = start; chunk < end; chunk += LaneSums.ChunkRows)
        {
            int chunkEnd = Math.Min(end, chunk + LaneSums.ChunkRows);
            for (int lane = 0; lane < Panel<T>.Width; lane++)
            {
                T squares = T.Zero;
                for (int u = chunk; u < chunkEnd; u++)
                {
                    T residual = At(b, u, lane)
                        - ((T.CreateTruncating(laplacian.Strengths[u]) * At(x, u, lane)) - Around(laplacian, x, u, lane));
                    if (r != null)
                        At(r, u, lane) = residual;
                    squares += residual * residual;
                }
                sums[lane] += double.CreateTruncating(squares);
            }
        }
    }

    public static void Squares<T>(T* x, int start, int end, ref LaneSums sums)
        where T : unmanaged, INumber<T>
    {
        for (int chunk = start; chunk < end; chunk += LaneSums.ChunkRows)
        {
            int chunkEnd = Math.Min(end, chunk + LaneSums.ChunkRows);
            for (int lane = 0; lane < Panel<T>.Width; lane++)
            {
                T squares = T.Zero;
                for (int u = chunk; u < chunkEnd; u++)
                    squares += At(x, u, lane) * At(x, u, lane);
                sums[lane] += double.CreateTruncating(squares);
            }
        }
    }

    public static void Sum<T>(T* x, int start, int end, ref LaneSums sums)
        where T : unmanaged, INumber<T>
    {
        for (int chunk = start; chunk < end; chunk += LaneSums.ChunkRows)
        {
            int chunkEnd = Math.Min(end, chunk + LaneSums.ChunkRows);
            for (int lane = 0; lane < Panel<T>.Width; lane++)
            {
                T total = T.Zero;
                for (int u = chunk; u < chunkEnd; u++)
                    total += At(x, u, lane);
                sums[lane] += double.CreateTruncating(total);
            }
        }
    }

    public static void Shift<T>(T* x, T* shifts, int start, int end)
        where T : unmanaged, INumber<T>
    {
        for (int u = start; u < end; u++)
        {
            for (int lane = 0; lane < Panel<T>.Width; lane++)
                At(x, u, lane) -= shifts[lane];
        }
    }

    private static T Around<T>(Laplacian laplacian, T* x, int node, int lane)
        where T : unmanaged, INumber<T>
    {
        T around = T.Zero;
        for (long k = laplacian.RowStart[node]; k < laplacian.RowStart[node + 1]; k++)
        {
            T neighbour = At(x, laplacian.Neighbours[k], lane);
            around += laplacian.Conductances is null ? neighbour : T.CreateTruncating(laplacian.Conductances[k]) * neighbour;
        }
        return around;
    }

    private static ref T At<T>(T* panel, int node, int lane)
        where T : unmanaged => ref panel[((long)node * Panel<T>.Width) + lane];
}
