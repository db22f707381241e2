// What several steps of the walk around a link say of its resistance before any probe: a tighter lower bound, and the residual that has it.
//
// For any vector phi, x1 = D - phi'b with D = z_u - z_v has Var x1 = R - (2 phi'e - phi'L phi), e = e_u - e_v, for Cov(z, b) = I - 11'/n, Cov(b) = L;
// and x1 is uncorrelated with D - q/sqrt(c), whatever phi. So 2 phi'e - phi'L phi is a lower bound of R (Dirichlet's principle), and the best phi of
// a small space is a Ritz projection. The space: delta_u, delta_v and the walks of k = 1 .. s-1 steps
//     p_k(u)_y = t_k(u,y)  (WalkMoments),     p_0(u) = delta_u / d_u,     basis p_k(u) and -p_k(v),     y_k = p_k'b:  y_0 = b/d, y_k = D^-1 A y_(k-1),
// a stepping through nodes that may be passed only. With w_u = 1 where u may be passed, else 0, the Gram matrix and h follow from moments:
//     p_j(a)'L p_k(b) = w t_(j+k)(a,b) - t_(j+k+1)(a,b),     w = w_a where j = 0 < k, w_b where k = 0 < j, else 1,         p_k(a)'delta_b = w_b t_k(a,b).
// One step, phi_0 = LinkBounds' factors, is the best in span{delta_u, delta_v}. A correction a with G a = h - G phi_0 gains 2 a'(h - G phi_0) - a'G a,
// computed from the very a that is kept (rounded to 16 bits), so that neither a poor solution nor rounding can bias anything.

using System.Runtime.CompilerServices;
using ScaleResist.Graphs;

namespace ScaleResist.Estimating;

/// <summary>Corrections to the one-step residual of every link, and what they gain.</summary>
internal sealed class LinkSteps
{
    // A link that its ends tell this well, as a share of 1/c, is left to them: moments in doubles say nothing finer.
    private const double LeastRange = 1e-8;

    // The gain stays below the range by this share; a pivot below this share of its diagonal is no new direction.
    private const double LeastRest = 1e-5;
    private const double LeastPivot = 1e-9;

    private readonly ushort[] corrections;
    private readonly float[] gains;

    private LinkSteps(Network network, WalkReach reach)
    {
        Reach = reach;
        corrections = new ushort[network.LinkCount * Size];
        gains = new float[network.LinkCount];
    }

    /// <summary>The walks' reach; two steps at least.</summary>
    public WalkReach Reach { get; }

    /// <summary>Corrections a link: 2s.</summary>
    public int Size => 2 * Reach.Steps;

    /// <summary>By link, what the corrections add to the lower bound.</summary>
    public ReadOnlySpan<float> Gains => gains;

    /// <summary>The corrections of a link: factors of b_u, b_v, y_1(u), y_1(v), .., each the upper half of a float.</summary>
    public ReadOnlySpan<ushort> Corrections(long link) => corrections.AsSpan((int)(link * Size), Size);

    /// <summary>The float whose upper half is kept.</summary>
    [MethodImpl(MethodImplOptions.AggressiveInlining)]
    public static float Widen(ushort half) => BitConverter.UInt32BitsToSingle((uint)half << 16);

    /// <summary>As far as work and memory allow; null where that is one step, which needs no preparing.</summary>
    /// <param name="network">The network.</param>
    /// <param name="bytes">Memory that may be taken.</param>
    /// <param name="threads">Threads to share the work among.</param>
    /// <param name="cancel">Ends it early.</param>
    public static LinkSteps? Of(Network network, double bytes, int threads, CancellationToken cancel)
    {
        WalkReach reach = WalkReach.Of(network, bytes);
        return reach.Steps == 1 ? null : Of(network, reach, threads, cancel);
    }

    /// <summary>Prepares all links.</summary>
    public static LinkSteps Of(Network network, WalkReach reach, int threads, CancellationToken cancel)
    {
        LinkSteps steps = new(network, reach);
        WalkMoments moments = WalkMoments.Of(network, reach, threads, cancel);
        List<(int Start, int End)> chunks = RowChunks.Of(network);
        Parallel.For(
            0, chunks.Count, new ParallelOptions { MaxDegreeOfParallelism = threads, CancellationToken = cancel },
            i => steps.SolveLinks(network, moments, chunks[i].Start, chunks[i].End));
        return steps;
    }

    private void SolveLinks(Network network, WalkMoments moments, int start, int end)
    {
        LinkGram gram = new(Reach.Steps);
        for (int u = start; u < end; u++)
        {
            long link = network.LinkStart[u];
            for (long k = network.FirstLaterArc(u); k < network.RowStart[u + 1]; k++, link++)
            {
                int v = network.Neighbours[k];
                double c = network.Conductance(k), du = network.Strengths[u], dv = network.Strengths[v];
                LinkBounds bounds = LinkBounds.Of(c, du, dv);
                if (bounds.Range <= LeastRange * bounds.Upper)
                    continue;
                gram.Fill(c, du, dv, Reach.Passes[u] != 0, Reach.Passes[v] != 0, moments.OfNode(u), moments.OfNode(v), moments.OfLink(link));
                double gain = gram.Solve(bounds, LeastPivot);
                if (!(gain > 0 && gain <= (1 - LeastRest) * bounds.Range))
                    continue;
                gains[link] = (float)gain;
                gram.Rounded.CopyTo(corrections.AsSpan((int)(link * Size), Size));
            }
        }
    }
}
