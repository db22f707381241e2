// Selected inversion (Takahashi, Fagan & Chin 1973) front by front, parents first: of a front with own places J and rows N, M_NN is part of the
// parent's front, and panels K of J, last to first, with L the places of the front after K, follow from the factor's G and W:
//     M_LK = M_LL W          M_KK = G + W' M_LK
// (supernodal forms: Lin et al., ACM TOMS 37:40, 2011). With the factor's slopes V and P (FrontalSlope), S = -dM/dt = M diag(w) M comes along:
//     S_LK = S_LL W + M_LL P          S_KK = V + W' S_LK + P' M_LK
// Invariant: M, G, W, S, V and P are not negative, so nothing cancels here either.

using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Solving;

/// <summary>One thread's pass over fronts in reverse post-order.</summary>
internal sealed unsafe class FrontalInversion : IDisposable
{
    private const int Panel = DenseKernels.Tile;
    private readonly SymbolicCholesky symbolic;
    private readonly Laplacian laplacian;
    private readonly double* values;
    private readonly double* slopes; // null: no S
    private readonly InverseEntries inverse;
    private readonly InverseEntries? slope;
    private readonly nint[] fronts; // M, and behind it S
    private readonly FrontTeam team;
    private readonly FrontStacks stacks;
    private readonly int[] local;

    /// <param name="factor">The factor; it stays as it is.</param>
    /// <param name="inverse">Where M goes.</param>
    /// <param name="factorSlope">Its slopes, or null.</param>
    /// <param name="slope">Where S goes, or null.</param>
    /// <param name="fronts">Addresses of fronts: those held are set beforehand, the others here.</param>
    /// <param name="space">Of the fronts to come.</param>
    /// <param name="team">Who shares the products of large fronts.</param>
    public FrontalInversion(
        CholeskyFactor factor, InverseEntries inverse, FactorSlope? factorSlope, InverseEntries? slope, nint[] fronts, FrontSpace space,
        FrontTeam team)
    {
        symbolic = factor.Symbolic;
        laplacian = factor.Laplacian;
        values = factor.Values;
        slopes = factorSlope is null ? null : factorSlope.Values;
        this.inverse = inverse;
        this.slope = slope;
        this.fronts = fronts;
        this.team = team;
        stacks = new FrontStacks(slope is null ? space : space.Twice());
        local = new int[laplacian.NodeCount];
    }

    /// <summary>Inverts one front; its parent comes before it.</summary>
    public void Invert(int front)
    {
        int s = symbolic.Own(front), r = symbolic.RowCount(front), parent = symbolic.Parent[front];
        bool held = symbolic.Schedule.IsHeld(front);
        if (!held)
        {
            fronts[front] = (nint)stacks.Push(symbolic.Odd[front], Doubles(s, r));
            if (parent >= 0)
            {
                Gather(front);
                if (symbolic.Schedule.FirstStacked(parent) == front && !symbolic.Schedule.IsHeld(parent))
                    Release(parent);
            }
        }
        double* z = Start(front);
        long stride = FrontSize.InverseStride(s, r);
        bool leaf = symbolic.FirstChild[front] < 0;
        double* panel = values + symbolic.ValueStart[front + 1];
        double* panelSlope = slopes + symbolic.ValueStart[front + 1];
        long behind = FrontSize.Inverse(s, r);
        for (int j = (s - 1) / Panel * Panel; j >= 0; j -= Panel)
        {
            int q = Math.Min(Panel, s - j), later = s - j - q + r;
            panel -= q * (long)(q + later);
            double* own = z + (j * (stride + 1));
            bool mirror = j > 0 || !leaf;
            InvertPanel(q, later, panel, own, stride, mirror);
            if (slope is null)
                continue;
            panelSlope -= q * (long)(q + later);
            SlopeOfPanel(q, later, panel, panelSlope, own, own + behind, stride, mirror);
        }
        Keep(front, s, r, z, stride, inverse);
        if (slope is not null)
            Keep(front, s, r, z + behind, stride, slope);
        for (int child = symbolic.FirstChild[front]; child >= 0; child = symbolic.Sibling[child])
        {
            if (symbolic.Schedule.IsHeld(child))
                Gather(child);
        }
        if (!held && symbolic.Schedule.FirstStacked(front) < 0)
            Release(front);
    }

    // z is the panel's own diagonal block; what it reaches follows.
    private void InvertPanel(int q, int later, double* panel, double* z, long stride, bool mirror)
    {
        double* w = panel + (q * q), below = z + q, inner = z + (q * (stride + 1));
        if (later > 0)
        {
            for (int k = 0; k < q; k++)
                new Span<double>(below + (k * stride), later).Clear();
            team.MultiplyAdd(later, q, later, inner, stride, w, q, below, stride);
        }
        double* own = stackalloc double[Panel * Panel];
        FrontKernels.Quadratic(later, q, w, below, stride, panel, own, Panel);
        for (int k = 0; k < q; k++)
        {
            for (int i = 0; i < q; i++)
                z[i + (k * stride)] = own[i + (k * Panel)];
        }
        if (mirror)
            Mirror(q, later, z, stride);
    }

    // As InvertPanel, for S behind M; what M holds below the panel is there already.
    private void SlopeOfPanel(int q, int later, double* panel, double* panelSlope, double* m, double* z, long stride, bool mirror)
    {
        double* w = panel + (q * q), p = panelSlope + (q * q), below = z + q;
        long inner = q * (stride + 1);
        if (later > 0)
        {
            for (int k = 0; k < q; k++)
                new Span<double>(below + (k * stride), later).Clear();
            team.MultiplyAdd(later, q, later, z + inner, stride, w, q, below, stride);
            team.MultiplyAdd(later, q, later, m + inner, stride, p, q, below, stride);
        }
        double* own = stackalloc double[Panel * Panel], cross = stackalloc double[Panel * Panel], none = stackalloc double[(Panel * Panel) + Panel];
        new Span<double>(none, (Panel * Panel) + Panel).Clear();
        FrontKernels.Quadratic(later, q, w, below, stride, panelSlope, own, Panel);
        FrontKernels.Quadratic(later, q, p, m + q, stride, none, cross, Panel);
        for (int k = 0; k < q; k++)
        {
            for (int i = 0; i < q; i++)
                z[i + (k * stride)] = own[i + (k * Panel)] + cross[i + (k * Panel)];
        }
        if (mirror)
            Mirror(q, later, z, stride);
    }

    private static void Mirror(int q, int later, double* z, long stride)
    {
        double* below = z + q, beside = z + (q * stride);
        for (int i = 0; i < later; i++)
        {
            for (int k = 0; k < q; k++)
                beside[k] = below[i + (k * stride)];
            beside += stride;
        }
    }

    private double* Start(int front) => (double*)fronts[front] + FrontSize.Shift(symbolic.Own(front));

    private void Release(int front) =>
        stacks.Pop(symbolic.Odd[front], Doubles(symbolic.Own(front), symbolic.RowCount(front)));

    private long Doubles(int s, int r) => (slope is null ? 1 : 2) * FrontSize.Inverse(s, r);

    // M_NN out of the parent's front, and S_NN.
    private void Gather(int front)
    {
        int parent = symbolic.Parent[front], s = symbolic.Own(front), r = symbolic.RowCount(front);
        long stride = FrontSize.InverseStride(s, r);
        long parentStride = FrontSize.InverseStride(symbolic.Own(parent), symbolic.RowCount(parent));
        double* from = Start(parent), to = Start(front) + (s * (stride + 1));
        fixed (int* relative = &symbolic.Relative.AsSpan((int)symbolic.RowStart[front], r).GetPinnableReference())
        {
            for (int copy = slope is null ? 1 : 2; copy > 0; copy--)
            {
                for (int j = 0; j < r; j++)
                    FrontKernels.GatherRuns(from + (relative[j] * parentStride), to + (j * stride), relative, r);
                from += FrontSize.Inverse(symbolic.Own(parent), symbolic.RowCount(parent));
                to += FrontSize.Inverse(s, r);
            }
        }
    }

    private void Keep(int front, int s, int r, double* z, long stride, InverseEntries into)
    {
        int first = symbolic.First[front], end = first + s, ground = symbolic.Nodes.Length - 1;
        for (int i = 0; i < r; i++)
            local[symbolic.Rows[symbolic.RowStart[front] + i]] = s + i;
        for (int place = first; place < end; place++)
        {
            int node = symbolic.Nodes[place];
            double* column = z + ((place - first) * stride);
            into.Diagonal[node] = column[place - first];
            for (long arc = laplacian.RowStart[node]; arc < laplacian.RowStart[node + 1]; arc++)
            {
                int row = symbolic.Places[laplacian.Neighbours[arc]];
                if (row > place && row < ground)
                    into.Between[arc] = column[row < end ? row - first : local[row]];
            }
        }
    }

    /// <inheritdoc/>
    public void Dispose() => stacks.Dispose();
}
