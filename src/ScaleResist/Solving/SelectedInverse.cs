// Entries of M, the inverse of a grounded Laplacian, on the diagonal and between linked nodes: all that resistances of links and sums over
// nodes need; and where asked for, of M diag(w) M, which the loss of links needs. The factor's structure holds many more; they are computed
// front by front and let go.
// Invariant: every entry that is kept was computed from the factor exactly as the dense inverse would have it, up to rounding.

using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Solving;

/// <summary>A symmetric matrix at u, u for every node and at u, v for every link; rows and columns of the grounded node are 0.</summary>
internal sealed class InverseEntries(CholeskyFactor factor)
{
    private readonly Laplacian laplacian = factor.Laplacian;
    private readonly int[] places = factor.Symbolic.Places;

    internal double[] Diagonal { get; } = new double[factor.Laplacian.NodeCount];

    // By arc, kept at the arc whose node has the earlier place.
    internal double[] Between { get; } = new double[factor.Laplacian.Neighbours.Length];

    /// <summary>The entry of two linked nodes; O(degree) of the one that is eliminated first.</summary>
    /// <exception cref="ArgumentException">The nodes are not linked.</exception>
    public double At(int u, int v)
    {
        if (places[u] > places[v])
            (u, v) = (v, u);
        for (long arc = laplacian.RowStart[u]; arc < laplacian.RowStart[u + 1]; arc++)
        {
            if (laplacian.Neighbours[arc] == v)
                return Between[arc];
        }
        throw new ArgumentException($"Nodes {u} and {v} are not linked.");
    }
}

/// <summary>M, and M diag(w) M where weights were given.</summary>
internal sealed unsafe class SelectedInverse
{
    private readonly InverseEntries inverse;
    private readonly InverseEntries? slope;

    private SelectedInverse(CholeskyFactor factor, bool slopes)
    {
        inverse = new InverseEntries(factor);
        slope = slopes ? new InverseEntries(factor) : null;
    }

    /// <summary>M_uu, 0 at the ground.</summary>
    public double Diagonal(int node) => inverse.Diagonal[node];

    /// <summary>M_uv of two linked nodes; O(degree) of the one that is eliminated first.</summary>
    /// <exception cref="ArgumentException">The nodes are not linked.</exception>
    public double Between(int u, int v) => inverse.At(u, v);

    /// <summary>
    /// (e_u - e_v)' M diag(w) M (e_u - e_v) for two linked nodes, of which one may be the ground: minus the derivative of their resistance
    /// where every node gains the conductance t w to the ground.
    /// </summary>
    public double Slope(int u, int v)
    {
        if (slope is null)
            throw new InvalidOperationException("The inverse was taken without weights.");
        return slope.Diagonal[u] + slope.Diagonal[v] - (2 * slope.At(u, v)); // between the ground and others 0 is kept
    }

    internal static SelectedInverse Of(CholeskyFactor factor, double[]? weights, int threads, CancellationToken cancel)
    {
        SymbolicCholesky symbolic = factor.Symbolic;
        FrontSchedule schedule = symbolic.Schedule;
        SelectedInverse selected = new(factor, weights is not null);
        using FactorSlope? slopes = weights is null ? null : FactorSlope.Of(factor, weights, threads, cancel);
        int copies = weights is null ? 1 : 2;
        nint[] fronts = new nint[symbolic.Count];
        using NativeDoubles held = new(copies * schedule.HeldInverses);
        double* next = held.Pointer;
        foreach (int f in schedule.Held)
        {
            fronts[f] = (nint)next;
            next += copies * FrontSize.Inverse(symbolic.Own(f), symbolic.RowCount(f));
        }
        using (FrontalInversion above = new(
            factor, selected.inverse, slopes, selected.slope, fronts, schedule.InversionOfTop, new FrontTeam(threads)))
        {
            foreach (int f in schedule.Top.Reverse())
            {
                cancel.ThrowIfCancellationRequested();
                above.Invert(f);
            }
        }
        FrontTeam alone = new(1);
        FrontTeam.WorkOff(
            schedule.Subtrees, threads,
            () => new FrontalInversion(factor, selected.inverse, slopes, selected.slope, fronts, schedule.InversionOfRuns, alone),
            (worker, run) =>
            {
                for (int f = run.End - 1; f >= run.Start; f--)
                    worker.Invert(f);
            },
            cancel);
        return selected;
    }
}
