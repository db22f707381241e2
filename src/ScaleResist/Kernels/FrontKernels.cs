// Eliminating eight nodes of a front or fewer, and moving fronts into one another. A front holds conductances, not the matrix: everything
// here is a sum, a product or a quotient of numbers that are not negative, so no digit is ever cancelled.
// Invariant: within a value, operations follow the scalar twin's order exactly, so both give the same bits.

using System.Runtime.Intrinsics;

namespace ScaleResist.Kernels;

/// <summary>Kernels of the multifrontal method on a front of conductances, by columns.</summary>
internal static unsafe class FrontKernels
{
    /// <summary>
    /// sums_j = a_1j + ... + a_mj for q columns: eight lanes, then lanes 4, 2 and 1 apart. Rows m .. m+7 must be zero.
    /// </summary>
    public static void ColumnSums(int m, int q, double* a, long lda, double* sums)
    {
        if (PanelKernels.Scalar)
        {
            FrontKernelTwins.ColumnSums(m, q, a, lda, sums);
            return;
        }
        for (int j = 0; j < q; j++)
        {
            Vector512<double> lanes = Vector512<double>.Zero;
            for (int i = 0; i < m; i += 8)
                lanes += Vector512.Load(a + (j * lda) + i);
            Vector256<double> half = lanes.GetLower() + lanes.GetUpper();
            Vector128<double> quarter = half.GetLower() + half.GetUpper();
            sums[j] = quarter[0] + quarter[1];
        }
    }

    /// <summary>
    /// From the conductances among q nodes (8 x 8 rows in x, symmetric, zero elsewhere) and from each to everything outside, the inverse
    /// of their grounded Laplacian, in place, by symmetric sweeps (Beaton 1964). The pivot of a node is the sum of its conductances to
    /// outside and to nodes not yet swept, never a difference (Grassmann, Taksar and Heyman 1985).
    /// </summary>
    /// <returns>The first node whose pivot is not a positive number, or -1.</returns>
    public static int Invert(int q, double* x, double* outside, double* pivots)
    {
        if (PanelKernels.Scalar)
            return FrontKernelTwins.Invert(q, x, outside, pivots);
        if (q == 1)
        {
            pivots[0] = outside[0];
            x[0] = 1 / outside[0];
            return outside[0] > 0 && double.IsFinite(outside[0]) ? -1 : 0;
        }
        Vector512<double> ahead = Vector512.Load(outside);
        Vector512<double> lane = Vector512.Create(0.0, 1, 2, 3, 4, 5, 6, 7);
        double* old = stackalloc double[8];
        double* share = stackalloc double[8];
        for (int j = 0; j < q; j++)
        {
            double* row = x + (8 * j);
            ahead.Store(old);
            double d = old[j];
            for (int c = j + 1; c < q; c++)
                d += row[c];
            pivots[j] = d;
            if (!(d > 0) || !double.IsFinite(d))
                return j;
            Vector512<double> own = Vector512.Equals(lane, Vector512.Create((double)j));
            Vector512<double> v = Vector512.ConditionalSelect(own, Vector512<double>.Zero, Vector512.Load(row));
            Vector512<double> w = v * Vector512.Create(1 / d);
            ahead = Vector512.FusedMultiplyAdd(Vector512.Create(old[j]), w, ahead);
            v.Store(old);
            w.Store(share);
            for (int i = 0; i < q; i++)
            {
                Vector512<double> swept = Vector512.FusedMultiplyAdd(Vector512.Create(old[i]), w, Vector512.Load(x + (8 * i)));
                Vector512.ConditionalSelect(own, Vector512.Create(share[i]), swept).Store(x + (8 * i));
            }
            Vector512.ConditionalSelect(own, Vector512.Create(1 / d), w).Store(row);
        }
        return -1;
    }

    /// <summary>
    /// W = A G by rows, m x q without gaps: A is m x q by columns, G q x q with rows of eight. Each entry is the chain of DenseKernels.
    /// </summary>
    public static void Shares(int m, int q, double* a, long lda, double* g, double* w)
    {
        if (PanelKernels.Scalar)
        {
            FrontKernelTwins.Shares(m, q, a, lda, g, w);
            return;
        }
        switch (q)
        {
            case 1:
                for (int i = 0; i < m; i++)
                    w[i] = a[i] * *g;
                break;
            case 2:
                Shares<Columns2>(m, a, lda, g, w);
                break;
            case 3:
                Shares<Columns3>(m, a, lda, g, w);
                break;
            case 4:
                Shares<Columns4>(m, a, lda, g, w);
                break;
            case 5:
                Shares<Columns5>(m, a, lda, g, w);
                break;
            case 6:
                Shares<Columns6>(m, a, lda, g, w);
                break;
            case 7:
                Shares<Columns7>(m, a, lda, g, w);
                break;
            default:
                Shares<Columns8>(m, a, lda, g, w);
                break;
        }
    }

    private static void Shares<TColumns>(int m, double* a, long lda, double* g, double* w)
        where TColumns : struct, IColumns
    {
        int q = TColumns.Count;
        int whole = Math.Max(0, m - (7 / q)); // rows whose eight lanes end within w
        Vector512<double> g0 = Vector512.Load(g), g1 = Vector512.Load(g + 8), g2 = Vector512.Load(g + 16), g3 = Vector512.Load(g + 24);
        Vector512<double> g4 = Vector512.Load(g + 32), g5 = Vector512.Load(g + 40), g6 = Vector512.Load(g + 48);
        Vector512<double> g7 = Vector512.Load(g + 56);
        for (int i = 0; i < whole; i++)
        {
            Vector512<double> sum = Vector512.Create(a[i]) * g0;
            if (TColumns.Count > 1)
                sum = Vector512.FusedMultiplyAdd(Vector512.Create(a[i + lda]), g1, sum);
            if (TColumns.Count > 2)
                sum = Vector512.FusedMultiplyAdd(Vector512.Create(a[i + (2 * lda)]), g2, sum);
            if (TColumns.Count > 3)
                sum = Vector512.FusedMultiplyAdd(Vector512.Create(a[i + (3 * lda)]), g3, sum);
            if (TColumns.Count > 4)
                sum = Vector512.FusedMultiplyAdd(Vector512.Create(a[i + (4 * lda)]), g4, sum);
            if (TColumns.Count > 5)
                sum = Vector512.FusedMultiplyAdd(Vector512.Create(a[i + (5 * lda)]), g5, sum);
            if (TColumns.Count > 6)
                sum = Vector512.FusedMultiplyAdd(Vector512.Create(a[i + (6 * lda)]), g6, sum);
            if (TColumns.Count > 7)
                sum = Vector512.FusedMultiplyAdd(Vector512.Create(a[i + (7 * lda)]), g7, sum);
            sum.Store(w + (i * q));
        }
        FrontKernelTwins.Shares(m - whole, q, a + whole, lda, g, w + (whole * q));
    }

    /// <summary>
    /// Z = G + W' Y for the q x q block of an inverse, by columns: W is m x q by rows without gaps (seven more doubles may be read), Y m x q by
    /// columns, G q x q by rows without gaps. Rows q .. 7 of Z mean nothing.
    /// </summary>
    public static void Quadratic(int m, int q, double* w, double* y, long ldy, double* g, double* z, long ldz)
    {
        if (PanelKernels.Scalar)
        {
            FrontKernelTwins.Quadratic(m, q, w, y, ldy, g, z, ldz);
            return;
        }
        int j = 0;
        for (; j + 4 <= q; j += 4)
        {
            double* y0 = y + (j * ldy), y1 = y0 + ldy, y2 = y1 + ldy, y3 = y2 + ldy;
            Vector512<double> z0 = Vector512.Load(g + (j * q)), z1 = Vector512.Load(g + ((j + 1) * q));
            Vector512<double> z2 = Vector512.Load(g + ((j + 2) * q)), z3 = Vector512.Load(g + ((j + 3) * q));
            for (int i = 0; i < m; i++)
            {
                Vector512<double> row = Vector512.Load(w + ((long)i * q));
                z0 = Vector512.FusedMultiplyAdd(row, Vector512.Create(y0[i]), z0);
                z1 = Vector512.FusedMultiplyAdd(row, Vector512.Create(y1[i]), z1);
                z2 = Vector512.FusedMultiplyAdd(row, Vector512.Create(y2[i]), z2);
                z3 = Vector512.FusedMultiplyAdd(row, Vector512.Create(y3[i]), z3);
            }
            double* to = z + (j * ldz);
            z0.Store(to);
            z1.Store(to + ldz);
            z2.Store(to + (2 * ldz));
            z3.Store(to + (3 * ldz));
        }
        for (; j < q; j++)
        {
            Vector512<double> sum = Vector512.Load(g + (j * q));
            for (int i = 0; i < m; i++)
                sum = Vector512.FusedMultiplyAdd(Vector512.Load(w + ((long)i * q)), Vector512.Create(y[i + (j * ldy)]), sum);
            sum.Store(z + (j * ldz));
        }
    }

    /// <summary>to[index_i] += from_i, from the run on that holds <paramref name="start"/>; runs of successive indices go in vectors.</summary>
    public static void AddRuns(double* from, double* to, int* index, int start, int end)
    {
        int i = start;
        while (i < end)
        {
            int at = index[i], length = 1;
            while (i + length < end && index[i + length] == at + length)
                length++;
            double* source = from + i, target = to + at;
            int k = 0;
            for (; k + 8 <= length; k += 8)
                (Vector512.Load(target + k) + Vector512.Load(source + k)).Store(target + k);
            for (; k < length; k++)
                target[k] += source[k];
            i += length;
        }
    }

    /// <summary>to_i = from[index_i].</summary>
    public static void GatherRuns(double* from, double* to, int* index, int count)
    {
        int i = 0;
        while (i < count)
        {
            int at = index[i], length = 1;
            while (i + length < count && index[i + length] == at + length)
                length++;
            double* source = from + at, target = to + i;
            int k = 0;
            for (; k + 8 <= length; k += 8)
                Vector512.Load(source + k).Store(target + k);
            for (; k < length; k++)
                target[k] = source[k];
            i += length;
        }
    }
}
