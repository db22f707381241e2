// What a panel of node-sign probes says of a link, and a panel of link-sign probes of a node.
// Invariant: scalar and vector forms give the same bits.

using System.Runtime.CompilerServices;
using System.Runtime.Intrinsics;

namespace ScaleResist.Kernels;

/// <summary>Kernels for the loss of links, panels of 16 probes; lanes not in use are 0 in all rows.</summary>
internal static unsafe class LossKernels
{
    /// <summary>Sums over the probes for D = x_u - x_v: of D^2, of D g_u and of D g_v, g = -1 where a bit is set.</summary>
    [MethodImpl(MethodImplOptions.AggressiveInlining)]
    public static (float Squares, float WithU, float WithV) LinkMoments(float* xu, float* xv, uint signsU, uint signsV)
    {
        if (PanelKernels.Scalar)
            return LinkMomentsScalar(xu, xv, signsU, signsV);
        Vector512<float> d = Vector512.Load(xu) - Vector512.Load(xv);
        return (
            ProbeKernels.Total(d * d),
            ProbeKernels.Total((d.AsUInt32() ^ ProbeKernels.SignBits(signsU)).AsSingle()),
            ProbeKernels.Total((d.AsUInt32() ^ ProbeKernels.SignBits(signsV)).AsSingle()));
    }

    /// <summary>The sum over the probes of (z - share b)^2.</summary>
    public static float NodeSquares(float* z, float* b, float share)
    {
        if (PanelKernels.Scalar)
        {
            float* squares = stackalloc float[ProbeKernels.Width];
            for (int lane = 0; lane < ProbeKernels.Width; lane++)
            {
                float rest = z[lane] - (share * b[lane]);
                squares[lane] = rest * rest;
            }
            return ProbeKernels.TotalScalar(squares);
        }
        Vector512<float> left = Vector512.Load(z) - (Vector512.Create(share) * Vector512.Load(b));
        return ProbeKernels.Total(left * left);
    }

    private static (float Squares, float WithU, float WithV) LinkMomentsScalar(float* xu, float* xv, uint signsU, uint signsV)
    {
        float* squares = stackalloc float[ProbeKernels.Width];
        float* withU = stackalloc float[ProbeKernels.Width];
        float* withV = stackalloc float[ProbeKernels.Width];
        for (int lane = 0; lane < ProbeKernels.Width; lane++)
        {
            float d = xu[lane] - xv[lane];
            squares[lane] = d * d;
            withU[lane] = (signsU >> lane & 1) != 0 ? -d : d;
            withV[lane] = (signsV >> lane & 1) != 0 ? -d : d;
        }
        return (ProbeKernels.TotalScalar(squares), ProbeKernels.TotalScalar(withU), ProbeKernels.TotalScalar(withV));
    }
}
