// Entries of M, the inverse of a grounded Laplacian, on the diagonal and between linked nodes: all that resistances of links and sums over
// nodes need. The factor's structure holds many more; they are computed front by front and let go.
// Invariant: every entry that is kept was computed from the factor exactly as the dense inverse would have it, up to rounding.

using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Solving;

/// <summary>M_uu for every node and M_uv for every link; rows and columns of the grounded node are 0.</summary>
internal sealed unsafe class SelectedInverse
{
    private readonly Laplacian laplacian;
    private readonly int[] places;
    private readonly double[] diagonal;
    private readonly double[] between; // by arc, kept at the arc whose node has the earlier place

    private SelectedInverse(CholeskyFactor factor)
    {
        laplacian = factor.Laplacian;
        places = factor.Symbolic.Places;
        diagonal = new double[laplacian.NodeCount];
        between = new double[laplacian.Neighbours.Length];
    }

    /// <summary>M_uu, 0 at the ground.</summary>
    public double Diagonal(int node) => diagonal[node];

    /// <summary>M_uv of two linked nodes; O(degree) of the one that is eliminated first.</summary>
    /// <exception cref="ArgumentException">The nodes are not linked.</exception>
    public double Between(int u, int v)
    {
        if (places[u] > places[v])
            (u, v) = (v, u);
        for (long arc = laplacian.RowStart[u]; arc < laplacian.RowStart[u + 1]; arc++)
        {
            if (laplacian.Neighbours[arc] == v)
                return between[arc];
        }
        throw new ArgumentException($"Nodes {u} and {v} are not linked.");
    }

    internal static SelectedInverse Of(CholeskyFactor factor, int threads, CancellationToken cancel)
    {
        SymbolicCholesky symbolic = factor.Symbolic;
        FrontSchedule schedule = symbolic.Schedule;
        SelectedInverse inverse = new(factor);
        nint[] fronts = new nint[symbolic.Count];
        using NativeDoubles held = new(schedule.HeldInverses);
        double* next = held.Pointer;
        foreach (int f in schedule.Held)
        {
            fronts[f] = (nint)next;
            next += FrontSize.Inverse(symbolic.Own(f), symbolic.RowCount(f));
        }
        using (FrontalInversion above = new(
            factor, inverse.diagonal, inverse.between, fronts, schedule.InversionOfTop, new FrontTeam(threads)))
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
            () => new FrontalInversion(factor, inverse.diagonal, inverse.between, fronts, schedule.InversionOfRuns, alone),
            (worker, run) =>
            {
                for (int f = run.End - 1; f >= run.Start; f--)
                    worker.Invert(f);
            },
            cancel);
        return inverse;
    }
}
