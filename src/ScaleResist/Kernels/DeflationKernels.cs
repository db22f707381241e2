// The kernels of a deflation on rows of 16: Laplacian rows and Gram matrices in doubles, and panel rows less their part in a span.
// Invariant: within a lane the vector form and its scalar twin do the same operations in the same order (no fused multiply-add).

using System.Runtime.Intrinsics;

namespace ScaleResist.Kernels;

/// <summary>Rows x of n x 16 floats; small matrices are 16 x 16, row-major.</summary>
internal static unsafe class DeflationKernels
{
    private const int Width = 16;

    /// <summary>sums += c (x - y), in doubles.</summary>
    public static void AddDifference(float* x, float* y, double c, double* sums)
    {
        if (PanelKernels.Scalar)
        {
            for (int j = 0; j < Width; j++)
                sums[j] += c * ((double)x[j] - y[j]);
            return;
        }
        (Vector512<double> lowX, Vector512<double> highX) = Vector512.Widen(Vector512.Load(x));
        (Vector512<double> lowY, Vector512<double> highY) = Vector512.Widen(Vector512.Load(y));
        (Vector512.Load(sums) + (c * (lowX - lowY))).Store(sums);
        (Vector512.Load(sums + 8) + (c * (highX - highY))).Store(sums + 8);
    }

    /// <summary>sums_ij += x_i row_j.</summary>
    public static void AddProducts(float* x, double* row, double* sums)
    {
        if (PanelKernels.Scalar)
        {
            for (int i = 0; i < Width; i++)
            {
                for (int j = 0; j < Width; j++)
                    sums[(i * Width) + j] += x[i] * row[j];
            }
            return;
        }
        Vector512<double> low = Vector512.Load(row), high = Vector512.Load(row + 8);
        for (int i = 0; i < Width; i++)
        {
            double* to = sums + (i * Width);
            Vector512<double> factor = Vector512.Create((double)x[i]);
            (Vector512.Load(to) + (factor * low)).Store(to);
            (Vector512.Load(to + 8) + (factor * high)).Store(to + 8);
        }
    }

    /// <summary>to_j = sum over i of row_i m_ij; <paramref name="to"/> may be <paramref name="row"/>.</summary>
    public static void Combine(double* row, double* m, double* to)
    {
        if (PanelKernels.Scalar)
        {
            double* sums = stackalloc double[Width];
            for (int j = 0; j < Width; j++)
            {
                double sum = 0;
                for (int i = 0; i < Width; i++)
                    sum += row[i] * m[(i * Width) + j];
                sums[j] = sum;
            }
            new Span<double>(sums, Width).CopyTo(new Span<double>(to, Width));
            return;
        }
        Vector512<double> low = default, high = default;
        for (int i = 0; i < Width; i++)
        {
            Vector512<double> factor = Vector512.Create(row[i]);
            low += factor * Vector512.Load(m + (i * Width));
            high += factor * Vector512.Load(m + (i * Width) + 8);
        }
        low.Store(to);
        high.Store(to + 8);
    }

    /// <summary>y_j = z_j - sum over i of x_i a_ij, in floats.</summary>
    public static void Reduce(float* z, float* x, float* a, float* y)
    {
        if (PanelKernels.Scalar)
        {
            for (int j = 0; j < Width; j++)
            {
                float sum = 0;
                for (int i = 0; i < Width; i++)
                    sum += x[i] * a[(i * Width) + j];
                y[j] = z[j] - sum;
            }
            return;
        }
        Vector512<float> part = default;
        for (int i = 0; i < Width; i++)
            part += Vector512.Create(x[i]) * Vector512.Load(a + (i * Width));
        (Vector512.Load(z) - part).Store(y);
    }

    /// <summary>A row of floats as doubles.</summary>
    public static void Widen(float* row, double* to)
    {
        for (int j = 0; j < Width; j++)
            to[j] = row[j];
    }
}
