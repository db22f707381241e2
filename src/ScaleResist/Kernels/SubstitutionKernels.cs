// Substitution with one panel of a factor on a block of right-hand sides: rows of 8 or 16 doubles, one or two vectors a node.
// Invariant: within a column, operations follow the scalar twin's order exactly, so both give the same bits.
//
// A panel of q <= 8 eliminated nodes K with m later nodes N is stored by rows without gaps: G (q x q), then W (m x q), and
//     forward  y_N += W y_K          back  x_K = G y_K + W' x_N
// Later nodes come in two parts: those that follow K at once in memory, and those listed by index. Data movement: the panel once each way,
// the rows of N read and written forward, read back.

using System.Runtime.Intrinsics;
using System.Runtime.Intrinsics.X86;

namespace ScaleResist.Kernels;

/// <summary>Vectors of eight doubles in a row.</summary>
internal interface IRowWidth
{
    /// <summary>One or two.</summary>
    static abstract int Vectors { get; }
}

internal readonly struct OneVector : IRowWidth
{
    public static int Vectors => 1;
}

internal readonly struct TwoVectors : IRowWidth
{
    public static int Vectors => 2;
}

/// <summary>Sweeps over one panel. Rows of <c>x</c> hold <c>8 Vectors</c> doubles; <c>place</c> is K's first row.</summary>
internal static unsafe class SubstitutionKernels
{
    private const int PrefetchRows = 6;

    /// <summary>y_N += W y_K; <paramref name="w"/> starts at W.</summary>
    public static void Forward<TWidth>(int q, double* w, double* x, int place, int following, int* index, int count)
        where TWidth : struct, IRowWidth
    {
        if (PanelKernels.Scalar)
        {
            SubstitutionKernelTwins.Forward(8 * TWidth.Vectors, q, w, x, place, following, index, count);
            return;
        }
        switch (q)
        {
            case 1:
                Forward<TWidth, Columns1>(w, x, place, following, index, count);
                break;
            case 2:
                Forward<TWidth, Columns2>(w, x, place, following, index, count);
                break;
            case 3:
                Forward<TWidth, Columns3>(w, x, place, following, index, count);
                break;
            case 4:
                Forward<TWidth, Columns4>(w, x, place, following, index, count);
                break;
            case 5:
                Forward<TWidth, Columns5>(w, x, place, following, index, count);
                break;
            case 6:
                Forward<TWidth, Columns6>(w, x, place, following, index, count);
                break;
            case 7:
                Forward<TWidth, Columns7>(w, x, place, following, index, count);
                break;
            default:
                Forward<TWidth, Columns8>(w, x, place, following, index, count);
                break;
        }
    }

    /// <summary>x_K = G y_K + W' x_N; <paramref name="panel"/> starts at G.</summary>
    public static void Back<TWidth>(int q, double* panel, double* x, int place, int following, int* index, int count)
        where TWidth : struct, IRowWidth
    {
        if (PanelKernels.Scalar)
        {
            SubstitutionKernelTwins.Back(8 * TWidth.Vectors, q, panel, x, place, following, index, count);
            return;
        }
        switch (q)
        {
            case 1:
                Back<TWidth, Columns1>(panel, x, place, following, index, count);
                break;
            case 2:
                Back<TWidth, Columns2>(panel, x, place, following, index, count);
                break;
            case 3:
                Back<TWidth, Columns3>(panel, x, place, following, index, count);
                break;
            case 4:
                Back<TWidth, Columns4>(panel, x, place, following, index, count);
                break;
            case 5:
                Back<TWidth, Columns5>(panel, x, place, following, index, count);
                break;
            case 6:
                Back<TWidth, Columns6>(panel, x, place, following, index, count);
                break;
            case 7:
                Back<TWidth, Columns7>(panel, x, place, following, index, count);
                break;
            default:
                Back<TWidth, Columns8>(panel, x, place, following, index, count);
                break;
        }
    }

    private static void Forward<TWidth, TColumns>(double* w, double* x, int place, int following, int* index, int count)
        where TWidth : struct, IRowWidth
        where TColumns : struct, IColumns
    {
        int width = 8 * TWidth.Vectors;
        double* own = x + ((long)place * width);
        Vector512<double> y0 = default, y1 = default, y2 = default, y3 = default, y4 = default, y5 = default, y6 = default, y7 = default;
        Vector512<double> z0 = default, z1 = default, z2 = default, z3 = default, z4 = default, z5 = default, z6 = default, z7 = default;
        y0 = Vector512.Load(own);
        if (TWidth.Vectors > 1)
            z0 = Vector512.Load(own + 8);
        if (TColumns.Count > 1)
            y1 = Vector512.Load(own + (1 * width));
        if (TWidth.Vectors > 1 && TColumns.Count > 1)
            z1 = Vector512.Load(own + (1 * width) + 8);
        if (TColumns.Count > 2)
            y2 = Vector512.Load(own + (2 * width));
        if (TWidth.Vectors > 1 && TColumns.Count > 2)
            z2 = Vector512.Load(own + (2 * width) + 8);
        if (TColumns.Count > 3)
            y3 = Vector512.Load(own + (3 * width));
        if (TWidth.Vectors > 1 && TColumns.Count > 3)
            z3 = Vector512.Load(own + (3 * width) + 8);
        if (TColumns.Count > 4)
            y4 = Vector512.Load(own + (4 * width));
        if (TWidth.Vectors > 1 && TColumns.Count > 4)
            z4 = Vector512.Load(own + (4 * width) + 8);
        if (TColumns.Count > 5)
            y5 = Vector512.Load(own + (5 * width));
        if (TWidth.Vectors > 1 && TColumns.Count > 5)
            z5 = Vector512.Load(own + (5 * width) + 8);
        if (TColumns.Count > 6)
            y6 = Vector512.Load(own + (6 * width));
        if (TWidth.Vectors > 1 && TColumns.Count > 6)
            z6 = Vector512.Load(own + (6 * width) + 8);
        if (TColumns.Count > 7)
            y7 = Vector512.Load(own + (7 * width));
        if (TWidth.Vectors > 1 && TColumns.Count > 7)
            z7 = Vector512.Load(own + (7 * width) + 8);
        double* later = own + (TColumns.Count * width);
        int all = following + count;
        for (int i = 0; i < all; i++)
        {
            double* row = i < following ? later + ((long)i * width) : x + ((long)index[i - following] * width);
            if (Sse.IsSupported && i >= following)
                Sse.Prefetch0(x + ((long)index[Math.Min(i - following + PrefetchRows, count - 1)] * width));
            Vector512<double> sum = Vector512.Load(row), sum2 = default;
            if (TWidth.Vectors > 1)
                sum2 = Vector512.Load(row + 8);
            sum = Vector512.FusedMultiplyAdd(Vector512.Create(*w), y0, sum);
            if (TWidth.Vectors > 1)
                sum2 = Vector512.FusedMultiplyAdd(Vector512.Create(*w), z0, sum2);
            if (TColumns.Count > 1)
            {
                sum = Vector512.FusedMultiplyAdd(Vector512.Create(w[1]), y1, sum);
                if (TWidth.Vectors > 1)
                    sum2 = Vector512.FusedMultiplyAdd(Vector512.Create(w[1]), z1, sum2);
            }
            if (TColumns.Count > 2)
            {
                sum = Vector512.FusedMultiplyAdd(Vector512.Create(w[2]), y2, sum);
                if (TWidth.Vectors > 1)
                    sum2 = Vector512.FusedMultiplyAdd(Vector512.Create(w[2]), z2, sum2);
            }
            if (TColumns.Count > 3)
            {
                sum = Vector512.FusedMultiplyAdd(Vector512.Create(w[3]), y3, sum);
                if (TWidth.Vectors > 1)
                    sum2 = Vector512.FusedMultiplyAdd(Vector512.Create(w[3]), z3, sum2);
            }
            if (TColumns.Count > 4)
            {
                sum = Vector512.FusedMultiplyAdd(Vector512.Create(w[4]), y4, sum);
                if (TWidth.Vectors > 1)
                    sum2 = Vector512.FusedMultiplyAdd(Vector512.Create(w[4]), z4, sum2);
            }
            if (TColumns.Count > 5)
            {
                sum = Vector512.FusedMultiplyAdd(Vector512.Create(w[5]), y5, sum);
                if (TWidth.Vectors > 1)
                    sum2 = Vector512.FusedMultiplyAdd(Vector512.Create(w[5]), z5, sum2);
            }
            if (TColumns.Count > 6)
            {
                sum = Vector512.FusedMultiplyAdd(Vector512.Create(w[6]), y6, sum);
                if (TWidth.Vectors > 1)
                    sum2 = Vector512.FusedMultiplyAdd(Vector512.Create(w[6]), z6, sum2);
            }
            if (TColumns.Count > 7)
            {
                sum = Vector512.FusedMultiplyAdd(Vector512.Create(w[7]), y7, sum);
                if (TWidth.Vectors > 1)
                    sum2 = Vector512.FusedMultiplyAdd(Vector512.Create(w[7]), z7, sum2);
            }
            sum.Store(row);
            if (TWidth.Vectors > 1)
                sum2.Store(row + 8);
            w += TColumns.Count;
        }
    }

    private static void Back<TWidth, TColumns>(double* panel, double* x, int place, int following, int* index, int count)
        where TWidth : struct, IRowWidth
        where TColumns : struct, IColumns
    {
        int width = 8 * TWidth.Vectors;
        double* own = x + ((long)place * width);
        Vector512<double> x0 = default, x1 = default, x2 = default, x3 = default, x4 = default, x5 = default, x6 = default, x7 = default;
        Vector512<double> z0 = default, z1 = default, z2 = default, z3 = default, z4 = default, z5 = default, z6 = default, z7 = default;
        int near = TColumns.Count + following, all = near + count;
        for (int i = 0; i < all; i++)
        {
            double* row = i < near ? own + ((long)i * width) : x + ((long)index[i - near] * width);
            if (Sse.IsSupported && i >= near)
                Sse.Prefetch0(x + ((long)index[Math.Min(i - near + PrefetchRows, count - 1)] * width));
            Vector512<double> value = Vector512.Load(row), value2 = default;
            if (TWidth.Vectors > 1)
                value2 = Vector512.Load(row + 8);
            x0 = Vector512.FusedMultiplyAdd(Vector512.Create(*panel), value, x0);
            if (TWidth.Vectors > 1)
                z0 = Vector512.FusedMultiplyAdd(Vector512.Create(*panel), value2, z0);
            if (TColumns.Count > 1)
            {
                x1 = Vector512.FusedMultiplyAdd(Vector512.Create(panel[1]), value, x1);
                if (TWidth.Vectors > 1)
                    z1 = Vector512.FusedMultiplyAdd(Vector512.Create(panel[1]), value2, z1);
            }
            if (TColumns.Count > 2)
            {
                x2 = Vector512.FusedMultiplyAdd(Vector512.Create(panel[2]), value, x2);
                if (TWidth.Vectors > 1)
                    z2 = Vector512.FusedMultiplyAdd(Vector512.Create(panel[2]), value2, z2);
            }
            if (TColumns.Count > 3)
            {
                x3 = Vector512.FusedMultiplyAdd(Vector512.Create(panel[3]), value, x3);
                if (TWidth.Vectors > 1)
                    z3 = Vector512.FusedMultiplyAdd(Vector512.Create(panel[3]), value2, z3);
            }
            if (TColumns.Count > 4)
            {
                x4 = Vector512.FusedMultiplyAdd(Vector512.Create(panel[4]), value, x4);
                if (TWidth.Vectors > 1)
                    z4 = Vector512.FusedMultiplyAdd(Vector512.Create(panel[4]), value2, z4);
            }
            if (TColumns.Count > 5)
            {
                x5 = Vector512.FusedMultiplyAdd(Vector512.Create(panel[5]), value, x5);
                if (TWidth.Vectors > 1)
                    z5 = Vector512.FusedMultiplyAdd(Vector512.Create(panel[5]), value2, z5);
            }
            if (TColumns.Count > 6)
            {
                x6 = Vector512.FusedMultiplyAdd(Vector512.Create(panel[6]), value, x6);
                if (TWidth.Vectors > 1)
                    z6 = Vector512.FusedMultiplyAdd(Vector512.Create(panel[6]), value2, z6);
            }
            if (TColumns.Count > 7)
            {
                x7 = Vector512.FusedMultiplyAdd(Vector512.Create(panel[7]), value, x7);
                if (TWidth.Vectors > 1)
                    z7 = Vector512.FusedMultiplyAdd(Vector512.Create(panel[7]), value2, z7);
            }
            panel += TColumns.Count;
        }
        x0.Store(own);
        if (TWidth.Vectors > 1)
            z0.Store(own + 8);
        if (TColumns.Count > 1)
            x1.Store(own + (1 * width));
        if (TWidth.Vectors > 1 && TColumns.Count > 1)
            z1.Store(own + (1 * width) + 8);
        if (TColumns.Count > 2)
            x2.Store(own + (2 * width));
        if (TWidth.Vectors > 1 && TColumns.Count > 2)
            z2.Store(own + (2 * width) + 8);
        if (TColumns.Count > 3)
            x3.Store(own + (3 * width));
        if (TWidth.Vectors > 1 && TColumns.Count > 3)
            z3.Store(own + (3 * width) + 8);
        if (TColumns.Count > 4)
            x4.Store(own + (4 * width));
        if (TWidth.Vectors > 1 && TColumns.Count > 4)
            z4.Store(own + (4 * width) + 8);
        if (TColumns.Count > 5)
            x5.Store(own + (5 * width));
        if (TWidth.Vectors > 1 && TColumns.Count > 5)
            z5.Store(own + (5 * width) + 8);
        if (TColumns.Count > 6)
            x6.Store(own + (6 * width));
        if (TWidth.Vectors > 1 && TColumns.Count > 6)
            z6.Store(own + (6 * width) + 8);
        if (TColumns.Count > 7)
            x7.Store(own + (7 * width));
        if (TWidth.Vectors > 1 && TColumns.Count > 7)
            z7.Store(own + (7 * width) + 8);
    }
}
