// Conjugate gradient with symmetric Gauss-Seidel in two sweeps an iteration, each touching half of the arcs (Eisenstat, SIAM J. Sci. Stat.
// Comput. 2:1, 1981); scalar twins in GaussSeidelKernelTwins.
//
// L = D + Lo + Up in the order of the rows, M = (D+Up)^-1 D (D+Lo)^-1. Everything is kept divided by D: rho = (D+Lo)^-1 r, pi = rho + b pi,
// and r'M r = sum d rho^2. The direction of x is t = (D+Up)^-1 D pi, and L t = (D+Lo)(t + s) with s = (D+Lo)^-1 D (pi - t), so
//
//   Back      pi_v = rho_v + b pi_v,   t_v = pi_v + sum_(w>v) c t_w / d_v          p'q = t'L t = sum t_v (d_v pi_v - sum_(w>v) c t_w)
//   Forward   t_v + s_v = pi_v + sum_(u<v) c s_u / d_v,   x_v += a t_v,   rho_v -= a (t_v + s_v),   s over t
//
// The product is known before the forward sweep (t'L t = t'D t + 2 t'Up t), which can therefore take the step.
// Invariant: within a column, operations follow the scalar twin's order exactly, so both give the same bits.
//
// Data movement in panels of n rows, beside the adjacency (16 bytes a node; 4 an arc, 8 more with weights, half of them in each sweep):
//   Start  reads 1, writes 1, gathers a row a link     Back  reads 2, writes 2, likewise     Forward  reads 4, writes 3, likewise

using System.Numerics;
using System.Runtime.CompilerServices;
using System.Runtime.Intrinsics;
using System.Runtime.Intrinsics.X86;
using ScaleResist.Graphs;

namespace ScaleResist.Kernels;

/// <summary>A Laplacian whose rows are sorted, with the number of neighbours before each row itself: the two triangles.</summary>
/// <param name="Laplacian">L.</param>
/// <param name="Earlier">n counts: neighbours of a row with smaller numbers.</param>
internal sealed record SplitLaplacian(Laplacian Laplacian, int[] Earlier)
{
    /// <summary>Finds the splits. O(n log of the degrees).</summary>
    public static SplitLaplacian Of(Laplacian laplacian)
    {
        int[] earlier = new int[laplacian.NodeCount];
        for (int v = 0; v < earlier.Length; v++)
        {
            long low = laplacian.RowStart[v], high = laplacian.RowStart[v + 1];
            while (low < high)
            {
                long middle = (low + high) / 2;
                if (laplacian.Neighbours[middle] < v)
                    low = middle + 1;
                else
                    high = middle;
            }
            earlier[v] = (int)(low - laplacian.RowStart[v]);
        }
        return new(laplacian, earlier);
    }
}

/// <summary>The sweeps over the nodes <c>start .. end-1</c>, which are one component; W = 16 floats or 8 doubles.</summary>
internal static unsafe class GaussSeidelKernels
{
    private const int PrefetchRows = 8;
    private const int PrefetchArcs = 16;

    /// <summary>rho = (D+Lo)^-1 r, also over r itself; gives |r|^2 and r'M r = sum d rho^2 by column.</summary>
    public static void Start<T>(
        SplitLaplacian split, Panel<T> r, Panel<T> rho, int start, int end, out LaneSums squares, out LaneSums energies)
        where T : unmanaged, INumber<T>
    {
        squares = energies = default;
        if (PanelKernels.Scalar)
        {
            GaussSeidelKernelTwins.Start(split, r, rho, start, end, ref squares, ref energies);
            return;
        }
        fixed (long* rowStart = split.Laplacian.RowStart)
        fixed (int* neighbours = split.Laplacian.Neighbours)
        fixed (double* conductances = split.Laplacian.Conductances)
        fixed (double* strengths = split.Laplacian.Strengths)
        fixed (int* earlier = split.Earlier)
        {
            for (int chunk = start; chunk < end; chunk += LaneSums.ChunkRows)
            {
                int chunkEnd = Math.Min(end, chunk + LaneSums.ChunkRows);
                Vector512<T> square = Vector512<T>.Zero, energy = Vector512<T>.Zero;
                for (int v = chunk; v < chunkEnd; v++)
                {
                    int ahead = Math.Min(v + PrefetchRows, end - 1);
                    Prefetch(rho.Pointer, neighbours, rowStart[ahead], earlier[ahead]);
                    Vector512<T> around = AroundEarlier(rho.Pointer, neighbours, conductances, rowStart[v], rowStart[v] + earlier[v]);
                    Vector512<T> residual = Vector512.Load(Row(r.Pointer, v));
                    Vector512<T> scaled = (residual + around) * Broadcast<T>(Inverse(strengths[v]));
                    scaled.Store(Row(rho.Pointer, v));
                    square += residual * residual;
                    energy += Broadcast<T>(strengths[v]) * scaled * scaled;
                }
                VectorKernels.Add(ref squares, square);
                VectorKernels.Add(ref energies, energy);
            }
        }
    }

    /// <summary>
    /// pi = rho + b pi with one factor a column (0: pi = rho, whatever it held), t = (D+Up)^-1 D pi; returns t'L t by column.
    /// </summary>
    public static LaneSums Back<T>(SplitLaplacian split, Panel<T> rho, Panel<T> pi, Panel<T> t, in LaneSums factors, int start, int end)
        where T : unmanaged, INumber<T>
    {
        if (PanelKernels.Scalar)
            return GaussSeidelKernelTwins.Back(split, rho, pi, t, factors, start, end);
        LaneSums sums = default;
        Vector512<T> beta = PanelKernels.Narrow<T>(factors), none = Vector512.Equals(beta, Vector512<T>.Zero);
        fixed (long* rowStart = split.Laplacian.RowStart)
        fixed (int* neighbours = split.Laplacian.Neighbours)
        fixed (double* conductances = split.Laplacian.Conductances)
        fixed (double* strengths = split.Laplacian.Strengths)
        fixed (int* earlier = split.Earlier)
        {
            for (int chunkEnd = end; chunkEnd > start; chunkEnd -= LaneSums.ChunkRows)
            {
                int chunk = Math.Max(start, chunkEnd - LaneSums.ChunkRows);
                Vector512<T> products = Vector512<T>.Zero;
                for (int v = chunkEnd - 1; v >= chunk; v--)
                {
                    int ahead = Math.Max(v - PrefetchRows, start);
                    long later = rowStart[ahead] + earlier[ahead];
                    Prefetch(t.Pointer, neighbours, later, (int)(rowStart[ahead + 1] - later));
                    Vector512<T> around = AroundLater(t.Pointer, neighbours, conductances, rowStart[v] + earlier[v], rowStart[v + 1]);
                    Vector512<T> residual = Vector512.Load(Row(rho.Pointer, v));
                    Vector512<T> direction = Vector512.ConditionalSelect(
                        none, residual, residual + (beta * Vector512.Load(Row(pi.Pointer, v))));
                    direction.Store(Row(pi.Pointer, v));
                    Vector512<T> solved = direction + (Broadcast<T>(Inverse(strengths[v])) * around);
                    solved.Store(Row(t.Pointer, v));
                    products += solved * ((Broadcast<T>(strengths[v]) * direction) - around);
                }
                VectorKernels.Add(ref sums, products);
            }
        }
        return sums;
    }

    /// <summary>
    /// s = (D+Lo)^-1 D (pi - t) over t, x += a t, rho -= a (t + s) with one factor a column; returns the new r'M r = sum d rho^2 by column.
    /// </summary>
    public static LaneSums Forward<T>(
        SplitLaplacian split, Panel<T> x, Panel<T> rho, Panel<T> pi, Panel<T> t, in LaneSums factors, int start, int end)
        where T : unmanaged, INumber<T>
    {
        if (PanelKernels.Scalar)
            return GaussSeidelKernelTwins.Forward(split, x, rho, pi, t, factors, start, end);
        LaneSums sums = default;
        Vector512<T> a = PanelKernels.Narrow<T>(factors);
        fixed (long* rowStart = split.Laplacian.RowStart)
        fixed (int* neighbours = split.Laplacian.Neighbours)
        fixed (double* conductances = split.Laplacian.Conductances)
        fixed (double* strengths = split.Laplacian.Strengths)
        fixed (int* earlier = split.Earlier)
        {
            for (int chunk = start; chunk < end; chunk += LaneSums.ChunkRows)
            {
                int chunkEnd = Math.Min(end, chunk + LaneSums.ChunkRows);
                Vector512<T> energy = Vector512<T>.Zero;
                for (int v = chunk; v < chunkEnd; v++)
                {
                    int ahead = Math.Min(v + PrefetchRows, end - 1);
                    Prefetch(t.Pointer, neighbours, rowStart[ahead], earlier[ahead]);
                    Vector512<T> around = AroundEarlier(t.Pointer, neighbours, conductances, rowStart[v], rowStart[v] + earlier[v]);
                    Vector512<T> both = Vector512.Load(Row(pi.Pointer, v)) + (Broadcast<T>(Inverse(strengths[v])) * around);
                    Vector512<T> solved = Vector512.Load(Row(t.Pointer, v));
                    (both - solved).Store(Row(t.Pointer, v));
                    (Vector512.Load(Row(x.Pointer, v)) + (a * solved)).Store(Row(x.Pointer, v));
                    Vector512<T> residual = Vector512.Load(Row(rho.Pointer, v)) - (a * both);
                    residual.Store(Row(rho.Pointer, v));
                    energy += Broadcast<T>(strengths[v]) * residual * residual;
                }
                VectorKernels.Add(ref sums, energy);
            }
        }
        return sums;
    }

    // 0 for a core of one node, which has nothing left to solve.
    internal static double Inverse(double strength) => strength > 0 ? 1 / strength : 0;

    // The sum of c times the rows of some neighbours. A row that has only just been stored comes last in both sweeps: the sums of the others need
    // not wait for it.
    [MethodImpl(MethodImplOptions.AggressiveInlining)]
    private static Vector512<T> AroundEarlier<T>(T* panel, int* neighbours, double* conductances, long from, long to)
        where T : unmanaged
    {
        Vector512<T> around = Vector512<T>.Zero;
        if (conductances == null)
        {
            for (long k = from; k < to; k++)
                around += Vector512.Load(Row(panel, neighbours[k]));
        }
        else
        {
            for (long k = from; k < to; k++)
                around += Broadcast<T>(conductances[k]) * Vector512.Load(Row(panel, neighbours[k]));
        }
        return around;
    }

    [MethodImpl(MethodImplOptions.AggressiveInlining)]
    private static Vector512<T> AroundLater<T>(T* panel, int* neighbours, double* conductances, long from, long to)
        where T : unmanaged
    {
        Vector512<T> around = Vector512<T>.Zero;
        if (conductances == null)
        {
            for (long k = to - 1; k >= from; k--)
                around += Vector512.Load(Row(panel, neighbours[k]));
        }
        else
        {
            for (long k = to - 1; k >= from; k--)
                around += Broadcast<T>(conductances[k]) * Vector512.Load(Row(panel, neighbours[k]));
        }
        return around;
    }

    // The first rows that a row to come will gather.
    [MethodImpl(MethodImplOptions.AggressiveInlining)]
    private static void Prefetch<T>(T* panel, int* neighbours, long from, int count)
        where T : unmanaged
    {
        if (!Sse.IsSupported)
            return;
        count = Math.Min(count, PrefetchArcs);
        for (int i = 0; i < count; i++)
            Sse.Prefetch0(Row(panel, neighbours[from + i]));
    }

    [MethodImpl(MethodImplOptions.AggressiveInlining)]
    private static T* Row<T>(T* panel, int node)
        where T : unmanaged => (T*)((byte*)panel + ((long)node * 64));

    [MethodImpl(MethodImplOptions.AggressiveInlining)]
    private static Vector512<T> Broadcast<T>(double value)
        where T : unmanaged => VectorKernels.Broadcast<T>(value);
}
