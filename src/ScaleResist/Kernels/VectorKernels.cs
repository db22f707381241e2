// The kernels of an iteration on panels, one 64-byte row a node and step. ScalarKernels holds the same arithmetic lane by lane.
// Invariant: within a column, operations follow the scalar twin's order exactly (no fused multiply-add): both give the same bits.
//
// Data movement, in panels of n rows (64 n bytes each), beside the adjacency (8 bytes a node, 4 an arc, 8 more with weights):
//   Multiply   reads 1 (rows again for each neighbour: from cache where the node order is good), writes 1
//   Residual   reads 2 (x as above), writes 1 or none

using System.Runtime.CompilerServices;
using System.Runtime.Intrinsics;
using System.Runtime.Intrinsics.X86;
using ScaleResist.Graphs;

namespace ScaleResist.Kernels;

/// <summary>Panel kernels over the nodes <c>start .. end-1</c>; W = 16 floats or 8 doubles.</summary>
internal static unsafe class VectorKernels
{
    private const int PrefetchArcs = 64;

    /// <summary>y = L x, and sums = x'y by column.</summary>
    public static void Multiply<T>(Laplacian laplacian, T* x, T* y, int start, int end, ref LaneSums sums)
        where T : unmanaged
    {
        fixed (long* rowStart = laplacian.RowStart)
        fixed (int* neighbours = laplacian.Neighbours)
        fixed (double* conductances = laplacian.Conductances)
        fixed (double* strengths = laplacian.Strengths)
        {
            long lastArc = rowStart[end] - 1;
            for (int chunk = start; chunk < end; chunk += LaneSums.ChunkRows)
            {
                int chunkEnd = Math.Min(end, chunk + LaneSums.ChunkRows);
                Vector512<T> products = Vector512<T>.Zero;
                for (int u = chunk; u < chunkEnd; u++)
                {
                    Vector512<T> around = Vector512<T>.Zero;
                    long rowEnd = rowStart[u + 1];
                    for (long k = rowStart[u]; k < rowEnd; k++)
                    {
                        if (Sse.IsSupported)
                            Sse.Prefetch0(Row(x, neighbours[Math.Min(k + PrefetchArcs, lastArc)]));
                        Vector512<T> neighbour = Vector512.Load(Row(x, neighbours[k]));
                        around += conductances == null ? neighbour : Broadcast<T>(conductances[k]) * neighbour;
                    }
                    Vector512<T> own = Vector512.Load(Row(x, u));
                    Vector512<T> result = (Broadcast<T>(strengths[u]) * own) - around;
                    result.Store(Row(y, u));
                    products += own * result;
                }
                Add(ref sums, products);
            }
        }
    }

    /// <summary>sums = |b - L x|^2 by column; r = b - L x, or nothing where it is null.</summary>
    public static void Residual<T>(Laplacian laplacian, T* b, T* x, T* r, int start, int end, ref LaneSums sums)
        where T : unmanaged
    {
        fixed (long* rowStart = laplacian.RowStart)
        fixed (int* neighbours = laplacian.Neighbours)
        fixed (double* conductances = laplacian.Conductances)
        fixed (double* strengths = laplacian.Strengths)
        {
            long lastArc = rowStart[end] - 1;
            for (int chunk = start; chunk < end; chunk += LaneSums.ChunkRows)
            {
                int chunkEnd = Math.Min(end, chunk + LaneSums.ChunkRows);
                Vector512<T> squares = Vector512<T>.Zero;
                for (int u = chunk; u < chunkEnd; u++)
                {
                    Vector512<T> around = Vector512<T>.Zero;
                    long rowEnd = rowStart[u + 1];
                    for (long k = rowStart[u]; k < rowEnd; k++)
                    {
                        if (Sse.IsSupported)
                            Sse.Prefetch0(Row(x, neighbours[Math.Min(k + PrefetchArcs, lastArc)]));
                        Vector512<T> neighbour = Vector512.Load(Row(x, neighbours[k]));
                        around += conductances == null ? neighbour : Broadcast<T>(conductances[k]) * neighbour;
                    }
                    Vector512<T> residual = Vector512.Load(Row(b, u))
                        - ((Broadcast<T>(strengths[u]) * Vector512.Load(Row(x, u))) - around);
                    if (r != null)
                        residual.Store(Row(r, u));
                    squares += residual * residual;
                }
                Add(ref sums, squares);
            }
        }
    }

    /// <summary>sums = |x|^2 by column.</summary>
    public static void Squares<T>(T* x, int start, int end, ref LaneSums sums)
        where T : unmanaged
    {
        for (int chunk = start; chunk < end; chunk += LaneSums.ChunkRows)
        {
            int chunkEnd = Math.Min(end, chunk + LaneSums.ChunkRows);
            Vector512<T> squares = Vector512<T>.Zero;
            for (int u = chunk; u < chunkEnd; u++)
                squares += Vector512.Load(Row(x, u)) * Vector512.Load(Row(x, u));
            Add(ref sums, squares);
        }
    }

    /// <summary>sums = the sum of each column.</summary>
    public static void Sum<T>(T* x, int start, int end, ref LaneSums sums)
        where T : unmanaged
    {
        for (int chunk = start; chunk < end; chunk += LaneSums.ChunkRows)
        {
            int chunkEnd = Math.Min(end, chunk + LaneSums.ChunkRows);
            Vector512<T> total = Vector512<T>.Zero;
            for (int u = chunk; u < chunkEnd; u++)
                total += Vector512.Load(Row(x, u));
            Add(ref sums, total);
        }
    }

    /// <summary>x -= one shift a column.</summary>
    public static void Shift<T>(T* x, T* shifts, int start, int end)
        where T : unmanaged
    {
        Vector512<T> shift = Vector512.Load(shifts);
        for (int u = start; u < end; u++)
            (Vector512.Load(Row(x, u)) - shift).Store(Row(x, u));
    }

    [MethodImpl(MethodImplOptions.AggressiveInlining)]
    private static T* Row<T>(T* panel, int node)
        where T : unmanaged => (T*)((byte*)panel + ((long)node * 64));

    [MethodImpl(MethodImplOptions.AggressiveInlining)]
    internal static Vector512<T> Broadcast<T>(double value)
        where T : unmanaged =>
        typeof(T) == typeof(float) ? Vector512.Create((float)value).As<float, T>() : Vector512.Create(value).As<double, T>();

    internal static void Add<T>(ref LaneSums sums, Vector512<T> values)
        where T : unmanaged
    {
        for (int lane = 0; lane < Panel<T>.Width; lane++)
            sums[lane] += typeof(T) == typeof(float) ? values.AsSingle()[lane] : values.AsDouble()[lane];
    }
}
