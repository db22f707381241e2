// What a probe says of nodes: x_u = z_u - k b_u / d_u, its squares by node and their weighted sums by probe.
// Reads z and b (2 panels) and writes 8 bytes a node; sums by probe go through doubles row by row.

using System.Runtime.Intrinsics;

namespace ScaleResist.Kernels;

/// <summary>Sums by probe over some nodes: of x^2, of d x^2 and of w x^2.</summary>
internal struct NodeSquareSums
{
    /// <summary>Sum of x_u^2.</summary>
    public LaneSums Plain;

    /// <summary>Sum of d_u x_u^2.</summary>
    public LaneSums ByStrength;

    /// <summary>Sum of w_u x_u^2; 0 without node weights.</summary>
    public LaneSums ByWeight;
}

/// <summary>Kernels on the rows of a panel of 16 probes.</summary>
internal static unsafe class NodeKernels
{
    /// <summary>Adds x_u^2 summed over the probes to <paramref name="squares"/>, and returns the sums by probe.</summary>
    /// <param name="z">L+ b, n x 16.</param>
    /// <param name="b">Right-hand sides, n x 16; lanes not in use are 0 in both.</param>
    /// <param name="share">k = 1 - 1/n of the component.</param>
    /// <param name="strengths">d, n values, positive in the range.</param>
    /// <param name="weights">w, n values, or null.</param>
    /// <param name="squares">n values; the range is added to.</param>
    /// <param name="start">First node.</param>
    /// <param name="end">One past the last node.</param>
    public static NodeSquareSums Squares(
        Panel<float> z, Panel<float> b, double share, double[] strengths, double[]? weights, double[] squares, int start, int end)
    {
        if (PanelKernels.Scalar)
            return SquaresScalar(z, b, share, strengths, weights, squares, start, end);
        NodeSquareSums sums = default;
        Vector512<double> plainLow = default, plainHigh = default, strengthLow = default, strengthHigh = default;
        Vector512<double> weightLow = default, weightHigh = default;
        for (int u = start; u < end; u++)
        {
            float* zRow = z.Pointer + ((long)u * 16);
            float* bRow = b.Pointer + ((long)u * 16);
            Vector512<float> x = Vector512.Load(zRow) - (Vector512.Create((float)(share / strengths[u])) * Vector512.Load(bRow));
            x *= x;
            (Vector512<double> low, Vector512<double> high) = Vector512.Widen(x);
            squares[u] += Total(low + high);
            plainLow += low;
            plainHigh += high;
            strengthLow += strengths[u] * low;
            strengthHigh += strengths[u] * high;
            if (weights is not null)
            {
                weightLow += weights[u] * low;
                weightHigh += weights[u] * high;
            }
        }
        Spread(plainLow, plainHigh, ref sums.Plain);
        Spread(strengthLow, strengthHigh, ref sums.ByStrength);
        Spread(weightLow, weightHigh, ref sums.ByWeight);
        return sums;
    }

    private static NodeSquareSums SquaresScalar(
        Panel<float> z, Panel<float> b, double share, double[] strengths, double[]? weights, double[] squares, int start, int end)
    {
        NodeSquareSums sums = default;
        Span<double> halves = stackalloc double[8];
        for (int u = start; u < end; u++)
        {
            for (int lane = 0; lane < 16; lane++)
            {
                float x = z.Row(u)[lane] - ((float)(share / strengths[u]) * b.Row(u)[lane]);
                double square = x * x;
                sums.Plain[lane] += square;
                sums.ByStrength[lane] += strengths[u] * square;
                sums.ByWeight[lane] += weights is null ? 0 : weights[u] * square;
                halves[lane & 7] = lane < 8 ? square : halves[lane & 7] + square;
            }
            for (int half = 4; half > 0; half /= 2)
            {
                for (int lane = 0; lane < half; lane++)
                    halves[lane] += halves[lane + half];
            }
            squares[u] += halves[0];
        }
        return sums;
    }

    // Halves are added to halves, so that the scalar twin can follow the same tree.
    private static double Total(Vector512<double> lanes)
    {
        Vector256<double> four = lanes.GetLower() + lanes.GetUpper();
        Vector128<double> two = four.GetLower() + four.GetUpper();
        return two[0] + two[1];
    }

    private static void Spread(Vector512<double> low, Vector512<double> high, ref LaneSums to)
    {
        for (int lane = 0; lane < 8; lane++)
        {
            to[lane] = low[lane];
            to[lane + 8] = high[lane];
        }
    }
}
