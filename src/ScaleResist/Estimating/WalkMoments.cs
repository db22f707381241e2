// Moments of the random walk between the ends of links and from nodes back to themselves, from which Gram matrices follow.
//
//     t_k(u,v) = 1/d_u sum over walks u, x_1, .., x_(k-1), v of c_(u x_1) / d_(x_1) .. c_(x_(k-1) v) / d_v,      t_0(u,u) = 1/d_u,
//
// over walks whose inner nodes may be passed (WalkReach). It is symmetric in u and v, and with p_k(u)_y = t_k(u,y) where y may be passed, k >= 1,
//     t_(k+1)(u,v) = sum_y p_k(u)_y c_yv / d_v,           t_k(u,u) = 1/d_u sum over neighbours y that may be passed of c_uy t_(k-1)(u,y).
// The end of a link that has more neighbours spreads its walks into a dense row, once for all its links; the last step is gathered from the other.

using System.Runtime.Intrinsics.X86;
using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Estimating;

/// <summary>t_2 .. t_(2s-1) between the ends of every link, and from every node back to it.</summary>
internal sealed class WalkMoments
{
    private const int NearAhead = 1, FarAhead = 4; // walks

    private readonly Network network;
    private readonly float[] passes;
    private readonly long[] passedStart; // by node, its neighbours that may be passed, beside c / d of each
    private readonly int[] passed;
    private readonly double[] shares;
    private readonly double[] ofLinks;
    private readonly double[] ofNodes;

    private WalkMoments(Network network, WalkReach reach)
    {
        this.network = network;
        Count = (2 * reach.Steps) - 2;
        passes = reach.Passes;
        passedStart = new long[network.NodeCount + 1];
        for (int u = 0; u < network.NodeCount; u++)
        {
            long count = 0;
            for (long k = network.RowStart[u]; k < network.RowStart[u + 1]; k++)
                count += passes[network.Neighbours[k]] != 0 ? 1 : 0;
            passedStart[u + 1] = passedStart[u] + count;
        }
        (passed, shares) = (new int[passedStart[^1]], new double[passedStart[^1]]);
        ofLinks = new double[network.LinkCount * Count];
        ofNodes = new double[(long)network.NodeCount * Count];
    }

    /// <summary>Moments kept: 2s - 2, at least 2.</summary>
    public int Count { get; }

    /// <summary>t_2 .. t_(2s-1) between the ends of a link.</summary>
    public ReadOnlySpan<double> OfLink(long link) => ofLinks.AsSpan((int)(link * Count), Count);

    /// <summary>t_2 .. t_(2s-1) from a node back to it.</summary>
    public ReadOnlySpan<double> OfNode(int node) => ofNodes.AsSpan(node * Count, Count);

    /// <summary>All moments. O(walks of up to 2s - 2 steps), 8 (2s - 2) bytes a link and node, and 16 bytes a node and thread.</summary>
    public static WalkMoments Of(Network network, WalkReach reach, int threads, CancellationToken cancel)
    {
        WalkMoments moments = new(network, reach);
        List<(int Start, int End)> chunks = RowChunks.Of(network);
        ParallelOptions parallel = new() { MaxDegreeOfParallelism = threads, CancellationToken = cancel };
        Parallel.For(0, chunks.Count, parallel, i => moments.FillPassed(chunks[i].Start, chunks[i].End));
        Parallel.For(
            0, chunks.Count, parallel, () => new Spread(network.NodeCount),
            (i, _, spread) =>
            {
                for (int u = chunks[i].Start; u < chunks[i].End; u++)
                    moments.AddLinksOf(u, spread);
                return spread;
            },
            spread => spread.Dispose());
        moments.AddNodes();
        return moments;
    }

    // Of the two ends of a link, the one with more neighbours spreads.
    private bool Spreads(int u, int v)
    {
        int more = network.Degree(u), fewer = network.Degree(v);
        return more > fewer || (more == fewer && u < v);
    }

    private void FillPassed(int start, int end)
    {
        for (int u = start; u < end; u++)
        {
            long at = passedStart[u];
            for (long k = network.RowStart[u]; k < network.RowStart[u + 1]; k++)
            {
                int y = network.Neighbours[k];
                if (passes[y] != 0)
                    (passed[at], shares[at++]) = (y, network.Conductance(k) / network.Strengths[y]);
            }
        }
    }

    private unsafe void AddLinksOf(int u, Spread spread)
    {
        long start = network.RowStart[u], end = network.RowStart[u + 1], later = network.FirstLaterArc(u);
        spread.Links.Clear();
        for (long k = start; k < end; k++)
        {
            int v = network.Neighbours[k];
            if (Spreads(u, v))
                spread.Links.Add((v, k >= later ? network.LinkStart[u] + (k - later) : network.LinkBetween(u, v)));
        }
        if (spread.Links.Count == 0)
            return;
        double own = 1 / network.Strengths[u];
        spread.Walks.Clear();
        for (long at = passedStart[u]; at < passedStart[u + 1]; at++)
            spread.Walks.Add((passed[at], own * shares[at]));
        for (int i = 0; i < Count - 1; i++)
        {
            Step(spread);
            foreach ((int v, long link) in spread.Links)
                ofLinks[(link * Count) + i] = spread.Row[v] / network.Strengths[v];
            if (i == Count - 2)
                GatherLast(spread);
            spread.Take(passes, network.Strengths, more: i < Count - 2);
        }
    }

    // One step on from the nodes that walks have reached: Row_w = sum_y p_y c_yw.
    private unsafe void Step(Spread spread)
    {
        fixed (int* neighbours = network.Neighbours)
        fixed (double* conductances = network.Conductances)
        {
            double* row = spread.Row;
            ReadOnlySpan<(int Node, double P)> walks = System.Runtime.InteropServices.CollectionsMarshal.AsSpan(spread.Walks);
            for (int i = 0; i < walks.Length; i++)
            {
                (int y, double p) = walks[i];
                long end = network.RowStart[y + 1];
                // Rows come from memory, places of sums from a cache: each is asked for as early as its address is known.
                if (Sse.IsSupported && i + FarAhead < walks.Length)
                {
                    Sse.Prefetch0(neighbours + network.RowStart[walks[i + FarAhead].Node]);
                    int near = walks[i + NearAhead].Node;
                    for (long k = network.RowStart[near]; k < network.RowStart[near + 1]; k++)
                        Sse.Prefetch0(row + neighbours[k]);
                }
                spread.Room(network.Degree(y));
                int count = spread.ReachedCount;
                fixed (int* reached = spread.Reached)
                {
                    for (long k = network.RowStart[y]; k < end; k++)
                    {
                        int w = neighbours[k];
                        double before = row[w];
                        reached[count] = w;
                        count += before == 0 ? 1 : 0;
                        row[w] = before + (conductances == null ? p : p * conductances[k]);
                    }
                }
                spread.ReachedCount = count;
            }
        }
    }

    private unsafe void GatherLast(Spread spread)
    {
        double* row = spread.Row;
        foreach ((int v, long link) in spread.Links)
        {
            double sum = 0;
            for (long at = passedStart[v]; at < passedStart[v + 1]; at++)
                sum += shares[at] * row[passed[at]];
            ofLinks[(link * Count) + Count - 1] = sum / network.Strengths[v];
        }
    }

    // Link by link in order, so that sums do not depend on threads: t_k(u,u) from t_(k-1)(u,y).
    private void AddNodes()
    {
        for (int u = 0; u < network.NodeCount; u++)
        {
            long link = network.LinkStart[u];
            double atU = 1 / network.Strengths[u];
            for (long k = network.FirstLaterArc(u); k < network.RowStart[u + 1]; k++, link++)
            {
                int v = network.Neighbours[k];
                double c = network.Conductance(k), atV = 1 / network.Strengths[v];
                double before = c * atU * atV; // t_1
                for (int i = 0; i < Count; i++)
                {
                    ofNodes[(u * Count) + i] += c * atU * before * passes[v];
                    ofNodes[(v * Count) + i] += c * atV * before * passes[u];
                    before = ofLinks[(link * Count) + i];
                }
            }
        }
    }

    // A thread's workspace: where the walks from one node have got to.
    private sealed unsafe class Spread(int nodes) : IDisposable
    {
        private readonly Panel<double> memory = new((nodes + 7) / 8); // for its large pages

        /// <summary>The links that the node serves.</summary>
        public List<(int Other, long Link)> Links { get; } = [];

        /// <summary>Nodes reached that may be passed, with p.</summary>
        public List<(int Node, double P)> Walks { get; } = [];

        /// <summary>Sums by node; zero but at the nodes reached.</summary>
        public double* Row => memory.Pointer;

        /// <summary>Nodes reached, and room for one more.</summary>
        public int[] Reached { get; private set; } = new int[1024];

        public int ReachedCount { get; set; }

        public void Room(int more)
        {
            if (ReachedCount + more + 1 > Reached.Length)
            {
                int[] larger = new int[2 * (ReachedCount + more + 1)];
                Array.Copy(Reached, larger, ReachedCount);
                Reached = larger;
            }
        }

        /// <summary>Turns the sums into the walks that go on, and clears them.</summary>
        public void Take(float[] passes, double[] strengths, bool more)
        {
            double* row = Row;
            Walks.Clear();
            for (int i = 0; i < ReachedCount; i++)
            {
                int y = Reached[i];
                if (more && passes[y] != 0)
                    Walks.Add((y, row[y] / strengths[y]));
                row[y] = 0;
            }
            ReachedCount = 0;
        }

        public void Dispose() => memory.Dispose();
    }
}
