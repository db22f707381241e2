// The derivative of the factor of L + t diag(w) at t = 0, front by front, children first: t w_u is a conductance from u to the ground.
// Of a front let E be the derivative of its Schur complement, w on the diagonal plus what the children pass on. With G and W of the factor,
//     T = E_NK + W E_KK        -dW/dt = P = T G        -dG/dt = V = G E_KK G        E_NN += T W' + W E_KN = U W' + W U',  U = (E_NK + T)/2
// Invariant: w, W, G and therefore E, P and V are not negative: sums and products alone, so nothing cancels here either.

using ScaleResist.Kernels;

namespace ScaleResist.Solving;

/// <summary>-dG/dt and -dW/dt of every panel, laid out as the factor's values.</summary>
internal sealed unsafe class FactorSlope : IDisposable
{
    private readonly NativeDoubles values;

    private FactorSlope(NativeDoubles values) => this.values = values;

    internal double* Values => values.Pointer;

    /// <summary>One pass over all fronts, about twice the work of the factorisation. The same bits whatever the number of threads.</summary>
    /// <param name="factor">The factor.</param>
    /// <param name="weights">w by node of its Laplacian, not negative; the ground's is not read.</param>
    /// <param name="threads">Threads.</param>
    /// <param name="cancel">Ends the work.</param>
    public static FactorSlope Of(CholeskyFactor factor, double[] weights, int threads, CancellationToken cancel)
    {
        SymbolicCholesky symbolic = factor.Symbolic;
        FrontSchedule schedule = symbolic.Schedule;
        NativeDoubles values = new(symbolic.StoredEntries + DenseKernels.Tile); // vectors read past the last
        try
        {
            nint[] updates = new nint[symbolic.Count];
            using NativeDoubles held = new(schedule.HeldUpdates);
            double* next = held.Pointer;
            foreach (int f in schedule.Held)
            {
                updates[f] = (nint)next;
                next += FrontSize.Update(symbolic.RowCount(f));
            }
            long widest = Enumerable.Range(0, symbolic.Count).Max(f => FrontSize.OwnStride(symbolic.Own(f), symbolic.RowCount(f)));
            FrontTeam alone = new(1);
            FrontTeam.WorkOff(
                schedule.Subtrees, threads,
                () => new FrontalSlope(factor, weights, values.Pointer, updates, schedule.EliminationOfRuns, widest, alone),
                (worker, run) =>
                {
                    for (int f = run.Start; f < run.End; f++)
                        worker.Eliminate(f);
                },
                cancel);
            using FrontalSlope above = new(
                factor, weights, values.Pointer, updates, schedule.EliminationOfTop, widest, new FrontTeam(threads));
            foreach (int f in schedule.Top)
            {
                cancel.ThrowIfCancellationRequested();
                above.Eliminate(f);
            }
            new Span<double>(values.Pointer + symbolic.StoredEntries, DenseKernels.Tile).Clear();
            return new FactorSlope(values);
        }
        catch
        {
            values.Dispose();
            throw;
        }
    }

    /// <inheritdoc/>
    public void Dispose() => values.Dispose();
}

/// <summary>One thread's pass over fronts in post-order; the twin of <see cref="FrontalElimination"/>, left-looking like it.</summary>
internal sealed unsafe class FrontalSlope : IDisposable
{
    private const int Panel = DenseKernels.Tile;
    private const int Block = 64; // columns that take up earlier panels at once
    private readonly SymbolicCholesky symbolic;
    private readonly double* values;
    private readonly double* slopes;
    private readonly double[] weights;
    private readonly nint[] updates;
    private readonly FrontTeam team;
    private readonly FrontStacks stacks;
    private readonly NativeDoubles own, shares, product;

    /// <param name="factor">The factor; it stays as it is.</param>
    /// <param name="weights">w by node.</param>
    /// <param name="slopes">Where V and P go.</param>
    /// <param name="updates">Addresses of updates by front: those held are set beforehand, the others here.</param>
    /// <param name="space">Of the fronts to come.</param>
    /// <param name="widest">The largest leading dimension of a front.</param>
    /// <param name="team">Who shares the products of large fronts.</param>
    public FrontalSlope(
        CholeskyFactor factor, double[] weights, double* slopes, nint[] updates, FrontSpace space, long widest, FrontTeam team)
    {
        symbolic = factor.Symbolic;
        values = factor.Values;
        this.slopes = slopes;
        this.weights = weights;
        this.updates = updates;
        this.team = team;
        stacks = new FrontStacks(space);
        own = new NativeDoubles(space.Own);
        shares = new NativeDoubles(space.Own);
        product = new NativeDoubles((Panel * widest) + Panel);
    }

    /// <summary>Takes one front; its children come before it.</summary>
    public void Eliminate(int front)
    {
        int s = symbolic.Own(front), r = symbolic.RowCount(front);
        long stride = FrontSize.OwnStride(s, r), updateStride = FrontSize.UpdateStride(r);
        double* e = own.Pointer, w = shares.Pointer, update = (double*)updates[front];
        if (update == null)
            updates[front] = (nint)(update = stacks.Push(symbolic.Odd[front], FrontSize.Update(r)));
        new Span<double>(e, checked((int)((stride * s) + 8))).Clear();
        for (int j = 0; j < r; j++)
        {
            int from = j & ~7;
            new Span<double>(update + (j * updateStride) + from, (int)updateStride - from).Clear();
        }
        for (int j = 0; j < s; j++)
            e[j * (stride + 1)] = weights[symbolic.Nodes[symbolic.First[front] + j]];
        for (int child = symbolic.FirstChild[front]; child >= 0; child = symbolic.Sibling[child])
            AddUpdate(child, s, e, stride, update - s, updateStride);
        for (int child = symbolic.FirstChild[front]; child >= 0; child = symbolic.Sibling[child])
        {
            if (!symbolic.Schedule.IsHeld(child))
                stacks.Pop(symbolic.Odd[child], FrontSize.Update(symbolic.RowCount(child)));
        }
        TakeOwn(front, s, s + r, e, w, stride);
        if (r > 0)
        {
            team.MultiplyAdd(r, r, s, w + s, stride, e + s, stride, update, updateStride, lower: true);
            team.MultiplyAdd(r, r, s, e + s, stride, w + s, stride, update, updateStride, lower: true);
        }
    }

    private void AddUpdate(int child, int s, double* e, long stride, double* later, long laterStride)
    {
        int count = symbolic.RowCount(child);
        long childStride = FrontSize.UpdateStride(count);
        double* from = (double*)updates[child];
        fixed (int* relative = &symbolic.Relative.AsSpan((int)symbolic.RowStart[child], count).GetPinnableReference())
        {
            for (int j = 0; j < count; j++)
            {
                int at = relative[j];
                double* to = at < s ? e + (at * stride) : later + ((at - s) * laterStride);
                FrontKernels.AddRuns(from, to, relative, j, count);
                from += childStride;
            }
        }
    }

    // Columns of E below a panel give way to U, columns of w hold W, once the panel has had its turn.
    private void TakeOwn(int front, int s, int size, double* e, double* w, long stride)
    {
        double* g = stackalloc double[Panel * Panel], square = stackalloc double[Panel * Panel], t = product.Pointer;
        long at = symbolic.ValueStart[front];
        for (int j = 0; j < s; j += Panel)
        {
            int q = Math.Min(Panel, s - j), block = j / Block * Block, later = size - j - q;
            double* column = e + (j * stride), share = w + (j * stride) + j + q;
            if (j == block && j > 0)
            {
                int columns = Math.Min(Block, s - j);
                team.MultiplyAdd(size - j, columns, j, w + j, stride, e + j, stride, column + j, stride, lower: true);
                team.MultiplyAdd(size - j, columns, j, e + j, stride, w + j, stride, column + j, stride, lower: true);
            }
            else if (j > block)
            {
                long done = block * stride;
                DenseKernels.MultiplyAdd(size - j, q, j - block, w + done + j, stride, e + done + j, stride, column + j, stride);
                DenseKernels.MultiplyAdd(size - j, q, j - block, e + done + j, stride, w + done + j, stride, column + j, stride);
            }
            Spread(q, values + at, column + j, stride, g, square);
            SlopeOfInverse(q, g, square, slopes + at);
            at += q * q;
            for (int i = 0; i < later; i++)
            {
                for (int k = 0; k < q; k++)
                    share[i + (k * stride)] = values[at + (i * (long)q) + k];
            }
            double* below = column + j + q;
            for (int k = 0; k < q; k++)
                new Span<double>(below + (k * stride), later).CopyTo(new Span<double>(t + (k * stride), later));
            DenseKernels.MultiplyAdd(later, q, q, share, stride, square, Panel, t, stride);
            FrontKernels.Shares(later, q, t, stride, g, slopes + at);
            for (int k = 0; k < q; k++)
            {
                for (int i = 0; i < later; i++)
                    below[i + (k * stride)] = 0.5 * (below[i + (k * stride)] + t[i + (k * stride)]);
            }
            at += later * (long)q;
        }
    }

    // G and the symmetric E_KK, in rows of eight.
    private static void Spread(int q, double* inverse, double* lower, long stride, double* g, double* square)
    {
        new Span<double>(g, Panel * Panel).Clear();
        new Span<double>(square, Panel * Panel).Clear();
        for (int k = 0; k < q; k++)
        {
            for (int i = 0; i < q; i++)
            {
                g[(Panel * i) + k] = inverse[(i * q) + k];
                square[(Panel * i) + k] = lower[Math.Max(i, k) + (Math.Min(i, k) * stride)];
            }
        }
    }

    // V = G E G by rows, without gaps.
    private static void SlopeOfInverse(int q, double* g, double* square, double* v)
    {
        double* half = stackalloc double[Panel * Panel];
        for (int i = 0; i < q; i++)
        {
            for (int k = 0; k < q; k++)
            {
                double sum = 0;
                for (int l = 0; l < q; l++)
                    sum += g[(Panel * i) + l] * square[(Panel * l) + k];
                half[(Panel * i) + k] = sum;
            }
        }
        for (int i = 0; i < q; i++)
        {
            for (int k = 0; k < q; k++)
            {
                double sum = 0;
                for (int l = 0; l < q; l++)
                    sum += half[(Panel * i) + l] * g[(Panel * l) + k];
                v[(i * q) + k] = sum;
            }
        }
    }

    /// <inheritdoc/>
    public void Dispose()
    {
        stacks.Dispose();
        own.Dispose();
        shares.Dispose();
        product.Dispose();
    }
}
