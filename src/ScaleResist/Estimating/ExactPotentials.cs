// Columns of L+ from one factor of the whole network. Every component is grounded at its first node, and these nodes are one row, the ground:
// M is the inverse of what is left, and L+ = P M P on each component, P = I - 11'/n.
// Invariant: rows of a component but its first follow each other as its nodes do; a connected network needs no other numbering than its own.

using ScaleResist.Graphs;
using ScaleResist.Kernels;
using ScaleResist.Solving;

namespace ScaleResist.Estimating;

/// <summary>Exact columns; safe from several threads, each with a workspace.</summary>
internal sealed unsafe class ExactPotentials : Potentials
{
    private readonly CholeskyFactor factor;
    private readonly bool inPlace; // rows are nodes

    private ExactPotentials(Network network, CholeskyFactor factor, double[] diagonal)
        : base(network)
    {
        this.factor = factor;
        inPlace = network.Components.Count == 1;
        Diagonal = diagonal;
    }

    /// <inheritdoc/>
    public override ResistanceMethod Method => ResistanceMethod.Exact;

    /// <summary>Bytes that the workspace of one thread takes.</summary>
    public static long BytesPerThread(Network network) => network.NodeCount * (network.Components.Count == 1 ? 64L : 128L);

    /// <summary>The row of a component's node: 0, the ground's, for the first node of each.</summary>
    private static int RowOf(Network network, int component, int node) =>
        node == network.Components[component].Start ? 0 : node - component;

    /// <summary>The Laplacian with all first nodes as row 0.</summary>
    public static Laplacian Ground(Network network)
    {
        if (network.Components.Count == 1)
            return network.Laplacian;
        int rows = network.NodeCount - network.Components.Count + 1;
        long[] start = new long[rows + 1];
        int[] neighbours = new int[network.Neighbours.Length];
        double[]? conductances = network.Conductances is null ? null : new double[neighbours.Length];
        double[] strengths = new double[rows];
        long next = 0;
        for (int c = 0; c < network.Components.Count; c++)
        {
            int root = network.Components[c].Start;
            for (long k = network.RowStart[root]; k < network.RowStart[root + 1]; k++)
                Put(0, c, k);
        }
        start[1] = next;
        for (int c = 0; c < network.Components.Count; c++)
        {
            for (int u = network.Components[c].Start + 1; u < network.Components[c].End; u++)
            {
                int row = RowOf(network, c, u);
                for (long k = network.RowStart[u]; k < network.RowStart[u + 1]; k++)
                    Put(row, c, k);
                start[row + 1] = next;
            }
        }
        return new Laplacian(start, neighbours, conductances, strengths);

        void Put(int row, int component, long arc)
        {
            strengths[row] += network.Conductance(arc);
            if (conductances is not null)
                conductances[next] = network.Conductance(arc);
            neighbours[next++] = RowOf(network, component, network.Neighbours[arc]);
        }
    }

    /// <summary>Factorises, and finds the diagonal: l_u = M_uu - 2 (M1)_u / n + 1'M1 / n^2.</summary>
    /// <param name="network">The network.</param>
    /// <param name="symbolic">The analysis of <see cref="Ground"/>, its row 0 last.</param>
    /// <param name="laplacian">That Laplacian.</param>
    /// <param name="threads">Threads; results do not depend on them.</param>
    /// <param name="cancel">Ends the work.</param>
    public static ExactPotentials Of(
        Network network, SymbolicCholesky symbolic, Laplacian laplacian, int threads, CancellationToken cancel)
    {
        CholeskyFactor factor = CholeskyFactor.Of(symbolic, laplacian, threads, cancel);
        try
        {
            SelectedInverse inverse = factor.Invert(threads, cancel);
            double[] diagonal = new double[network.NodeCount];
            using Panel<double> sums = new(laplacian.NodeCount);
            for (int row = 0; row < sums.Rows; row++)
                sums.Row(row)[0] = 1;
            using (SubstitutionWorkspace workspace = factor.NewWorkspace(Panel<double>.Width))
                factor.Solve(sums, sums, workspace);
            for (int c = 0; c < network.Components.Count; c++)
            {
                Component component = network.Components[c];
                double total = 0, n = component.Nodes;
                for (int u = component.Start + 1; u < component.End; u++)
                    total += sums.Row(RowOf(network, c, u))[0];
                for (int u = component.Start; u < component.End; u++)
                {
                    int row = RowOf(network, c, u);
                    diagonal[u] = row == 0 ? total / n / n : inverse.Diagonal(row) - (2 * sums.Row(row)[0] / n) + (total / n / n);
                }
            }
            return new ExactPotentials(network, factor, diagonal);
        }
        catch
        {
            factor.Dispose();
            throw;
        }
    }

    /// <inheritdoc/>
    public override IDisposable NewWorkspace() => new Workspace(factor, inPlace);

    /// <inheritdoc/>
    public override void Dispose() => factor.Dispose();

    protected override void SolveColumns(
        PanelPair b, PanelPair x, int used, IReadOnlyCollection<int> components, IDisposable workspace, CancellationToken cancel)
    {
        Workspace own = (Workspace)workspace;
        for (int half = 0; half * PanelPair.Half < used; half++)
        {
            cancel.ThrowIfCancellationRequested();
            if (inPlace)
            {
                factor.Solve(b[half], x[half], own.Substitution);
            }
            else
            {
                own.Rows!.Clear();
                foreach (int c in components)
                    Move(c, b[half], own.Rows.Panel, toRows: true);
                factor.Solve(own.Rows.Panel, own.Rows.Panel, own.Substitution);
                foreach (int c in components)
                    Move(c, x[half], own.Rows.Panel, toRows: false);
            }
            foreach (int c in components)
                PanelKernels.Centre(x[half], Network.Components[c].Start, Network.Components[c].End);
        }
    }

    private void Move(int component, Panel<double> nodes, Panel<double> rows, bool toRows)
    {
        Component range = Network.Components[component];
        long bytes = (range.Nodes - 1) * 64L;
        double* ofNodes = nodes.Pointer + ((range.Start + 1L) * PanelPair.Half);
        double* ofRows = rows.Pointer + ((range.Start + 1L - component) * PanelPair.Half);
        if (!toRows)
            nodes.Row(range.Start).Clear();
        Buffer.MemoryCopy(toRows ? ofNodes : ofRows, toRows ? ofRows : ofNodes, bytes, bytes);
    }

    private sealed class Workspace(CholeskyFactor factor, bool inPlace) : IDisposable
    {
        public SubstitutionWorkspace Substitution { get; } = factor.NewWorkspace(Panel<double>.Width);

        public RowPanel? Rows { get; } = inPlace ? null : new RowPanel(factor.Laplacian.NodeCount);

        public void Dispose()
        {
            Substitution.Dispose();
            Rows?.Dispose();
        }
    }

    private sealed class RowPanel(int rows) : IDisposable
    {
        public Panel<double> Panel { get; } = new(rows);

        public void Clear() => System.Runtime.InteropServices.NativeMemory.Clear(Panel.Pointer, (nuint)Panel.Rows * 64);

        public void Dispose() => Panel.Dispose();
    }
}
