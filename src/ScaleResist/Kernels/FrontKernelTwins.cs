// Scalar twins of FrontKernels, value by value in the same order.

namespace ScaleResist.Kernels;

internal static unsafe class FrontKernelTwins
{
    public static void ColumnSums(int m, int q, double* a, long lda, double* sums)
    {
        Span<double> lanes = stackalloc double[8];
        for (int j = 0; j < q; j++)
        {
            lanes.Clear();
            for (int i = 0; i < m; i++)
                lanes[i & 7] += a[i + (j * lda)];
            sums[j] = (lanes[0] + lanes[4] + (lanes[2] + lanes[6])) + (lanes[1] + lanes[5] + (lanes[3] + lanes[7]));
        }
    }

    public static int Invert(int q, double* x, double* outside, double* pivots)
    {
        Span<double> old = stackalloc double[8], ahead = stackalloc double[8];
        new Span<double>(outside, q).CopyTo(ahead);
        for (int j = 0; j < q; j++)
        {
            double d = ahead[j];
            for (int c = j + 1; c < q; c++)
                d += x[(8 * j) + c];
            pivots[j] = d;
            if (!(d > 0) || !double.IsFinite(d))
                return j;
            double inverse = 1 / d, gone = ahead[j];
            for (int c = 0; c < q; c++)
            {
                old[c] = c == j ? 0 : x[(8 * j) + c];
                ahead[c] = Math.FusedMultiplyAdd(gone, old[c] * inverse, ahead[c]);
            }
            for (int i = 0; i < q; i++)
            {
                for (int c = 0; c < q; c++)
                    x[(8 * i) + c] = Math.FusedMultiplyAdd(old[i], old[c] * inverse, x[(8 * i) + c]);
            }
            for (int c = 0; c < q; c++)
                x[(8 * j) + c] = x[(8 * c) + j] = c == j ? inverse : old[c] * inverse;
        }
        return -1;
    }

    public static void Shares(int m, int q, double* a, long lda, double* g, double* w)
    {
        for (int i = 0; i < m; i++)
        {
            for (int j = 0; j < q; j++)
            {
                double sum = a[i] * g[j];
                for (int k = 1; k < q; k++)
                    sum = Math.FusedMultiplyAdd(a[i + (k * lda)], g[(8 * k) + j], sum);
                w[(i * q) + j] = sum;
            }
        }
    }

    public static void Quadratic(int m, int q, double* w, double* y, long ldy, double* g, double* z, long ldz)
    {
        for (int j = 0; j < q; j++)
        {
            for (int c = 0; c < q; c++)
            {
                double sum = g[(j * q) + c];
                for (int i = 0; i < m; i++)
                    sum = Math.FusedMultiplyAdd(w[((long)i * q) + c], y[i + (j * ldy)], sum);
                z[c + (j * ldz)] = sum;
            }
        }
    }
}
