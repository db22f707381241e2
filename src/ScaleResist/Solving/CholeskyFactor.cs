// The exact factor of a grounded Laplacian and substitution with it. With M the inverse of the Laplacian without its last node of the order,
// x = M b; M gives resistances by R_uv = M_uu + M_vv - 2 M_uv, and det by the matrix-tree theorem the weighted number of spanning trees.
// Invariant: the factor is read-only; solves share nothing but it, each has a workspace of its own.

using System.Runtime.Intrinsics;
using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Solving;

/// <summary>
/// A supernodal factor by panels of up to eight places: the inverse of each panel's own grounded block, and its shares W (the harmonic
/// measure of the later places), both non-negative and to high relative accuracy however far the conductances are spread.
/// </summary>
internal sealed unsafe class CholeskyFactor : IDisposable
{
    private const int Panel = DenseKernels.Tile;
    private readonly NativeDoubles values;

    private CholeskyFactor(SymbolicCholesky symbolic, Laplacian laplacian, NativeDoubles values, double[] logs)
    {
        Symbolic = symbolic;
        Laplacian = laplacian;
        this.values = values;
        LogPivots = logs;
    }

    /// <summary>The structure.</summary>
    public SymbolicCholesky Symbolic { get; }

    /// <summary>L.</summary>
    public Laplacian Laplacian { get; }

    /// <summary>log det of the grounded Laplacian: the logarithm of the number of spanning trees, each weighted by its conductances' product.</summary>
    public double LogDeterminant => LogPivots.Sum();

    /// <summary>By front, its part of <see cref="LogDeterminant"/>; a front lies within one component of what is left without the ground.</summary>
    public double[] LogPivots { get; }

    internal double* Values => values.Pointer;

    /// <summary>Factorises. The same bits whatever the number of threads.</summary>
    /// <exception cref="SolveException">A pivot is not a positive number.</exception>
    public static CholeskyFactor Of(SymbolicCholesky symbolic, Laplacian laplacian, int threads, CancellationToken cancel)
    {
        NativeDoubles values = new(symbolic.StoredEntries + Panel); // vectors read past the last
        try
        {
            double[] logs = new double[symbolic.Count];
            Factorise(symbolic, laplacian, values.Pointer, logs, threads, cancel);
            new Span<double>(values.Pointer + symbolic.StoredEntries, Panel).Clear();
            return new CholeskyFactor(symbolic, laplacian, values, logs);
        }
        catch
        {
            values.Dispose();
            throw;
        }
    }

    private static void Factorise(
        SymbolicCholesky symbolic, Laplacian laplacian, double* values, double[] logs, int threads, CancellationToken cancel)
    {
        FrontSchedule schedule = symbolic.Schedule;
        nint[] updates = new nint[symbolic.Count];
        using NativeDoubles held = new(schedule.HeldUpdates);
        double* next = held.Pointer;
        foreach (int f in schedule.Held)
        {
            updates[f] = (nint)next;
            next += FrontSize.Update(symbolic.RowCount(f));
        }
        FrontTeam alone = new(1);
        FrontTeam.WorkOff(
            schedule.Subtrees, threads,
            () => new FrontalElimination(symbolic, laplacian, values, updates, logs, schedule.EliminationOfRuns, alone),
            (worker, run) =>
            {
                for (int f = run.Start; f < run.End; f++)
                    worker.Eliminate(f);
            },
            cancel);
        using FrontalElimination above = new(
            symbolic, laplacian, values, updates, logs, schedule.EliminationOfTop, new FrontTeam(threads));
        foreach (int f in schedule.Top)
        {
            cancel.ThrowIfCancellationRequested();
            above.Eliminate(f);
        }
    }

    /// <summary>Room for one solve at a time of panels with 8 doubles or 16 floats a node.</summary>
    public SubstitutionWorkspace NewWorkspace(int columns) => new(Symbolic.Nodes.Length - 1, columns);

    /// <summary>x = M b, n x 8; rows in the Laplacian's numbering, the grounded row of x is 0 and that of b is not read. x may be b.</summary>
    public void Solve(Panel<double> b, Panel<double> x, SubstitutionWorkspace workspace)
    {
        workspace.Check(8);
        double* rows = workspace.Rows;
        int ground = Symbolic.Nodes.Length - 1;
        fixed (int* nodes = Symbolic.Nodes)
        {
            for (int place = 0; place < ground; place++)
                Vector512.Load(b.Pointer + (8L * nodes[place])).StoreAligned(rows + (8L * place));
            Sweep<OneVector>(rows, nodes, x.Pointer);
        }
        x.Row(Symbolic.Nodes[ground]).Clear();
    }

    /// <summary>x = M b, n x 16, computed in doubles.</summary>
    public void Solve(Panel<float> b, Panel<float> x, SubstitutionWorkspace workspace)
    {
        workspace.Check(16);
        double* rows = workspace.Rows;
        int ground = Symbolic.Nodes.Length - 1;
        fixed (int* nodes = Symbolic.Nodes)
        {
            for (int place = 0; place < ground; place++)
            {
                (Vector512<double> low, Vector512<double> high) = Vector512.Widen(Vector512.Load(b.Pointer + (16L * nodes[place])));
                low.StoreAligned(rows + (16L * place));
                high.StoreAligned(rows + (16L * place) + 8);
            }
            Sweep<TwoVectors>(rows, nodes, x.Pointer);
        }
        x.Row(Symbolic.Nodes[ground]).Clear();
    }

    // Forward over the fronts, then back, each front's solution leaving for x as soon as it is there.
    private void Sweep<TWidth>(double* rows, int* nodes, void* x)
        where TWidth : struct, IRowWidth
    {
        fixed (int* index = Symbolic.Rows)
        {
            double* value = values.Pointer;
            for (int f = 0; f < Symbolic.Count; f++)
            {
                int s = Symbolic.Own(f), r = Symbolic.RowCount(f);
                int* later = index + Symbolic.RowStart[f];
                for (int j = 0; j < s; j += Panel)
                {
                    int q = Math.Min(Panel, s - j), following = s - j - q;
                    SubstitutionKernels.Forward<TWidth>(q, value + (q * q), rows, Symbolic.First[f] + j, following, later, r);
                    value += q * (long)(q + following + r);
                }
            }
            for (int f = Symbolic.Count - 1; f >= 0; f--)
            {
                int s = Symbolic.Own(f), r = Symbolic.RowCount(f);
                int* later = index + Symbolic.RowStart[f];
                for (int j = (s - 1) / Panel * Panel; j >= 0; j -= Panel)
                {
                    int q = Math.Min(Panel, s - j), following = s - j - q;
                    value -= q * (long)(q + following + r);
                    SubstitutionKernels.Back<TWidth>(q, value, rows, Symbolic.First[f] + j, following, later, r);
                }
                for (int place = Symbolic.First[f]; place < Symbolic.First[f] + s; place++)
                    Leave<TWidth>(rows, place, x, nodes[place]);
            }
        }
    }

    private static void Leave<TWidth>(double* rows, int place, void* x, int node)
        where TWidth : struct, IRowWidth
    {
        double* row = rows + (8L * TWidth.Vectors * place);
        if (TWidth.Vectors == 1)
            Vector512.LoadAligned(row).Store((double*)x + (8L * node));
        else
            Vector512.Narrow(Vector512.LoadAligned(row), Vector512.LoadAligned(row + 8)).Store((float*)x + (16L * node));
    }

    /// <summary>M on the diagonal and between linked nodes. The factor stays as it is. The same bits whatever the number of threads.</summary>
    public SelectedInverse Invert(int threads, CancellationToken cancel) => SelectedInverse.Of(this, null, threads, cancel);

    /// <summary>M and M diag(w) M on the diagonal and between linked nodes, w by node and not negative; about three times the work.</summary>
    public SelectedInverse Invert(double[] weights, int threads, CancellationToken cancel) => SelectedInverse.Of(this, weights, threads, cancel);

    /// <inheritdoc/>
    public void Dispose() => values.Dispose();
}

/// <summary>n - 1 rows of 8 or 16 doubles in the factor's numbering.</summary>
internal sealed unsafe class SubstitutionWorkspace : IDisposable
{
    private readonly NativeDoubles rows;
    private readonly int columns;

    internal SubstitutionWorkspace(int places, int columns)
    {
        if (columns is not (8 or 16))
            throw new ArgumentOutOfRangeException(nameof(columns), columns, "A panel has 8 doubles or 16 floats a node.");
        this.columns = columns;
        rows = new NativeDoubles((long)places * columns);
    }

    internal double* Rows => rows.Pointer;

    internal void Check(int panel)
    {
        if (panel != columns)
            throw new ArgumentException($"The workspace is for panels of {columns} columns, not {panel}.");
    }

    /// <inheritdoc/>
    public void Dispose() => rows.Dispose();
}
