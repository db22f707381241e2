// Probes: random signs on links, gathered into right-hand sides, and the squares that the estimators add up.
// Invariant: the sign of a link in a probe depends on (seed, probe, labels of its ends) alone; scalar and vector forms give the
// same bits.
//
//   FillRow      b_u = sum over links of u of +-sqrt(c): reads the adjacency and the neighbours' keys, writes one row
//   AddLink      one link's part of such a row
//   LinkSquares  reads z, b and up to two walks of b at both ends (4 to 8 rows), writes nothing: two sums go back in registers

using System.Runtime.CompilerServices;
using System.Runtime.Intrinsics;
using ScaleResist.Graphs;

namespace ScaleResist.Kernels;

/// <summary>Kernels for panels of 16 probes.</summary>
internal static unsafe class ProbeKernels
{
    /// <summary>The number of probes a panel carries.</summary>
    public const int Width = 16;

    private static readonly Vector512<uint> LaneBit = Vector512.Create(
        1u << 0, 1u << 1, 1u << 2, 1u << 3, 1u << 4, 1u << 5, 1u << 6, 1u << 7,
        1u << 8, 1u << 9, 1u << 10, 1u << 11, 1u << 12, 1u << 13, 1u << 14, 1u << 15);

    /// <summary>
    /// The signs of a link in the 16 probes of a panel, as seen from its end u: bit j is set where q_e = -1 for a link that
    /// points away from u. Links point from the smaller key to the larger. Philox counter: link key, block of 128 probes, 0;
    /// key: the seed.
    /// </summary>
    [MethodImpl(MethodImplOptions.AggressiveInlining)]
    public static uint Signs(ulong keyU, ulong keyV, ulong seed, int panel)
    {
        ulong link = NodeKey.OfLink(keyU, keyV);
        Bits128 bits = Philox.Block((uint)link, (uint)(link >> 32), (uint)panel >> 3, 0, seed);
        ulong half = (panel & 4) == 0 ? bits.Low : bits.High;
        uint signs = (uint)(half >> ((panel & 3) * 16)) & 0xFFFF;
        return keyU < keyV ? signs : signs ^ 0xFFFF;
    }

    /// <summary>The lanes in use where a panel carries <paramref name="probes"/> probes, as bits.</summary>
    public static uint LanesOf(int probes) => (1u << probes) - 1;

    /// <summary>b = B' C^(1/2) q for the rows <c>start .. end-1</c>; lanes not in use get 0.</summary>
    public static void Fill(Network network, ulong seed, int panel, uint lanes, Panel<float> b, int start, int end)
    {
        ulong[] keys = network.NodeKeys;
        Vector512<float> used = Mask(lanes);
        for (int u = start; u < end; u++)
        {
            ulong key = keys[u];
            float* row = b.Pointer + ((long)u * Width);
            if (PanelKernels.Scalar)
                FillRowScalar(network, keys, key, u, seed, panel, lanes, row);
            else
                FillRow(network, keys, key, u, seed, panel, used, row);
        }
    }

    /// <summary>
    /// Squares summed over the probes in use, for D = z_u - z_v:
    /// Shorted = sum of (D - (w_u b_u - w_v b_v))^2 and Single = sum of (D - q / sqrt(c))^2.
    /// </summary>
    /// <param name="zu">Row of z at u.</param>
    /// <param name="zv">Row of z at v.</param>
    /// <param name="bu">Row of b at u.</param>
    /// <param name="bv">Row of b at v.</param>
    /// <param name="wu">Factor of b_u.</param>
    /// <param name="wv">Factor of b_v.</param>
    /// <param name="signs">Signs of the link as seen from u.</param>
    /// <param name="unit">1 / sqrt(c).</param>
    /// <param name="lanes">Lanes in use.</param>
    [MethodImpl(MethodImplOptions.AggressiveInlining)]
    public static (float Shorted, float Single) LinkSquares(
        float* zu, float* zv, float* bu, float* bv, float wu, float wv, uint signs, float unit, uint lanes)
    {
        if (PanelKernels.Scalar)
            return LinkSquaresScalar(zu, zv, bu, bv, wu, wv, signs, unit, lanes);
        Vector512<float> difference = Vector512.Load(zu) - Vector512.Load(zv);
        Vector512<float> shorted =
            difference - ((Vector512.Create(wu) * Vector512.Load(bu)) - (Vector512.Create(wv) * Vector512.Load(bv)));
        Vector512<float> single = (difference - Signed(unit, signs)) & Mask(lanes);
        return (Total(shorted * shorted), Total(single * single));
    }

    /// <summary>
    /// The same where the first residual looks further: Shorted = sum of (D - (f_0 b_u - f_1 b_v) - (f_2 y_u - f_3 y_v) - ..)^2 for walks y of b.
    /// </summary>
    /// <param name="z">n x 16.</param>
    /// <param name="b">n x 16.</param>
    /// <param name="one">y_1, n x 16.</param>
    /// <param name="two">y_2, n x 16, or null.</param>
    /// <param name="u">One end.</param>
    /// <param name="v">The other.</param>
    /// <param name="factors">f, 4 or with y_2 6 values.</param>
    /// <param name="signs">Signs of the link as seen from u.</param>
    /// <param name="unit">1 / sqrt(c).</param>
    /// <param name="lanes">Lanes in use.</param>
    [MethodImpl(MethodImplOptions.AggressiveInlining)]
    public static (float Shorted, float Single) LinkSquares(
        float* z, float* b, float* one, float* two, int u, int v, float* factors, uint signs, float unit, uint lanes)
    {
        long atU = (long)u * Width, atV = (long)v * Width;
        if (PanelKernels.Scalar)
            return LinkSquaresScalar(z, b, one, two, atU, atV, factors, signs, unit, lanes);
        Vector512<float> difference = Vector512.Load(z + atU) - Vector512.Load(z + atV);
        Vector512<float> shorted = difference - Weighed(b, atU, atV, factors) - Weighed(one, atU, atV, factors + 2);
        if (two != null)
            shorted -= Weighed(two, atU, atV, factors + 4);
        Vector512<float> single = (difference - Signed(unit, signs)) & Mask(lanes);
        return (Total(shorted * shorted), Total(single * single));
    }

    /// <summary>Adds +-size to the lanes in use of a row, - where a sign is set.</summary>
    public static void AddLink(float* row, float size, uint signs, uint lanes)
    {
        if (PanelKernels.Scalar)
        {
            for (int lane = 0; lane < Width; lane++)
                row[lane] += (lanes >> lane & 1) == 0 ? 0 : (signs >> lane & 1) != 0 ? -size : size;
            return;
        }
        (Vector512.Load(row) + (Signed(size, signs) & Mask(lanes))).Store(row);
    }

    private static void FillRow(
        Network network, ulong[] keys, ulong key, int u, ulong seed, int panel, Vector512<float> used, float* row)
    {
        Vector512<float> sum = Vector512<float>.Zero;
        for (long k = network.RowStart[u]; k < network.RowStart[u + 1]; k++)
        {
            uint signs = Signs(key, keys[network.Neighbours[k]], seed, panel);
            sum += Signed(network.Conductances is null ? 1 : (float)Math.Sqrt(network.Conductances[k]), signs);
        }
        (sum & used).Store(row);
    }

    private static void FillRowScalar(
        Network network, ulong[] keys, ulong key, int u, ulong seed, int panel, uint lanes, float* row)
    {
        new Span<float>(row, Width).Clear();
        for (long k = network.RowStart[u]; k < network.RowStart[u + 1]; k++)
        {
            uint signs = Signs(key, keys[network.Neighbours[k]], seed, panel);
            float size = network.Conductances is null ? 1 : (float)Math.Sqrt(network.Conductances[k]);
            for (int lane = 0; lane < Width; lane++)
            {
                if ((lanes >> lane & 1) != 0)
                    row[lane] += (signs >> lane & 1) != 0 ? -size : size;
            }
        }
    }

    private static (float Shorted, float Single) LinkSquaresScalar(
        float* zu, float* zv, float* bu, float* bv, float wu, float wv, uint signs, float unit, uint lanes)
    {
        float* shorted = stackalloc float[Width];
        float* single = stackalloc float[Width];
        for (int lane = 0; lane < Width; lane++)
        {
            float difference = zu[lane] - zv[lane];
            float one = difference - ((wu * bu[lane]) - (wv * bv[lane]));
            float other = (lanes >> lane & 1) == 0 ? 0 : difference - ((signs >> lane & 1) != 0 ? -unit : unit);
            shorted[lane] = one * one;
            single[lane] = other * other;
        }
        return (TotalScalar(shorted), TotalScalar(single));
    }

    private static (float Shorted, float Single) LinkSquaresScalar(
        float* z, float* b, float* one, float* two, long atU, long atV, float* factors, uint signs, float unit, uint lanes)
    {
        float* shorted = stackalloc float[Width];
        float* single = stackalloc float[Width];
        for (int lane = 0; lane < Width; lane++)
        {
            float difference = z[atU + lane] - z[atV + lane];
            float rest = difference - ((factors[0] * b[atU + lane]) - (factors[1] * b[atV + lane]))
                - ((factors[2] * one[atU + lane]) - (factors[3] * one[atV + lane]));
            if (two != null)
                rest -= (factors[4] * two[atU + lane]) - (factors[5] * two[atV + lane]);
            float other = (lanes >> lane & 1) == 0 ? 0 : difference - ((signs >> lane & 1) != 0 ? -unit : unit);
            shorted[lane] = rest * rest;
            single[lane] = other * other;
        }
        return (TotalScalar(shorted), TotalScalar(single));
    }

    [MethodImpl(MethodImplOptions.AggressiveInlining)]
    private static Vector512<float> Weighed(float* panel, long atU, long atV, float* factors) =>
        (Vector512.Create(factors[0]) * Vector512.Load(panel + atU)) - (Vector512.Create(factors[1]) * Vector512.Load(panel + atV));

    [MethodImpl(MethodImplOptions.AggressiveInlining)]
    private static Vector512<float> Mask(uint lanes) =>
        Vector512.Equals(Vector512.Create(lanes) & LaneBit, LaneBit).AsSingle();

    // size in every lane, its sign bit set where the lane's bit is set.
    [MethodImpl(MethodImplOptions.AggressiveInlining)]
    private static Vector512<float> Signed(float size, uint signs) =>
        (Vector512.Create(size).AsUInt32() ^ SignBits(signs)).AsSingle();

    /// <summary>The sign bit in the lanes whose bit is set.</summary>
    [MethodImpl(MethodImplOptions.AggressiveInlining)]
    internal static Vector512<uint> SignBits(uint signs) =>
        Vector512.Equals(Vector512.Create(signs) & LaneBit, LaneBit) & Vector512.Create(0x80000000u);

    // Halves are added to halves, so that the scalar twin can follow the same tree.
    [MethodImpl(MethodImplOptions.AggressiveInlining)]
    internal static float Total(Vector512<float> lanes)
    {
        Vector256<float> eight = lanes.GetLower() + lanes.GetUpper();
        Vector128<float> four = eight.GetLower() + eight.GetUpper();
        Vector64<float> two = four.GetLower() + four.GetUpper();
        return two[0] + two[1];
    }

    internal static float TotalScalar(float* lanes)
    {
        for (int half = Width / 2; half > 0; half /= 2)
        {
            for (int lane = 0; lane < half; lane++)
                lanes[lane] += lanes[lane + half];
        }
        return lanes[0];
    }
}
