// The two quadratic forms that the weighted indices need beside the traces: d'L+d and w'L+w, solved, not sampled.
//
// Sum over unordered pairs of w_u w_v R(u,v) = W sum w_u l_u - w'L+w, W = sum w. With w = d this is the degree-Kirchhoff index,
// which is 2 m_c times Kemeny's constant, m_c the total conductance (Chen & Zhang 2007).

using ScaleResist.Graphs;
using ScaleResist.Kernels;
using ScaleResist.Solving;

namespace ScaleResist.Estimating;

/// <summary>d'L+d and w'L+w for every component.</summary>
public sealed class StrengthForms
{
    private const double Tolerance = 1e-4; // in the energy norm; the form's own error is its square

    private StrengthForms(double[] byStrength, double[] byWeight)
    {
        ByStrength = byStrength;
        ByWeight = byWeight;
    }

    /// <summary>d'L+d by component.</summary>
    public IReadOnlyList<double> ByStrength { get; }

    /// <summary>w'L+w by component; zeros without node weights.</summary>
    public IReadOnlyList<double> ByWeight { get; }

    /// <summary>Solves for both forms in one panel of doubles.</summary>
    public static StrengthForms Solve(Network network, double[]? weights, LaplacianSolver solver, CancellationToken cancel)
    {
        int columns = weights is null ? 1 : 2;
        double[][] sources = weights is null ? [network.Strengths] : [network.Strengths, weights];
        using Panel<double> b = new(network.NodeCount), z = new(network.NodeCount);
        foreach (Component component in network.Components)
        {
            for (int j = 0; j < columns; j++)
                PutCentred(sources[j], b, j, component);
        }
        using (SolverWorkspace<double> workspace = solver.NewWorkspace<double>())
            solver.Solve(b, z, columns, Tolerance, workspace, cancel);
        double[][] forms = [new double[network.Components.Count], new double[network.Components.Count]];
        for (int c = 0; c < network.Components.Count; c++)
        {
            for (int j = 0; j < columns; j++)
            {
                double sum = 0;
                for (int u = network.Components[c].Start; u < network.Components[c].End; u++)
                    sum += b.Row(u)[j] * z.Row(u)[j];
                forms[j][c] = sum;
            }
        }
        return new StrengthForms(forms[0], forms[1]);
    }

    // A constant vector is 0 once centred; what rounding leaves of it must not be taken for a right-hand side.
    private static void PutCentred(double[] source, Panel<double> b, int column, Component component)
    {
        double mean = 0, size = 0;
        for (int u = component.Start; u < component.End; u++)
            mean += source[u];
        mean /= component.Nodes;
        double rest = 0;
        for (int u = component.Start; u < component.End; u++)
            rest += source[u] - mean;
        mean += rest / component.Nodes;
        for (int u = component.Start; u < component.End; u++)
            size = Math.Max(size, Math.Abs(source[u]));
        bool constant = true;
        for (int u = component.Start; u < component.End; u++)
            constant &= Math.Abs(source[u] - mean) <= 1e-14 * size;
        for (int u = component.Start; u < component.End; u++)
            b.Row(u)[column] = constant ? 0 : source[u] - mean;
    }
}
