// The kernels as the rest of the library calls them: vector or scalar twin, chosen once.
// SCALERESIST_KERNELS=scalar forces the twins; both give the same bits, so the choice shows in the time alone.

using System.Numerics;
using System.Runtime.Intrinsics;
using ScaleResist.Graphs;

namespace ScaleResist.Kernels;

/// <summary>Panel kernels over the nodes <c>start .. end-1</c> of a laplacian.</summary>
public static unsafe class PanelKernels
{
    /// <summary>Whether the scalar twins run.</summary>
    public static bool Scalar { get; internal set; } =
        string.Equals(Environment.GetEnvironmentVariable("SCALERESIST_KERNELS"), "scalar", StringComparison.OrdinalIgnoreCase);

    /// <summary>y = L x; returns x'y by column.</summary>
    public static LaneSums Multiply<T>(Laplacian laplacian, Panel<T> x, Panel<T> y, int start, int end)
        where T : unmanaged, INumber<T>
    {
        LaneSums sums = default;
        if (Scalar)
            ScalarKernels.Multiply(laplacian, x.Pointer, y.Pointer, start, end, ref sums);
        else
            VectorKernels.Multiply(laplacian, x.Pointer, y.Pointer, start, end, ref sums);
        return sums;
    }

    /// <summary>Returns |b - L x|^2 by column; the residual itself goes to r, where one is given.</summary>
    public static LaneSums Residual<T>(Laplacian laplacian, Panel<T> b, Panel<T> x, Panel<T>? r, int start, int end)
        where T : unmanaged, INumber<T>
    {
        LaneSums sums = default;
        T* stored = r is null ? null : r.Pointer;
        if (Scalar)
            ScalarKernels.Residual(laplacian, b.Pointer, x.Pointer, stored, start, end, ref sums);
        else
            VectorKernels.Residual(laplacian, b.Pointer, x.Pointer, stored, start, end, ref sums);
        return sums;
    }

    /// <summary>Returns |x|^2 by column.</summary>
    public static LaneSums Squares<T>(Panel<T> x, int start, int end)
        where T : unmanaged, INumber<T>
    {
        LaneSums sums = default;
        if (Scalar)
            ScalarKernels.Squares(x.Pointer, start, end, ref sums);
        else
            VectorKernels.Squares(x.Pointer, start, end, ref sums);
        return sums;
    }

    /// <summary>Takes each column's mean off it, so that it sums to zero.</summary>
    public static void Centre<T>(Panel<T> x, int start, int end)
        where T : unmanaged, INumber<T>
    {
        LaneSums sums = default;
        T* means = stackalloc T[Panel<T>.Width];
        if (Scalar)
            ScalarKernels.Sum(x.Pointer, start, end, ref sums);
        else
            VectorKernels.Sum(x.Pointer, start, end, ref sums);
        for (int lane = 0; lane < Panel<T>.Width; lane++)
            sums[lane] /= end - start;
        Narrow(sums, means);
        if (Scalar)
            ScalarKernels.Shift(x.Pointer, means, start, end);
        else
            VectorKernels.Shift(x.Pointer, means, start, end);
    }

    internal static Vector512<T> Narrow<T>(in LaneSums factors)
        where T : unmanaged, INumber<T>
    {
        T* lanes = stackalloc T[Panel<T>.Width];
        Narrow(factors, lanes);
        return Vector512.Load(lanes);
    }

    private static void Narrow<T>(in LaneSums from, T* to)
        where T : unmanaged, INumber<T>
    {
        for (int lane = 0; lane < Panel<T>.Width; lane++)
            to[lane] = T.CreateTruncating(from[lane]);
    }
}
