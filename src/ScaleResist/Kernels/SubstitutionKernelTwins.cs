// Scalar twins of SubstitutionKernels, column by column in the same order.

namespace ScaleResist.Kernels;

internal static unsafe class SubstitutionKernelTwins
{
    public static void Forward(int width, int q, double* w, double* x, int place, int following, int* index, int count)
    {
        for (int i = 0; i < following + count; i++)
        {
            double* row = x + ((long)(i < following ? place + q + i : index[i - following]) * width);
            for (int lane = 0; lane < width; lane++)
            {
                for (int j = 0; j < q; j++)
                    row[lane] = Math.FusedMultiplyAdd(w[((long)i * q) + j], x[((long)(place + j) * width) + lane], row[lane]);
            }
        }
    }

    public static void Back(int width, int q, double* panel, double* x, int place, int following, int* index, int count)
    {
        Span<double> sums = stackalloc double[8];
        for (int lane = 0; lane < width; lane++)
        {
            sums.Clear();
            for (int i = 0; i < q + following + count; i++)
            {
                double value = x[((long)(i < q + following ? place + i : index[i - q - following]) * width) + lane];
                for (int j = 0; j < q; j++)
                    sums[j] = Math.FusedMultiplyAdd(panel[((long)i * q) + j], value, sums[j]);
            }
            for (int j = 0; j < q; j++)
                x[((long)(place + j) * width) + lane] = sums[j];
        }
    }
}
