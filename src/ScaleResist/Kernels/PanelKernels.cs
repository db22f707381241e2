// The kernels as the rest of the library calls them: vector or scalar twin, chosen once.
// SCALERESIST_KERNELS=scalar forces the twins; both give the same bits, so the choice shows in the time alone.

using System.Numerics;
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

    /// <summary>Returns |b - L x|^2 by column.</summary>
    public static LaneSums Residual<T>(Laplacian laplacian, Panel<T> b, Panel<T> x, int start, int end)
        where T : unmanaged, INumber<T>
    {
        LaneSums sums = default;
        if (Scalar)
            ScalarKernels.Residual(laplacian, b.Pointer, x.Pointer, start, end, ref sums);
        else
            VectorKernels.Residual(laplacian, b.Pointer, x.Pointer, start, end, ref sums);
        return sums;
    }

    /// <summary>x += a p, r -= a q with one factor a column; returns |r|^2 by column.</summary>
    public static LaneSums Step<T>(Panel<T> x, Panel<T> r, Panel<T> p, Panel<T> q, in LaneSums factors, int start, int end)
        where T : unmanaged, INumber<T>
    {
        LaneSums sums = default;
        T* a = stackalloc T[Panel<T>.Width];
        Narrow(factors, a);
        if (Scalar)
            ScalarKernels.Step(x.Pointer, r.Pointer, p.Pointer, q.Pointer, a, start, end, ref sums);
        else
            VectorKernels.Step(x.Pointer, r.Pointer, p.Pointer, q.Pointer, a, start, end, ref sums);
        return sums;
    }

    /// <summary>s = r / d row by row (0 where d is 0); returns r's by column.</summary>
    public static LaneSums Scale<T>(double[] strengths, Panel<T> r, Panel<T> s, int start, int end)
        where T : unmanaged, INumber<T>
    {
        LaneSums sums = default;
        if (Scalar)
            ScalarKernels.Scale(strengths, r.Pointer, s.Pointer, start, end, ref sums);
        else
            VectorKernels.Scale(strengths, r.Pointer, s.Pointer, start, end, ref sums);
        return sums;
    }

    /// <summary>p = s + b p with one factor a column.</summary>
    public static void Direction<T>(Panel<T> p, Panel<T> s, in LaneSums factors, int start, int end)
        where T : unmanaged, INumber<T>
    {
        T* b = stackalloc T[Panel<T>.Width];
        Narrow(factors, b);
        if (Scalar)
            ScalarKernels.Direction(p.Pointer, s.Pointer, b, start, end);
        else
            VectorKernels.Direction(p.Pointer, s.Pointer, b, start, end);
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

    private static void Narrow<T>(in LaneSums from, T* to)
        where T : unmanaged, INumber<T>
    {
        for (int lane = 0; lane < Panel<T>.Width; lane++)
            to[lane] = T.CreateTruncating(from[lane]);
    }
}
