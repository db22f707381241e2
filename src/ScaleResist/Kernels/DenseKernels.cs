// The dense products of a sparse factor, in register tiles of 24 x 8 and 8 x 8 (8 x 4 with AVX2): C += A B.
// Invariant: every entry of C is one chain of fused multiply-adds from its old value, k ascending. Tiles, blocks, threads and the width of
// the machine's vectors leave the bits alone; the scalar twin in DenseKernelTwins is the plain triple loop.
//
// Rows are worked off eight at a time: up to seven rows past the last may be read in A and C and written in C, and mean nothing.

using System.Runtime.Intrinsics;

namespace ScaleResist.Kernels;

/// <summary>A is m x k by columns, B is k x n by rows, C is m x n by columns; each with its own leading dimension.</summary>
internal static unsafe class DenseKernels
{
    /// <summary>Columns of a tile, and of a panel of the factor.</summary>
    public const int Tile = 8;

    private const int TallTile = 24;
    private const int HalfTile = 4; // columns where registers are half as many and half as wide
    private const int DepthBlock = 64; // k of one pass over C: A's columns and B's rows stay in the first caches

    /// <summary>C += A B; with <paramref name="lower"/> only entries on and below the diagonal of C (and some above) are touched.</summary>
    public static void MultiplyAdd(
        int m, int n, int k, double* a, long lda, double* b, long ldb, double* c, long ldc, bool lower = false)
    {
        if (PanelKernels.Scalar)
        {
            DenseKernelTwins.MultiplyAdd(m, n, k, a, lda, b, ldb, c, ldc, lower);
            return;
        }
        for (int from = 0; from < k; from += DepthBlock)
        {
            int depth = Math.Min(DepthBlock, k - from);
            double* aBlock = a + (from * lda);
            double* bBlock = b + (from * ldb);
            for (int j = 0; j < n; j += Tile)
            {
                int top = lower ? j : 0, columns = Math.Min(Tile, n - j);
                double* aStrip = aBlock + top, bStrip = bBlock + j, cStrip = c + (j * ldc) + top;
                if (Vector512.IsHardwareAccelerated)
                {
                    Strip(columns, m - top, depth, aStrip, lda, bStrip, ldb, cStrip, ldc);
                    continue;
                }
                HalfStrip(Math.Min(HalfTile, columns), m - top, depth, aStrip, lda, bStrip, ldb, cStrip, ldc);
                if (columns > HalfTile)
                {
                    HalfStrip(
                        columns - HalfTile, m - top, depth, aStrip, lda, bStrip + HalfTile, ldb, cStrip + (HalfTile * ldc), ldc);
                }
            }
        }
    }

    private static void Strip(int columns, int m, int k, double* a, long lda, double* b, long ldb, double* c, long ldc)
    {
        switch (columns)
        {
            case 1:
                Strip<Columns1>(m, k, a, lda, b, ldb, c, ldc);
                break;
            case 2:
                Strip<Columns2>(m, k, a, lda, b, ldb, c, ldc);
                break;
            case 3:
                Strip<Columns3>(m, k, a, lda, b, ldb, c, ldc);
                break;
            case 4:
                Strip<Columns4>(m, k, a, lda, b, ldb, c, ldc);
                break;
            case 5:
                Strip<Columns5>(m, k, a, lda, b, ldb, c, ldc);
                break;
            case 6:
                Strip<Columns6>(m, k, a, lda, b, ldb, c, ldc);
                break;
            case 7:
                Strip<Columns7>(m, k, a, lda, b, ldb, c, ldc);
                break;
            default:
                Strip<Columns8>(m, k, a, lda, b, ldb, c, ldc);
                break;
        }
    }

    private static void Strip<TColumns>(int m, int k, double* a, long lda, double* b, long ldb, double* c, long ldc)
        where TColumns : struct, IColumns
    {
        int i = 0;
        for (; i + TallTile <= m; i += TallTile)
            Tall<TColumns>(k, a + i, lda, b, ldb, c + i, ldc);
        for (; i < m; i += Tile)
            Short<TColumns>(k, a + i, lda, b, ldb, c + i, ldc);
    }

    private static void Tall<TColumns>(int k, double* a, long lda, double* b, long ldb, double* c, long ldc)
        where TColumns : struct, IColumns
    {
        Vector512<double> c00 = default, c01 = default, c02 = default, c03 = default, c04 = default, c05 = default, c06 = default, c07 = default;
        Vector512<double> c10 = default, c11 = default, c12 = default, c13 = default, c14 = default, c15 = default, c16 = default, c17 = default;
        Vector512<double> c20 = default, c21 = default, c22 = default, c23 = default, c24 = default, c25 = default, c26 = default, c27 = default;
        c00 = Vector512.Load(c);
        c10 = Vector512.Load(c + 8);
        c20 = Vector512.Load(c + 16);
        if (TColumns.Count > 1)
        {
            c01 = Vector512.Load(c + (1 * ldc));
            c11 = Vector512.Load(c + (1 * ldc) + 8);
            c21 = Vector512.Load(c + (1 * ldc) + 16);
        }
        if (TColumns.Count > 2)
        {
            c02 = Vector512.Load(c + (2 * ldc));
            c12 = Vector512.Load(c + (2 * ldc) + 8);
            c22 = Vector512.Load(c + (2 * ldc) + 16);
        }
        if (TColumns.Count > 3)
        {
            c03 = Vector512.Load(c + (3 * ldc));
            c13 = Vector512.Load(c + (3 * ldc) + 8);
            c23 = Vector512.Load(c + (3 * ldc) + 16);
        }
        if (TColumns.Count > 4)
        {
            c04 = Vector512.Load(c + (4 * ldc));
            c14 = Vector512.Load(c + (4 * ldc) + 8);
            c24 = Vector512.Load(c + (4 * ldc) + 16);
        }
        if (TColumns.Count > 5)
        {
            c05 = Vector512.Load(c + (5 * ldc));
            c15 = Vector512.Load(c + (5 * ldc) + 8);
            c25 = Vector512.Load(c + (5 * ldc) + 16);
        }
        if (TColumns.Count > 6)
        {
            c06 = Vector512.Load(c + (6 * ldc));
            c16 = Vector512.Load(c + (6 * ldc) + 8);
            c26 = Vector512.Load(c + (6 * ldc) + 16);
        }
        if (TColumns.Count > 7)
        {
            c07 = Vector512.Load(c + (7 * ldc));
            c17 = Vector512.Load(c + (7 * ldc) + 8);
            c27 = Vector512.Load(c + (7 * ldc) + 16);
        }
        for (int p = 0; p < k; p++)
        {
            Vector512<double> a0 = Vector512.Load(a);
            Vector512<double> a1 = Vector512.Load(a + 8);
            Vector512<double> a2 = Vector512.Load(a + 16);
            Vector512<double> b0 = Vector512.Create(*b);
            c00 = Vector512.FusedMultiplyAdd(a0, b0, c00);
            c10 = Vector512.FusedMultiplyAdd(a1, b0, c10);
            c20 = Vector512.FusedMultiplyAdd(a2, b0, c20);
            if (TColumns.Count > 1)
            {
                Vector512<double> b1 = Vector512.Create(b[1]);
                c01 = Vector512.FusedMultiplyAdd(a0, b1, c01);
                c11 = Vector512.FusedMultiplyAdd(a1, b1, c11);
                c21 = Vector512.FusedMultiplyAdd(a2, b1, c21);
            }
            if (TColumns.Count > 2)
            {
                Vector512<double> b2 = Vector512.Create(b[2]);
                c02 = Vector512.FusedMultiplyAdd(a0, b2, c02);
                c12 = Vector512.FusedMultiplyAdd(a1, b2, c12);
                c22 = Vector512.FusedMultiplyAdd(a2, b2, c22);
            }
            if (TColumns.Count > 3)
            {
                Vector512<double> b3 = Vector512.Create(b[3]);
                c03 = Vector512.FusedMultiplyAdd(a0, b3, c03);
                c13 = Vector512.FusedMultiplyAdd(a1, b3, c13);
                c23 = Vector512.FusedMultiplyAdd(a2, b3, c23);
            }
            if (TColumns.Count > 4)
            {
                Vector512<double> b4 = Vector512.Create(b[4]);
                c04 = Vector512.FusedMultiplyAdd(a0, b4, c04);
                c14 = Vector512.FusedMultiplyAdd(a1, b4, c14);
                c24 = Vector512.FusedMultiplyAdd(a2, b4, c24);
            }
            if (TColumns.Count > 5)
            {
                Vector512<double> b5 = Vector512.Create(b[5]);
                c05 = Vector512.FusedMultiplyAdd(a0, b5, c05);
                c15 = Vector512.FusedMultiplyAdd(a1, b5, c15);
                c25 = Vector512.FusedMultiplyAdd(a2, b5, c25);
            }
            if (TColumns.Count > 6)
            {
                Vector512<double> b6 = Vector512.Create(b[6]);
                c06 = Vector512.FusedMultiplyAdd(a0, b6, c06);
                c16 = Vector512.FusedMultiplyAdd(a1, b6, c16);
                c26 = Vector512.FusedMultiplyAdd(a2, b6, c26);
            }
            if (TColumns.Count > 7)
            {
                Vector512<double> b7 = Vector512.Create(b[7]);
                c07 = Vector512.FusedMultiplyAdd(a0, b7, c07);
                c17 = Vector512.FusedMultiplyAdd(a1, b7, c17);
                c27 = Vector512.FusedMultiplyAdd(a2, b7, c27);
            }
            a += lda;
            b += ldb;
        }
        c00.Store(c);
        c10.Store(c + 8);
        c20.Store(c + 16);
        if (TColumns.Count > 1)
        {
            c01.Store(c + (1 * ldc));
            c11.Store(c + (1 * ldc) + 8);
            c21.Store(c + (1 * ldc) + 16);
        }
        if (TColumns.Count > 2)
        {
            c02.Store(c + (2 * ldc));
            c12.Store(c + (2 * ldc) + 8);
            c22.Store(c + (2 * ldc) + 16);
        }
        if (TColumns.Count > 3)
        {
            c03.Store(c + (3 * ldc));
            c13.Store(c + (3 * ldc) + 8);
            c23.Store(c + (3 * ldc) + 16);
        }
        if (TColumns.Count > 4)
        {
            c04.Store(c + (4 * ldc));
            c14.Store(c + (4 * ldc) + 8);
            c24.Store(c + (4 * ldc) + 16);
        }
        if (TColumns.Count > 5)
        {
            c05.Store(c + (5 * ldc));
            c15.Store(c + (5 * ldc) + 8);
            c25.Store(c + (5 * ldc) + 16);
        }
        if (TColumns.Count > 6)
        {
            c06.Store(c + (6 * ldc));
            c16.Store(c + (6 * ldc) + 8);
            c26.Store(c + (6 * ldc) + 16);
        }
        if (TColumns.Count > 7)
        {
            c07.Store(c + (7 * ldc));
            c17.Store(c + (7 * ldc) + 8);
            c27.Store(c + (7 * ldc) + 16);
        }
    }

    private static void Short<TColumns>(int k, double* a, long lda, double* b, long ldb, double* c, long ldc)
        where TColumns : struct, IColumns
    {
        Vector512<double> c00 = default, c01 = default, c02 = default, c03 = default, c04 = default, c05 = default, c06 = default, c07 = default;
        c00 = Vector512.Load(c);
        if (TColumns.Count > 1)
            c01 = Vector512.Load(c + (1 * ldc));
        if (TColumns.Count > 2)
            c02 = Vector512.Load(c + (2 * ldc));
        if (TColumns.Count > 3)
            c03 = Vector512.Load(c + (3 * ldc));
        if (TColumns.Count > 4)
            c04 = Vector512.Load(c + (4 * ldc));
        if (TColumns.Count > 5)
            c05 = Vector512.Load(c + (5 * ldc));
        if (TColumns.Count > 6)
            c06 = Vector512.Load(c + (6 * ldc));
        if (TColumns.Count > 7)
            c07 = Vector512.Load(c + (7 * ldc));
        for (int p = 0; p < k; p++)
        {
            Vector512<double> a0 = Vector512.Load(a);
            c00 = Vector512.FusedMultiplyAdd(a0, Vector512.Create(*b), c00);
            if (TColumns.Count > 1)
                c01 = Vector512.FusedMultiplyAdd(a0, Vector512.Create(b[1]), c01);
            if (TColumns.Count > 2)
                c02 = Vector512.FusedMultiplyAdd(a0, Vector512.Create(b[2]), c02);
            if (TColumns.Count > 3)
                c03 = Vector512.FusedMultiplyAdd(a0, Vector512.Create(b[3]), c03);
            if (TColumns.Count > 4)
                c04 = Vector512.FusedMultiplyAdd(a0, Vector512.Create(b[4]), c04);
            if (TColumns.Count > 5)
                c05 = Vector512.FusedMultiplyAdd(a0, Vector512.Create(b[5]), c05);
            if (TColumns.Count > 6)
                c06 = Vector512.FusedMultiplyAdd(a0, Vector512.Create(b[6]), c06);
            if (TColumns.Count > 7)
                c07 = Vector512.FusedMultiplyAdd(a0, Vector512.Create(b[7]), c07);
            a += lda;
            b += ldb;
        }
        c00.Store(c);
        if (TColumns.Count > 1)
            c01.Store(c + (1 * ldc));
        if (TColumns.Count > 2)
            c02.Store(c + (2 * ldc));
        if (TColumns.Count > 3)
            c03.Store(c + (3 * ldc));
        if (TColumns.Count > 4)
            c04.Store(c + (4 * ldc));
        if (TColumns.Count > 5)
            c05.Store(c + (5 * ldc));
        if (TColumns.Count > 6)
            c06.Store(c + (6 * ldc));
        if (TColumns.Count > 7)
            c07.Store(c + (7 * ldc));
    }

    private static void HalfStrip(int columns, int m, int k, double* a, long lda, double* b, long ldb, double* c, long ldc)
    {
        for (int i = 0; i < m; i += Tile)
        {
            switch (columns)
            {
                case 1:
                    Half<Columns1>(k, a + i, lda, b, ldb, c + i, ldc);
                    break;
                case 2:
                    Half<Columns2>(k, a + i, lda, b, ldb, c + i, ldc);
                    break;
                case 3:
                    Half<Columns3>(k, a + i, lda, b, ldb, c + i, ldc);
                    break;
                default:
                    Half<Columns4>(k, a + i, lda, b, ldb, c + i, ldc);
                    break;
            }
        }
    }

    private static void Half<TColumns>(int k, double* a, long lda, double* b, long ldb, double* c, long ldc)
        where TColumns : struct, IColumns
    {
        Vector256<double> c00 = default, c01 = default, c02 = default, c03 = default;
        Vector256<double> c10 = default, c11 = default, c12 = default, c13 = default;
        c00 = Vector256.Load(c);
        c10 = Vector256.Load(c + 4);
        if (TColumns.Count > 1)
        {
            c01 = Vector256.Load(c + (1 * ldc));
            c11 = Vector256.Load(c + (1 * ldc) + 4);
        }
        if (TColumns.Count > 2)
        {
            c02 = Vector256.Load(c + (2 * ldc));
            c12 = Vector256.Load(c + (2 * ldc) + 4);
        }
        if (TColumns.Count > 3)
        {
            c03 = Vector256.Load(c + (3 * ldc));
            c13 = Vector256.Load(c + (3 * ldc) + 4);
        }
        for (int p = 0; p < k; p++)
        {
            Vector256<double> a0 = Vector256.Load(a), a1 = Vector256.Load(a + 4);
            Vector256<double> b0 = Vector256.Create(*b);
            c00 = Vector256.FusedMultiplyAdd(a0, b0, c00);
            c10 = Vector256.FusedMultiplyAdd(a1, b0, c10);
            if (TColumns.Count > 1)
            {
                Vector256<double> b1 = Vector256.Create(b[1]);
                c01 = Vector256.FusedMultiplyAdd(a0, b1, c01);
                c11 = Vector256.FusedMultiplyAdd(a1, b1, c11);
            }
            if (TColumns.Count > 2)
            {
                Vector256<double> b2 = Vector256.Create(b[2]);
                c02 = Vector256.FusedMultiplyAdd(a0, b2, c02);
                c12 = Vector256.FusedMultiplyAdd(a1, b2, c12);
            }
            if (TColumns.Count > 3)
            {
                Vector256<double> b3 = Vector256.Create(b[3]);
                c03 = Vector256.FusedMultiplyAdd(a0, b3, c03);
                c13 = Vector256.FusedMultiplyAdd(a1, b3, c13);
            }
            a += lda;
            b += ldb;
        }
        c00.Store(c);
        c10.Store(c + 4);
        if (TColumns.Count > 1)
        {
            c01.Store(c + (1 * ldc));
            c11.Store(c + (1 * ldc) + 4);
        }
        if (TColumns.Count > 2)
        {
            c02.Store(c + (2 * ldc));
            c12.Store(c + (2 * ldc) + 4);
        }
        if (TColumns.Count > 3)
        {
            c03.Store(c + (3 * ldc));
            c13.Store(c + (3 * ldc) + 4);
        }
    }
}
