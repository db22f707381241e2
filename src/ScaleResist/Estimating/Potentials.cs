// Columns of L+ b of a whole network, from a factor or from the solver, and what sums over pairs need beside them.
//
// For node weights w on a component, W their sum, l the diagonal of L+:
//     Kf_w = sum over pairs of w_u w_v R(u,v) = W A - B,     A = sum w_u l_u,     B = w' L+ w
// Invariant: every column that comes out is centred on each component it was asked for; results do not depend on threads.

using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Estimating;

/// <summary>Solves with L, 16 columns at a time.</summary>
internal abstract class Potentials(Network network) : IDisposable
{
    /// <summary>The network.</summary>
    public Network Network { get; } = network;

    /// <summary>How its columns are found.</summary>
    public abstract ResistanceMethod Method { get; }

    /// <summary>Right-hand sides solved so far.</summary>
    public long Columns => columns;

    /// <summary>The diagonal l of L+, n.</summary>
    public double[] Diagonal { get; protected init; } = [];

    /// <summary>Its standard errors, n; null where it is exact.</summary>
    public double[]? DiagonalErrors { get; protected init; }

    private long columns;

    /// <summary>Room for the solves of one thread.</summary>
    public abstract IDisposable NewWorkspace();

    /// <summary>
    /// x = L+ b on the components named, which must hold all that is not 0 in b. Each column of b sums to zero over each of them; x is centred
    /// there. Other rows of x are not defined. b stays as it is.
    /// </summary>
    public void Solve(PanelPair b, PanelPair x, int used, IReadOnlyCollection<int> components, IDisposable workspace, CancellationToken cancel)
    {
        Interlocked.Add(ref columns, used);
        SolveColumns(b, x, used, components, workspace, cancel);
    }

    /// <inheritdoc/>
    public abstract void Dispose();

    protected abstract void SolveColumns(
        PanelPair b, PanelPair x, int used, IReadOnlyCollection<int> components, IDisposable workspace, CancellationToken cancel);
}

/// <summary>Sums over pairs of every component under one weighting of the nodes.</summary>
internal sealed class WeightedTotals
{
    private WeightedTotals(double[]? weights, int components)
    {
        Weights = weights;
        (Weight, Diagonal, Form) = (new double[components], new double[components], new double[components]);
        Index = new Estimate[components];
    }

    /// <summary>w by node; null: 1 each.</summary>
    public double[]? Weights { get; }

    /// <summary>W by component.</summary>
    public double[] Weight { get; }

    /// <summary>A = sum w_u l_u by component.</summary>
    public double[] Diagonal { get; }

    /// <summary>B = w' L+ w by component.</summary>
    public double[] Form { get; }

    /// <summary>Kf_w by component.</summary>
    public Estimate[] Index { get; }

    /// <summary>w of a node.</summary>
    public double Of(int node) => Weights is null ? 1 : Weights[node];

    /// <summary>Sums up; where the index is known better than by the diagonal, A follows from it.</summary>
    /// <param name="potentials">Of the network.</param>
    /// <param name="weights">w; null: 1 each.</param>
    /// <param name="index">Kf_w by component where probes found it; null: W A - B.</param>
    /// <param name="cancel">Ends the solve.</param>
    public static WeightedTotals Of(Potentials potentials, double[]? weights, Func<int, Estimate>? index, CancellationToken cancel)
    {
        Network network = potentials.Network;
        WeightedTotals totals = new(weights, network.Components.Count);
        for (int c = 0; c < network.Components.Count; c++)
        {
            for (int u = network.Components[c].Start; u < network.Components[c].End; u++)
            {
                totals.Weight[c] += totals.Of(u);
                totals.Diagonal[c] += totals.Of(u) * potentials.Diagonal[u];
            }
        }
        if (weights is not null)
            totals.AddForms(potentials, cancel);
        for (int c = 0; c < network.Components.Count; c++)
        {
            if (index is null)
            {
                totals.Index[c] = Estimate.Exact(network.Components[c].Nodes == 1 ? 0 : (totals.Weight[c] * totals.Diagonal[c]) - totals.Form[c]);
                continue;
            }
            totals.Index[c] = index(c);
            if (totals.Weight[c] > 0)
                totals.Diagonal[c] = (totals.Index[c].Value + totals.Form[c]) / totals.Weight[c];
        }
        return totals;
    }

    private void AddForms(Potentials potentials, CancellationToken cancel)
    {
        Network network = potentials.Network;
        int[] several = [.. Enumerable.Range(0, network.Components.Count).Where(c => network.Components[c].Nodes > 1)];
        using PanelPair b = new(network.NodeCount), x = new(network.NodeCount);
        foreach (int c in several)
        {
            (int start, int end) = (network.Components[c].Start, network.Components[c].End);
            for (int u = start; u < end; u++)
                b.At(u, 0) = Weights![u];
            PanelKernels.Centre(b.First, start, end);
        }
        using (IDisposable workspace = potentials.NewWorkspace())
            potentials.Solve(b, x, 1, several, workspace, cancel);
        foreach (int c in several)
        {
            for (int u = network.Components[c].Start; u < network.Components[c].End; u++)
                Form[c] += Weights![u] * x.At(u, 0);
        }
    }
}
