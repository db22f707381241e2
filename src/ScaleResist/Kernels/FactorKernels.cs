// Triangular sweeps of a factor and substitution through eliminated nodes, on whole panels; scalar twins in FactorKernelTwins.
// Invariant: within a column, operations follow the scalar twin's order exactly, so both give the same bits.
//
// Data movement in panels of the core's n rows, beside 8 bytes an entry of the factor each way:
//   Forward      reads 1, writes 1, gathers a row an entry      Back   reads 2, writes 2, gathers a row an entry
//   StepForward  reads 4, writes 3, gathers a row an entry
//   Eliminate and Restore move two to four rows an eliminated node

using System.Numerics;
using System.Runtime.CompilerServices;
using System.Runtime.Intrinsics;
using System.Runtime.Intrinsics.X86;

namespace ScaleResist.Kernels;

/// <summary>One half of a factor in compressed rows: indices and shares of each place.</summary>
/// <param name="Start">n + 1 offsets.</param>
/// <param name="Index">Other places.</param>
/// <param name="Share">Beside them.</param>
internal readonly record struct FactorHalf(long[] Start, int[] Index, float[] Share);

/// <summary>
/// A node taken out of a system: neighbours in the panel's numbering (-1 where there are fewer than three), shares c_i / d,
/// 1 / d.
/// </summary>
internal readonly record struct EliminationStep(
    int Node, int A, int B, int C, double ShareA, double ShareB, double ShareC, double Inverse);

/// <summary>Kernels of factors and eliminations.</summary>
internal static unsafe class FactorKernels
{
    private const int PrefetchEntries = 8;

    /// <summary>y_v = r_v + sum over predecessors u of share y_u, in order; returns r'M r = sum inverse y^2 by column.</summary>
    public static LaneSums Forward<T>(FactorHalf rows, float[] inverse, Panel<T> r, Panel<T> y, int n)
        where T : unmanaged, INumber<T>
    {
        if (PanelKernels.Scalar)
            return FactorKernelTwins.Forward(rows, inverse, r, y, n);
        LaneSums sums = default;
        fixed (long* start = rows.Start)
        fixed (int* index = rows.Index)
        fixed (float* share = rows.Share)
        {
            long last = start[n] - 1;
            for (int chunk = 0; chunk < n; chunk += LaneSums.ChunkRows)
            {
                Vector512<T> energy = Vector512<T>.Zero;
                for (int v = chunk; v < Math.Min(n, chunk + LaneSums.ChunkRows); v++)
                {
                    Vector512<T> sum = Ahead(index, share, y.Pointer, start[v], start[v + 1], last, Vector512.Load(Row(r.Pointer, v)));
                    sum.Store(Row(y.Pointer, v));
                    energy += Broadcast<T>(inverse[v]) * sum * sum;
                }
                VectorKernels.Add(ref sums, energy);
            }
        }
        return sums;
    }

    /// <summary>
    /// x += a p, r -= a q with one factor a column, and <see cref="Forward"/> on the new r in the same pass, y over q; returns r'M r by column.
    /// </summary>
    public static LaneSums StepForward<T>(
        FactorHalf rows, float[] inverse, Panel<T> x, Panel<T> r, Panel<T> p, Panel<T> q, in LaneSums factors, int n)
        where T : unmanaged, INumber<T>
    {
        if (PanelKernels.Scalar)
            return FactorKernelTwins.StepForward(rows, inverse, x, r, p, q, factors, n);
        LaneSums sums = default;
        Vector512<T> a = PanelKernels.Narrow<T>(factors);
        fixed (long* start = rows.Start)
        fixed (int* index = rows.Index)
        fixed (float* share = rows.Share)
        {
            long last = start[n] - 1;
            for (int chunk = 0; chunk < n; chunk += LaneSums.ChunkRows)
            {
                Vector512<T> energy = Vector512<T>.Zero;
                for (int v = chunk; v < Math.Min(n, chunk + LaneSums.ChunkRows); v++)
                {
                    (Vector512.Load(Row(x.Pointer, v)) + (a * Vector512.Load(Row(p.Pointer, v)))).Store(Row(x.Pointer, v));
                    Vector512<T> residual = Vector512.Load(Row(r.Pointer, v)) - (a * Vector512.Load(Row(q.Pointer, v)));
                    residual.Store(Row(r.Pointer, v));
                    Vector512<T> sum = Ahead(index, share, q.Pointer, start[v], start[v + 1], last, residual);
                    sum.Store(Row(q.Pointer, v));
                    energy += Broadcast<T>(inverse[v]) * sum * sum;
                }
                VectorKernels.Add(ref sums, energy);
            }
        }
        return sums;
    }

    // sum += share y_u, with the rows prefetched that come up to eight entries later.
    [MethodImpl(MethodImplOptions.AggressiveInlining)]
    private static Vector512<T> Ahead<T>(int* index, float* share, T* y, long from, long to, long last, Vector512<T> sum)
        where T : unmanaged
    {
        for (long k = from; k < to; k++)
        {
            if (Sse.IsSupported)
                Sse.Prefetch0(Row(y, index[Math.Min(k + PrefetchEntries, last)]));
            sum += Broadcast<T>(share[k]) * Vector512.Load(Row(y, index[k]));
        }
        return sum;
    }

    /// <summary>
    /// s_v = y_v inverse_v + sum over successors w of share s_w, in reverse order, s over y, and p = s + b p with one factor a column
    /// (0: p = s, whatever it held).
    /// </summary>
    public static void Back<T>(FactorHalf columns, float[] inverse, Panel<T> y, Panel<T> p, in LaneSums factors, int n)
        where T : unmanaged, INumber<T>
    {
        if (PanelKernels.Scalar)
        {
            FactorKernelTwins.Back(columns, inverse, y, p, factors, n);
            return;
        }
        Vector512<T> beta = PanelKernels.Narrow<T>(factors), none = Vector512.Equals(beta, Vector512<T>.Zero);
        fixed (long* start = columns.Start)
        fixed (int* index = columns.Index)
        fixed (float* share = columns.Share)
        {
            for (int v = n - 1; v >= 0; v--)
            {
                Vector512<T> sum = Broadcast<T>(inverse[v]) * Vector512.Load(Row(y.Pointer, v));
                for (long k = start[v]; k < start[v + 1]; k++)
                {
                    if (Sse.IsSupported)
                        Sse.Prefetch0(Row(y.Pointer, index[Math.Max(k - PrefetchEntries, 0)]));
                    sum += Broadcast<T>(share[k]) * Vector512.Load(Row(y.Pointer, index[k]));
                }
                sum.Store(Row(y.Pointer, v));
                Vector512.ConditionalSelect(none, sum, sum + (beta * Vector512.Load(Row(p.Pointer, v)))).Store(Row(p.Pointer, v));
            }
        }
    }

    /// <summary>b_i += share_i b_v for every step in order; returns the energy b_v^2 / d that the steps take out, by column.</summary>
    public static LaneSums Eliminate<T>(ReadOnlySpan<EliminationStep> steps, Panel<T> b)
        where T : unmanaged, INumber<T>
    {
        if (PanelKernels.Scalar)
            return FactorKernelTwins.Eliminate(steps, b);
        LaneSums sums = default;
        for (int chunk = 0; chunk < steps.Length; chunk += LaneSums.ChunkRows)
        {
            Vector512<T> energy = Vector512<T>.Zero;
            foreach (ref readonly EliminationStep step in steps[chunk..Math.Min(steps.Length, chunk + LaneSums.ChunkRows)])
            {
                Vector512<T> own = Vector512.Load(Row(b.Pointer, step.Node));
                energy += Broadcast<T>(step.Inverse) * own * own;
                AddShare(b, step.A, step.ShareA, own);
                if (step.B >= 0)
                    AddShare(b, step.B, step.ShareB, own);
                if (step.C >= 0)
                    AddShare(b, step.C, step.ShareC, own);
            }
            VectorKernels.Add(ref sums, energy);
        }
        return sums;
    }

    [MethodImpl(MethodImplOptions.AggressiveInlining)]
    private static void AddShare<T>(Panel<T> b, int node, double share, Vector512<T> own)
        where T : unmanaged, INumber<T> =>
        (Vector512.Load(Row(b.Pointer, node)) + (Broadcast<T>(share) * own)).Store(Row(b.Pointer, node));

    /// <summary>x_v = b_v / d + sum share_i x_i for every step in reverse; x over b.</summary>
    public static void Restore<T>(ReadOnlySpan<EliminationStep> steps, Panel<T> x)
        where T : unmanaged, INumber<T>
    {
        if (PanelKernels.Scalar)
        {
            FactorKernelTwins.Restore(steps, x);
            return;
        }
        for (int i = steps.Length - 1; i >= 0; i--)
        {
            ref readonly EliminationStep step = ref steps[i];
            Vector512<T> sum = (Broadcast<T>(step.Inverse) * Vector512.Load(Row(x.Pointer, step.Node)))
                + (Broadcast<T>(step.ShareA) * Vector512.Load(Row(x.Pointer, step.A)));
            if (step.B >= 0)
                sum += Broadcast<T>(step.ShareB) * Vector512.Load(Row(x.Pointer, step.B));
            if (step.C >= 0)
                sum += Broadcast<T>(step.ShareC) * Vector512.Load(Row(x.Pointer, step.C));
            sum.Store(Row(x.Pointer, step.Node));
        }
    }

    /// <summary>to_i = from_(rows[i]) for i below the count of rows.</summary>
    public static void Gather<T>(Panel<T> from, int[] rows, Panel<T> to)
        where T : unmanaged, INumber<T>
    {
        for (int i = 0; i < rows.Length; i++)
            from.Row(rows[i]).CopyTo(to.Row(i));
    }

    /// <summary>to_(rows[i]) = from_i.</summary>
    public static void Scatter<T>(Panel<T> from, int[] rows, Panel<T> to)
        where T : unmanaged, INumber<T>
    {
        for (int i = 0; i < rows.Length; i++)
            from.Row(i).CopyTo(to.Row(rows[i]));
    }

    [MethodImpl(MethodImplOptions.AggressiveInlining)]
    private static T* Row<T>(T* panel, int node)
        where T : unmanaged => (T*)((byte*)panel + ((long)node * 64));

    [MethodImpl(MethodImplOptions.AggressiveInlining)]
    private static Vector512<T> Broadcast<T>(double value)
        where T : unmanaged => VectorKernels.Broadcast<T>(value);
}
