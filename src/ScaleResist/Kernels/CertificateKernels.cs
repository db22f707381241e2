// The two passes of a certificate on a panel of eight columns: flows along all links, and what is left of them routed along a tree.
// Invariant: slack bounds the rounding of r, value by value, from the first pass to the last; scalar twins in CertificateKernelTwins.
//
// With u = 2^-53, the residual of a node of degree g is a sum of g + 1 terms, each of three roundings at most (difference, product, sum), so
//     |r computed - r| <= (g + 3) u (|b| + sum |c (x_u - x_v)|)
// to first order; the factor Unit is a hundredth more than u, which pays for all higher orders while n and g stay below 10^12. Adding up a
// subtree rounds once more a node. (Higham, Accuracy and Stability of Numerical Algorithms, 2002, ch. 3 and 4.) Underflow is not counted.

using System.Runtime.CompilerServices;
using System.Runtime.Intrinsics;
using System.Runtime.Intrinsics.X86;
using ScaleResist.Graphs;

namespace ScaleResist.Kernels;

/// <summary>Kernels over the nodes <c>start .. end-1</c> of one component, n x 8 doubles.</summary>
internal static unsafe class CertificateKernels
{
    /// <summary>The unit roundoff 2^-53 and a hundredth more.</summary>
    public const double Unit = 1.01 / (1L << 53);

    /// <summary>
    /// r = b - L x, summed link by link, with b in r before; slack = the bound on its rounding. Returns x'Lx by column, all terms positive,
    /// to a relative error of <see cref="GrowthOf"/> times <see cref="Unit"/>.
    /// </summary>
    public static LaneSums Flows(Laplacian laplacian, Panel<double> x, Panel<double> r, Panel<double> slack, int start, int end)
    {
        if (PanelKernels.Scalar)
            return CertificateKernelTwins.Flows(laplacian, x, r, slack, start, end);
        const int PrefetchArcs = 12;
        LaneSums sums = default;
        fixed (long* rowStart = laplacian.RowStart)
        fixed (int* neighbours = laplacian.Neighbours)
        fixed (double* conductances = laplacian.Conductances)
        {
            long lastArc = rowStart[end] - 1;
            for (int chunk = start; chunk < end; chunk += LaneSums.ChunkRows)
            {
                int chunkEnd = Math.Min(end, chunk + LaneSums.ChunkRows);
                Vector512<double> energy = Vector512<double>.Zero;
                for (int u = chunk; u < chunkEnd; u++)
                {
                    Vector512<double> own = Vector512.Load(Row(x, u)), b = Vector512.Load(Row(r, u));
                    Vector512<double> net = Vector512<double>.Zero, size = Vector512<double>.Zero, heat = Vector512<double>.Zero;
                    long rowEnd = rowStart[u + 1];
                    for (long k = rowStart[u]; k < rowEnd; k++)
                    {
                        if (Sse.IsSupported)
                            Sse.Prefetch0(Row(x, neighbours[Math.Min(k + PrefetchArcs, lastArc)]));
                        Vector512<double> fall = own - Vector512.Load(Row(x, neighbours[k]));
                        Vector512<double> flow = conductances == null ? fall : Vector512.Create(conductances[k]) * fall;
                        net += flow;
                        size += Vector512.Abs(flow);
                        heat += flow * fall;
                    }
                    (b - net).Store(Row(r, u));
                    (Vector512.Create((rowEnd - rowStart[u] + 3) * Unit) * (size + Vector512.Abs(b))).Store(Row(slack, u));
                    energy += heat;
                }
                VectorKernels.Add(ref sums, energy);
            }
        }
        for (int lane = 0; lane < Panel<double>.Width; lane++)
            sums[lane] /= 2; // each link was met from both ends
        return sums;
    }

    /// <summary>
    /// Sends r along a tree to the first node: from the last node on, each hands what it has to its parent. Returns sum (|g| + slack of g)^2 / c
    /// over the tree's links, g the flow: an upper bound of the true energy, to the same relative error. r and slack are used up.
    /// </summary>
    /// <param name="parent">By node; below the node itself.</param>
    /// <param name="resistance">1/c of the link to the parent.</param>
    /// <param name="r">What each node has to get rid of.</param>
    /// <param name="slack">The bound on its rounding.</param>
    /// <param name="start">The root.</param>
    /// <param name="end">One past the last node.</param>
    public static LaneSums Route(int[] parent, double[] resistance, Panel<double> r, Panel<double> slack, int start, int end)
    {
        if (PanelKernels.Scalar)
            return CertificateKernelTwins.Route(parent, resistance, r, slack, start, end);
        LaneSums sums = default;
        Vector512<double> unit = Vector512.Create(Unit);
        for (int chunkEnd = end; chunkEnd > start + 1; chunkEnd -= LaneSums.ChunkRows)
        {
            int chunk = Math.Max(start + 1, chunkEnd - LaneSums.ChunkRows);
            Vector512<double> energy = Vector512<double>.Zero;
            for (int u = chunkEnd - 1; u >= chunk; u--)
            {
                Vector512<double> flow = Vector512.Load(Row(r, u)), doubt = Vector512.Load(Row(slack, u));
                Vector512<double> most = Vector512.Abs(flow) + doubt;
                energy += Vector512.Create(resistance[u]) * most * most;
                double* up = Row(r, parent[u]), doubtUp = Row(slack, parent[u]);
                Vector512<double> sum = Vector512.Load(up) + flow;
                sum.Store(up);
                (Vector512.Load(doubtUp) + (doubt + (unit * Vector512.Abs(sum)))).Store(doubtUp);
            }
            VectorKernels.Add(ref sums, energy);
        }
        return sums;
    }

    /// <summary>
    /// How many roundings the sums of both kernels can pile up on a term: a row's, a chunk's and the chunks', and those of the term itself.
    /// </summary>
    public static double GrowthOf(int nodes, int mostDegree) =>
        mostDegree + LaneSums.ChunkRows + ((nodes + LaneSums.ChunkRows - 1) / LaneSums.ChunkRows) + 8;

    [MethodImpl(MethodImplOptions.AggressiveInlining)]
    private static double* Row(Panel<double> panel, int node) => (double*)((byte*)panel.Pointer + ((long)node * 64));
}
