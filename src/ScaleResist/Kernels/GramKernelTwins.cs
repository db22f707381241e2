// The Gram kernels in scalar form: what the vector forms are tested against.

namespace ScaleResist.Kernels;

/// <summary>Scalar twins of <see cref="GramKernels"/>.</summary>
internal static unsafe class GramKernelTwins
{
    private const int Width = 8;

    public static void Rows(double* a, double* weights, int first, int last, double* sums)
    {
        for (int j = 0; j < Width; j++)
        {
            double sum = 0;
            for (int u = first; u < last; u++)
                sum = Math.FusedMultiplyAdd(weights == null ? 1 : weights[u], a[((long)u * Width) + j], sum);
            sums[j] += sum;
        }
    }

    public static void Squares(double* a, double* weights, int first, int last, double* sums)
    {
        for (int j = 0; j < Width; j++)
        {
            double sum = 0;
            for (int u = first; u < last; u++)
            {
                double x = a[((long)u * Width) + j];
                sum = Math.FusedMultiplyAdd(x * (weights == null ? 1 : weights[u]), x, sum);
            }
            sums[j] += sum;
        }
    }

    public static void Products(double* a, double* b, double* weights, int first, int last, double* sums)
    {
        for (int i = 0; i < Width; i++)
        {
            for (int j = 0; j < Width; j++)
            {
                double sum = 0;
                for (int u = first; u < last; u++)
                {
                    double y = b[((long)u * Width) + j] * (weights == null ? 1 : weights[u]);
                    sum = Math.FusedMultiplyAdd(a[((long)u * Width) + i], y, sum);
                }
                sums[(i * Width) + j] += sum;
            }
        }
    }
}
