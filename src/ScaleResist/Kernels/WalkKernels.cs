// A step of the walk on whole panels: y_u = 1/d_u sum over neighbours x of c_ux w_x x_x, row by row.
// Reads a row for each arc (from cache where the node order is good), beside it a weight; writes one row a node. Both forms give the same bits.

using System.Runtime.Intrinsics;
using System.Runtime.Intrinsics.X86;
using ScaleResist.Graphs;

namespace ScaleResist.Kernels;

/// <summary>Steps of the walk over panels of 16 probes.</summary>
internal static unsafe class WalkKernels
{
    private const int Width = 16;
    private const int PrefetchArcs = 32;

    /// <summary>y = D^-1 A W x for the rows <c>start .. end-1</c>; a node of strength 0 gets 0.</summary>
    /// <param name="laplacian">D - A.</param>
    /// <param name="weights">The diagonal of W, n values.</param>
    /// <param name="x">n x 16.</param>
    /// <param name="y">n x 16, another panel.</param>
    /// <param name="start">First row.</param>
    /// <param name="end">One past the last.</param>
    public static void Step(Laplacian laplacian, float[] weights, Panel<float> x, Panel<float> y, int start, int end)
    {
        fixed (long* rowStart = laplacian.RowStart)
        fixed (int* neighbours = laplacian.Neighbours)
        fixed (double* conductances = laplacian.Conductances)
        fixed (double* strengths = laplacian.Strengths)
        fixed (float* weight = weights)
        {
            if (PanelKernels.Scalar)
                StepScalar(rowStart, neighbours, conductances, strengths, weight, x.Pointer, y.Pointer, start, end);
            else
                StepVector(rowStart, neighbours, conductances, strengths, weight, x.Pointer, y.Pointer, start, end);
        }
    }

    private static void StepVector(
        long* rowStart, int* neighbours, double* conductances, double* strengths, float* weight, float* x, float* y, int start, int end)
    {
        long lastArc = rowStart[end] - 1;
        for (int u = start; u < end; u++)
        {
            Vector512<float> around = Vector512<float>.Zero;
            long rowEnd = rowStart[u + 1];
            for (long k = rowStart[u]; k < rowEnd; k++)
            {
                if (Sse.IsSupported)
                    Sse.Prefetch0(x + ((long)neighbours[Math.Min(k + PrefetchArcs, lastArc)] * Width));
                float factor = conductances == null ? weight[neighbours[k]] : (float)conductances[k] * weight[neighbours[k]];
                around += Vector512.Create(factor) * Vector512.Load(x + ((long)neighbours[k] * Width));
            }
            (Vector512.Create(Share(strengths[u])) * around).Store(y + ((long)u * Width));
        }
    }

    private static void StepScalar(
        long* rowStart, int* neighbours, double* conductances, double* strengths, float* weight, float* x, float* y, int start, int end)
    {
        for (int u = start; u < end; u++)
        {
            for (int lane = 0; lane < Width; lane++)
            {
                float around = 0;
                for (long k = rowStart[u]; k < rowStart[u + 1]; k++)
                {
                    float factor = conductances == null ? weight[neighbours[k]] : (float)conductances[k] * weight[neighbours[k]];
                    around += factor * x[((long)neighbours[k] * Width) + lane];
                }
                y[((long)u * Width) + lane] = Share(strengths[u]) * around;
            }
        }
    }

    private static float Share(double strength) => strength > 0 ? (float)(1 / strength) : 0;
}
