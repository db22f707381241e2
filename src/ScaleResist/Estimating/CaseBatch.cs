// Cases worked off together: the columns that they need are packed 16 a panel and solved; then each case has its sums (CaseSums).
// Invariant: the numbers of a case depend on how its batch is packed, never on threads. Right-hand sides are 0 between panels.

using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Estimating;

/// <summary>Works off batches of cases; for one thread at a time.</summary>
internal sealed class CaseBatch : IDisposable
{
    private readonly Potentials potentials;
    private readonly Network network;
    private readonly WeightedTotals[] totals;
    private readonly BasePairs pairs;
    private readonly int[] componentOf;
    private readonly Splits splits;
    private readonly IDisposable workspace;
    private readonly PanelPair b;
    private readonly List<PanelPair> x = [];
    private readonly CaseMask mask;
    private readonly CaseSums sums;

    /// <summary>Prepares.</summary>
    /// <param name="potentials">Of the network.</param>
    /// <param name="totals">By number of nodes, and by node weight where there is one.</param>
    /// <param name="pairs">Pairs whose resistance is wanted.</param>
    /// <param name="componentOf">The component of every node.</param>
    /// <param name="quantile">Half width of intervals, in standard errors.</param>
    public CaseBatch(Potentials potentials, WeightedTotals[] totals, BasePairs pairs, int[] componentOf, double quantile)
    {
        (this.potentials, this.totals, this.pairs, this.componentOf) = (potentials, totals, pairs, componentOf);
        network = potentials.Network;
        splits = new Splits(network, componentOf);
        workspace = potentials.NewWorkspace();
        b = new PanelPair(network.NodeCount);
        mask = new CaseMask(network);
        sums = new CaseSums(potentials, totals, pairs, mask, quantile);
    }

    /// <summary>Bytes of a batch of so many columns.</summary>
    public static long Bytes(Network network, int columns) =>
        network.NodeCount * ((((columns + PanelPair.Width - 1) / PanelPair.Width) + 1) * 128L + 24);

    /// <summary>Works off some cases together.</summary>
    public CaseImpact[] Run(IReadOnlyList<PlannedCase> cases, CancellationToken cancel)
    {
        List<CaseColumn> columns = [];
        CaseWork[] works = new CaseWork[cases.Count];
        for (int i = 0; i < works.Length; i++)
            works[i] = new CaseWork(cases[i], splits.Of(cases[i], pairs.Ends), componentOf, totals.Length, columns);
        for (int first = 0; first < columns.Count; first += PanelPair.Width)
        {
            if (x.Count * PanelPair.Width <= first)
                x.Add(new PanelPair(network.NodeCount));
            Solve(columns.GetRange(first, Math.Min(PanelPair.Width, columns.Count - first)), x[first / PanelPair.Width], cancel);
        }
        return Array.ConvertAll(works, work => sums.Of(work, columns.GetRange(work.First, work.Steps.Length), x));
    }

    /// <inheritdoc/>
    public void Dispose()
    {
        workspace.Dispose();
        b.Dispose();
        foreach (PanelPair panel in x)
            panel.Dispose();
    }

    private void Solve(List<CaseColumn> columns, PanelPair solved, CancellationToken cancel)
    {
        SortedSet<int> components = [], dense = [];
        List<int> sparse = [];
        for (int j = 0; j < columns.Count; j++)
        {
            CaseColumn column = columns[j];
            CaseParts parts = column.Case.Parts;
            components.UnionWith(parts.Area);
            if (column.IsLink)
            {
                (int u, int v) = (column.Link.U, column.Link.V);
                b.At(u, j) += 1;
                b.At(v, j) -= 1;
                sparse.AddRange([u, v]);
                if (componentOf[u] != componentOf[v])
                    dense.UnionWith([componentOf[u], componentOf[v]]);
            }
            for (int place = 0; place < parts.Area.Length && column.Weighting >= 0; place++)
            {
                if (!CaseMask.IsPartial(network, parts, place))
                    continue;
                ReadOnlySpan<double> held = mask.Of(parts, place, totals[column.Weighting]);
                Component range = network.Components[parts.Area[place]];
                for (int u = range.Start; u < range.End; u++)
                    b.At(u, j) = held[u - range.Start];
                dense.Add(parts.Area[place]);
            }
        }
        foreach (int c in dense)
        {
            PanelKernels.Centre(b.First, network.Components[c].Start, network.Components[c].End);
            PanelKernels.Centre(b.Second, network.Components[c].Start, network.Components[c].End);
        }
        potentials.Solve(b, solved, columns.Count, components, workspace, cancel);
        foreach (int c in dense)
            b.Clear(network.Components[c].Start, network.Components[c].End);
        foreach (int u in sparse)
            b.Clear(u, u + 1);
        for (int j = 0; j < columns.Count; j++)
            AddConstants(columns[j], solved, j);
    }

    private void AddConstants(in CaseColumn column, PanelPair solved, int j)
    {
        int[] area = column.Case.Parts.Area;
        for (int place = 1; place < area.Length; place++)
        {
            double constant = column.SumOver(place) * column.Case.Join;
            for (int u = network.Components[area[place]].Start; u < network.Components[area[place]].End && constant != 0; u++)
                solved.At(u, j) += constant;
        }
    }
}

/// <summary>Weights on the part that counts, 0 elsewhere; for one thread at a time.</summary>
internal sealed class CaseMask(Network network)
{
    private readonly double[] values = new double[network.NodeCount];

    /// <summary>All of them; only rows of the component that <see cref="Of"/> was last asked for hold.</summary>
    public double[] Values => values;

    /// <summary>Whether the part that counts holds some nodes of a component of the area, and not all.</summary>
    public static bool IsPartial(Network network, CaseParts parts, int place) =>
        parts.Held[place] > 0 && parts.Held[place] < network.Components[parts.Area[place]].Nodes;

    /// <summary>Over one component of the area, which the part holds in part.</summary>
    public ReadOnlySpan<double> Of(CaseParts parts, int place, WeightedTotals kind)
    {
        Component range = network.Components[parts.Area[place]];
        Span<double> over = values.AsSpan(range.Start, range.Nodes);
        if (parts.ListedAreIn)
            over.Clear();
        else if (kind.Weights is null)
            over.Fill(1);
        else
            kind.Weights.AsSpan(range.Start, range.Nodes).CopyTo(over);
        foreach (int u in parts.Listed)
        {
            if (u >= range.Start && u < range.End)
                over[u - range.Start] = parts.ListedAreIn ? kind.Of(u) : 0;
        }
        return over;
    }
}
