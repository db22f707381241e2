// Weighted Gram matrices of panels of eight doubles a row: what a low-rank update of L+ does to sums of resistances.
// Invariant: within an entry the vector form and its scalar twin do the same operations in the same order (both fuse multiply and add).

using System.Runtime.Intrinsics;

namespace ScaleResist.Kernels;

/// <summary>Sums over rows of n x 8 doubles; w = 1 where weights are null.</summary>
internal static unsafe class GramKernels
{
    private const int Width = 8;
    private const int Chunk = 1024; // rows summed on their own, so that rounding grows with n / Chunk + Chunk

    /// <summary>sums_ij += sum over rows u of w_u a_ui b_uj, 8 x 8, row-major.</summary>
    public static void AddProducts(double* a, double* b, double* weights, int start, int end, double* sums)
    {
        for (int first = start; first < end; first += Chunk)
        {
            int last = Math.Min(end, first + Chunk);
            if (PanelKernels.Scalar)
                GramKernelTwins.Products(a, b, weights, first, last, sums);
            else
                Products(a, b, weights, first, last, sums);
        }
    }

    /// <summary>sums_j += sum over rows u of w_u a_uj, 8 of them.</summary>
    public static void AddRows(double* a, double* weights, int start, int end, double* sums)
    {
        for (int first = start; first < end; first += Chunk)
        {
            int last = Math.Min(end, first + Chunk);
            if (PanelKernels.Scalar)
                GramKernelTwins.Rows(a, weights, first, last, sums);
            else
                Rows(a, weights, first, last, sums);
        }
    }

    /// <summary>sums_j += sum over rows u of w_u a_uj^2, 8 of them.</summary>
    public static void AddSquares(double* a, double* weights, int start, int end, double* sums)
    {
        for (int first = start; first < end; first += Chunk)
        {
            int last = Math.Min(end, first + Chunk);
            if (PanelKernels.Scalar)
                GramKernelTwins.Squares(a, weights, first, last, sums);
            else
                Squares(a, weights, first, last, sums);
        }
    }

    internal static void Rows(double* a, double* weights, int first, int last, double* sums)
    {
        Vector512<double> sum = default;
        for (int u = first; u < last; u++)
        {
            Vector512<double> w = Vector512.Create(weights == null ? 1 : weights[u]);
            sum = Vector512.FusedMultiplyAdd(w, Vector512.Load(a + ((long)u * Width)), sum);
        }
        (Vector512.Load(sums) + sum).Store(sums);
    }

    internal static void Squares(double* a, double* weights, int first, int last, double* sums)
    {
        Vector512<double> sum = default;
        for (int u = first; u < last; u++)
        {
            Vector512<double> x = Vector512.Load(a + ((long)u * Width));
            sum = Vector512.FusedMultiplyAdd(x * Vector512.Create(weights == null ? 1 : weights[u]), x, sum);
        }
        (Vector512.Load(sums) + sum).Store(sums);
    }

    internal static void Products(double* a, double* b, double* weights, int first, int last, double* sums)
    {
        Vector512<double> s0 = default, s1 = default, s2 = default, s3 = default, s4 = default, s5 = default, s6 = default, s7 = default;
        for (int u = first; u < last; u++)
        {
            double* x = a + ((long)u * Width);
            Vector512<double> y = Vector512.Load(b + ((long)u * Width));
            if (weights != null)
                y *= Vector512.Create(weights[u]);
            s0 = Vector512.FusedMultiplyAdd(Vector512.Create(x[0]), y, s0);
            s1 = Vector512.FusedMultiplyAdd(Vector512.Create(x[1]), y, s1);
            s2 = Vector512.FusedMultiplyAdd(Vector512.Create(x[2]), y, s2);
            s3 = Vector512.FusedMultiplyAdd(Vector512.Create(x[3]), y, s3);
            s4 = Vector512.FusedMultiplyAdd(Vector512.Create(x[4]), y, s4);
            s5 = Vector512.FusedMultiplyAdd(Vector512.Create(x[5]), y, s5);
            s6 = Vector512.FusedMultiplyAdd(Vector512.Create(x[6]), y, s6);
            s7 = Vector512.FusedMultiplyAdd(Vector512.Create(x[7]), y, s7);
        }
        Add(sums, s0);
        Add(sums + 8, s1);
        Add(sums + 16, s2);
        Add(sums + 24, s3);
        Add(sums + 32, s4);
        Add(sums + 40, s5);
        Add(sums + 48, s6);
        Add(sums + 56, s7);
    }

    private static void Add(double* to, Vector512<double> sum) => (Vector512.Load(to) + sum).Store(to);
}
