// What passes between 16 columns in doubles and a panel of floats in a refined solve; scalar twins in RefineKernelTwins.
// Invariant: within a column, operations follow the scalar twin's order exactly, so both give the same bits.
//
// Data movement, in rows of 64 bytes a node:
//   Residual  reads 4 (two of them again for each neighbour), writes 1      Narrow  reads 2, writes 1      Correct  reads 3, writes 3

using System.Runtime.CompilerServices;
using System.Runtime.Intrinsics;
using System.Runtime.Intrinsics.X86;
using ScaleResist.Graphs;

namespace ScaleResist.Kernels;

/// <summary>Kernels over the nodes <c>start .. end-1</c>, 16 columns at a time.</summary>
internal static unsafe class RefineKernels
{
    private const int PrefetchArcs = 8;

    /// <summary>r = scale (b - L x), taken in doubles and then rounded, one scale a column; returns |b - L x|^2 by column.</summary>
    public static LaneSums Residual(
        Laplacian laplacian, PanelPair b, PanelPair x, in LaneSums scales, Panel<float> r, int start, int end)
    {
        if (PanelKernels.Scalar)
            return RefineKernelTwins.Residual(laplacian, b, x, scales, r, start, end);
        LaneSums sums = default;
        (Vector512<double> scale1, Vector512<double> scale2) = Load(scales);
        double* x1 = x.First.Pointer, x2 = x.Second.Pointer;
        fixed (long* rowStart = laplacian.RowStart)
        fixed (int* neighbours = laplacian.Neighbours)
        fixed (double* conductances = laplacian.Conductances)
        fixed (double* strengths = laplacian.Strengths)
        {
            long lastArc = rowStart[end] - 1;
            for (int chunk = start; chunk < end; chunk += LaneSums.ChunkRows)
            {
                int chunkEnd = Math.Min(end, chunk + LaneSums.ChunkRows);
                Vector512<double> squares1 = Vector512<double>.Zero, squares2 = Vector512<double>.Zero;
                for (int u = chunk; u < chunkEnd; u++)
                {
                    Vector512<double> around1 = Vector512<double>.Zero, around2 = Vector512<double>.Zero;
                    long rowEnd = rowStart[u + 1];
                    for (long k = rowStart[u]; k < rowEnd; k++)
                    {
                        if (Sse.IsSupported)
                        {
                            int ahead = neighbours[Math.Min(k + PrefetchArcs, lastArc)];
                            Sse.Prefetch0(Row(x1, ahead));
                            Sse.Prefetch0(Row(x2, ahead));
                        }
                        Vector512<double> one = Vector512.Load(Row(x1, neighbours[k])), other = Vector512.Load(Row(x2, neighbours[k]));
                        if (conductances != null)
                        {
                            one *= Vector512.Create(conductances[k]);
                            other *= Vector512.Create(conductances[k]);
                        }
                        around1 += one;
                        around2 += other;
                    }
                    Vector512<double> strength = Vector512.Create(strengths[u]);
                    Vector512<double> left1 = Vector512.Load(Row(b.First.Pointer, u)) - ((strength * Vector512.Load(Row(x1, u))) - around1);
                    Vector512<double> left2 = Vector512.Load(Row(b.Second.Pointer, u)) - ((strength * Vector512.Load(Row(x2, u))) - around2);
                    squares1 += left1 * left1;
                    squares2 += left2 * left2;
                    Vector512.Narrow(scale1 * left1, scale2 * left2).Store(r.Pointer + (16L * u));
                }
                Add(ref sums, squares1, squares2);
            }
        }
        return sums;
    }

    /// <summary>r = scale b, rounded, one scale a column.</summary>
    public static void Narrow(PanelPair b, in LaneSums scales, Panel<float> r, int start, int end)
    {
        if (PanelKernels.Scalar)
        {
            RefineKernelTwins.Narrow(b, scales, r, start, end);
            return;
        }
        (Vector512<double> scale1, Vector512<double> scale2) = Load(scales);
        for (int u = start; u < end; u++)
        {
            Vector512.Narrow(scale1 * Vector512.Load(Row(b.First.Pointer, u)), scale2 * Vector512.Load(Row(b.Second.Pointer, u)))
                .Store(r.Pointer + (16L * u));
        }
    }

    /// <summary>x += factor d with one factor a column, in doubles; d = 0.</summary>
    public static void Correct(PanelPair x, Panel<float> d, in LaneSums factors, int start, int end)
    {
        if (PanelKernels.Scalar)
        {
            RefineKernelTwins.Correct(x, d, factors, start, end);
            return;
        }
        (Vector512<double> factor1, Vector512<double> factor2) = Load(factors);
        for (int u = start; u < end; u++)
        {
            (Vector512<double> one, Vector512<double> other) = Vector512.Widen(Vector512.Load(d.Pointer + (16L * u)));
            double* x1 = Row(x.First.Pointer, u), x2 = Row(x.Second.Pointer, u);
            (Vector512.Load(x1) + (factor1 * one)).Store(x1);
            (Vector512.Load(x2) + (factor2 * other)).Store(x2);
            Vector512<float>.Zero.Store(d.Pointer + (16L * u));
        }
    }

    private static (Vector512<double> First, Vector512<double> Second) Load(in LaneSums values)
    {
        ref double first = ref Unsafe.AsRef(in values[0]);
        return (Vector512.LoadUnsafe(ref first), Vector512.LoadUnsafe(ref first, 8));
    }

    private static void Add(ref LaneSums sums, Vector512<double> first, Vector512<double> second)
    {
        for (int lane = 0; lane < PanelPair.Half; lane++)
        {
            sums[lane] += first[lane];
            sums[lane + PanelPair.Half] += second[lane];
        }
    }

    [MethodImpl(MethodImplOptions.AggressiveInlining)]
    private static double* Row(double* panel, int node) => (double*)((byte*)panel + ((long)node * 64));
}
