// The numeric part of the multifrontal method (Duff & Reid 1983) in conductances. A front of own places J and rows N, the ground among them,
// starts as the links of J and what the children pass on. Panels K of eight places are eliminated one after the other:
//     G = inverse of the grounded Laplacian of K (everything outside K is ground)      W = A_NK G, the harmonic measure of N seen from K
//     A_NN += W A_NK'                                                                   the star-mesh law for all of K at once
// Panels of one front are left-looking: a panel takes up what earlier ones give it when its turn comes, N once at the end.
// Invariant: conductances and shares are sums of products of non-negative numbers; diagonals are never formed, so nothing cancels.

using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Solving;

/// <summary>One thread's pass over fronts in post-order.</summary>
internal sealed unsafe class FrontalElimination : IDisposable
{
    private const int Panel = DenseKernels.Tile;
    private const int Block = 64; // columns that take up earlier panels at once
    private readonly SymbolicCholesky symbolic;
    private readonly Laplacian laplacian;
    private readonly double* values;
    private readonly nint[] updates;
    private readonly double[] logs;
    private readonly FrontTeam team;
    private readonly FrontStacks stacks;
    private readonly NativeDoubles own, shares;
    private readonly int[] local;

    /// <param name="symbolic">The structure.</param>
    /// <param name="laplacian">L.</param>
    /// <param name="values">Where the factor goes.</param>
    /// <param name="updates">Addresses of updates by front: those held are set beforehand, the others here.</param>
    /// <param name="logs">Where the logarithms of the pivots' products go, by front.</param>
    /// <param name="space">Of the fronts to come.</param>
    /// <param name="team">Who shares the products of large fronts.</param>
    public FrontalElimination(
        SymbolicCholesky symbolic, Laplacian laplacian, double* values, nint[] updates, double[] logs, FrontSpace space, FrontTeam team)
    {
        this.symbolic = symbolic;
        this.laplacian = laplacian;
        this.values = values;
        this.updates = updates;
        this.logs = logs;
        this.team = team;
        stacks = new FrontStacks(space);
        own = new NativeDoubles(space.Own);
        shares = new NativeDoubles(space.Own);
        local = new int[laplacian.NodeCount];
    }

    /// <summary>Eliminates one front; its children come before it.</summary>
    public void Eliminate(int front)
    {
        int s = symbolic.Own(front), r = symbolic.RowCount(front);
        long stride = FrontSize.OwnStride(s, r), updateStride = FrontSize.UpdateStride(r);
        double* a = own.Pointer + FrontSize.Shift(s);
        double* update = (double*)updates[front];
        if (update == null)
            updates[front] = (nint)(update = stacks.Push(symbolic.Odd[front], FrontSize.Update(r)));
        new Span<double>(own.Pointer, checked((int)((stride * s) + 8))).Clear();
        for (int j = 0; j < r; j++)
        {
            int from = j & ~7;
            new Span<double>(update + (j * updateStride) + from, (int)updateStride - from).Clear();
        }
        AddLinks(front, s, r, a, stride);
        for (int child = symbolic.FirstChild[front]; child >= 0; child = symbolic.Sibling[child])
            AddUpdate(child, s, r, a, stride, update - s, updateStride);
        for (int child = symbolic.FirstChild[front]; child >= 0; child = symbolic.Sibling[child])
        {
            if (!symbolic.Schedule.IsHeld(child))
                stacks.Pop(symbolic.Odd[child], FrontSize.Update(symbolic.RowCount(child)));
        }
        double* w = shares.Pointer + FrontSize.Shift(s);
        logs[front] = EliminateOwn(front, s, s + r, a, w, stride);
        if (r > 0)
            team.MultiplyAdd(r + 1, r, s, w + s, stride, a + s, stride, update, updateStride, lower: true);
    }

    private void AddLinks(int front, int s, int r, double* a, long stride)
    {
        int first = symbolic.First[front], end = first + s, ground = symbolic.Nodes.Length - 1;
        fixed (int* rows = symbolic.Rows)
        {
            for (int i = 0; i < r; i++)
                local[rows[symbolic.RowStart[front] + i]] = s + i;
        }
        local[ground] = s + r;
        for (int place = first; place < end; place++)
        {
            int node = symbolic.Nodes[place];
            double* column = a + ((place - first) * stride);
            for (long arc = laplacian.RowStart[node]; arc < laplacian.RowStart[node + 1]; arc++)
            {
                int row = symbolic.Places[laplacian.Neighbours[arc]];
                if (row > place)
                    column[row < end ? row - first : local[row]] += laplacian.Conductance(arc);
            }
        }
    }

    // The child's columns fall into own columns of the front while their row is one, then into the update.
    private void AddUpdate(int child, int s, int r, double* a, long stride, double* later, long laterStride)
    {
        int count = symbolic.RowCount(child);
        long childStride = FrontSize.UpdateStride(count);
        double* from = (double*)updates[child];
        fixed (int* relative = &symbolic.Relative.AsSpan((int)symbolic.RowStart[child], count).GetPinnableReference())
        {
            for (int j = 0; j < count; j++)
            {
                int at = relative[j];
                double* to = at < s ? a + (at * stride) : later + ((at - s) * laterStride);
                FrontKernels.AddRuns(from, to, relative, j + 1, count);
                to[s + r] += from[count];
                from += childStride;
            }
        }
    }

    private double EliminateOwn(int front, int s, int ground, double* a, double* w, long stride)
    {
        double* g = stackalloc double[Panel * Panel];
        double* outside = stackalloc double[Panel], pivots = stackalloc double[Panel];
        double* to = values + symbolic.ValueStart[front];
        double log = 0;
        for (int j = 0; j < s; j += Panel)
        {
            int q = Math.Min(Panel, s - j), block = j / Block * Block;
            double* column = a + (j * stride);
            if (j == block && j > 0)
            {
                int columns = Math.Min(Block, s - j);
                team.MultiplyAdd(ground + 1 - j, columns, j, w + j, stride, a + j, stride, column + j, stride, lower: true);
            }
            else if (j > block)
            {
                long done = block * stride;
                DenseKernels.MultiplyAdd(
                    ground + 1 - j, q, j - block, w + done + j, stride, a + done + j, stride, column + j, stride);
            }
            int later = ground - j - q;
            FrontKernels.ColumnSums(later + 1, q, column + j + q, stride, outside);
            Symmetric(q, column + j, stride, g);
            int bad = FrontKernels.Invert(q, g, outside, pivots);
            if (bad >= 0)
                throw Refuse(front, j + bad, pivots[bad]);
            for (int i = 0; i < q; i++)
            {
                log += Math.Log(pivots[i]);
                for (int k = 0; k < q; k++)
                    *to++ = g[(Panel * i) + k];
            }
            FrontKernels.Shares(later, q, column + j + q, stride, g, to);
            to += (long)later * q;
            if (later > 0)
            {
                double* share = w + (j * stride) + j + q;
                for (int k = 0; k < q; k++)
                    new Span<double>(share + (k * stride), (later + 8) & ~7).Clear();
                DenseKernels.MultiplyAdd(later + 1, q, q, column + j + q, stride, g, Panel, share, stride);
            }
        }
        return log;
    }

    private static void Symmetric(int q, double* lower, long stride, double* g)
    {
        new Span<double>(g, Panel * Panel).Clear();
        for (int k = 0; k < q; k++)
        {
            for (int i = k + 1; i < q; i++)
                g[(Panel * i) + k] = g[(Panel * k) + i] = lower[i + (k * stride)];
        }
    }

    private SolveException Refuse(int front, int column, double pivot) => new(
        $"the factor's pivot of node {symbolic.Nodes[symbolic.First[front] + column]} (internal number) is {pivot}: conductances must be "
        + "positive numbers whose sums neither overflow nor vanish");

    /// <inheritdoc/>
    public void Dispose()
    {
        stacks.Dispose();
        own.Dispose();
        shares.Dispose();
    }
}
