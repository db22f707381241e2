// The scalar twin of DenseKernels: the triple loop, one entry of C after the other.

namespace ScaleResist.Kernels;

internal static unsafe class DenseKernelTwins
{
    public static void MultiplyAdd(
        int m, int n, int k, double* a, long lda, double* b, long ldb, double* c, long ldc, bool lower)
    {
        for (int j = 0; j < n; j++)
        {
            for (int i = lower ? j : 0; i < m; i++)
            {
                double sum = c[i + (j * ldc)];
                for (int p = 0; p < k; p++)
                    sum = Math.FusedMultiplyAdd(a[i + (p * lda)], b[(p * ldb) + j], sum);
                c[i + (j * ldc)] = sum;
            }
        }
    }
}
