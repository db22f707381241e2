// The right-hand sides of a panel, carried on by the walk: y_k = p_k'b for all nodes at once, k = 1 .. s-1 (LinkSteps).
// Invariant: lanes not in use stay 0, as they are in b.

using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Estimating;

/// <summary>y_1 = D^-1 A W D^-1 b and y_2 = D^-1 A W y_1, W the nodes that may be passed; one panel of the run at a time.</summary>
internal sealed class WalkPanels : IDisposable
{
    private readonly Network network;
    private readonly float[] first; // W D^-1
    private readonly float[] next; // W
    private readonly List<(int Start, int End)> chunks;

    /// <summary>Memory for s - 1 panels.</summary>
    public WalkPanels(Network network, WalkReach reach)
    {
        this.network = network;
        next = reach.Passes;
        first = new float[network.NodeCount];
        for (int u = 0; u < first.Length; u++)
            first[u] = next[u] == 0 ? 0 : (float)(1 / network.Strengths[u]);
        chunks = RowChunks.Of(network);
        One = new Panel<float>(network.NodeCount);
        Two = reach.Steps > 2 ? new Panel<float>(network.NodeCount) : null;
    }

    /// <summary>y_1.</summary>
    public Panel<float> One { get; }

    /// <summary>y_2, with three steps.</summary>
    public Panel<float>? Two { get; }

    /// <summary>Walks on from the right-hand sides of a panel.</summary>
    public void Walk(Panel<float> b, int threads)
    {
        Step(first, b, One, threads);
        if (Two is not null)
            Step(next, One, Two, threads);
    }

    private void Step(float[] weights, Panel<float> from, Panel<float> to, int threads) =>
        Parallel.For(0, chunks.Count, new ParallelOptions { MaxDegreeOfParallelism = threads },
            i => WalkKernels.Step(network.Laplacian, weights, from, to, chunks[i].Start, chunks[i].End));

    /// <inheritdoc/>
    public void Dispose()
    {
        One.Dispose();
        Two?.Dispose();
    }
}
