// x = L+ b over a component whose blocks are all exact, by their one factor: each block carries what the currents b of all that hangs off its nodes
// add up to, and potentials add up from the root.
// Invariant: columns of x sum to zero over the component, and x is 0 outside.

using ScaleResist.Graphs;
using ScaleResist.Kernels;
using ScaleResist.Solving;

namespace ScaleResist.Estimating;

/// <summary>Solves for panels of eight columns; one thread at a time.</summary>
internal sealed class ExactSolve : IDisposable
{
    private readonly ExactPart part;
    private readonly CholeskyFactor factor;
    private readonly int component;
    private readonly Panel<double> currents, potentials;
    private readonly SubstitutionWorkspace workspace;

    /// <summary>Panels for the solves.</summary>
    /// <param name="exact">Holds the component, and its factor is there.</param>
    /// <param name="component">Which.</param>
    public ExactSolve(ExactResults exact, int component)
    {
        part = exact.Part;
        factor = exact.Factor;
        this.component = component;
        currents = new Panel<double>(part.Blocks.Network.NodeCount);
        potentials = new Panel<double>(part.Ground + 1);
        workspace = factor.NewWorkspace(Panel<double>.Width);
    }

    /// <summary>x = L+ b; columns of b sum to zero over the component.</summary>
    public void Solve(Panel<double> b, Panel<double> x)
    {
        Blocks blocks = part.Blocks;
        Component of = blocks.Network.Components[component];
        (int first, int end) = blocks.OfComponent(component);
        for (int u = of.Start; u < of.End; u++)
            b.Row(u).CopyTo(currents.Row(u));
        for (int block = first; block < end; block++) // children first
        {
            Span<double> head = currents.Row(blocks.Head(block));
            foreach (int v in blocks.Members(block))
            {
                ReadOnlySpan<double> current = currents.Row(v);
                current.CopyTo(potentials.Row(part.RowOf(v)));
                for (int j = 0; j < head.Length; j++)
                    head[j] += current[j];
            }
        }
        factor.Solve(potentials, potentials, workspace);
        x.Row(of.Start).Clear(); // the root
        for (int block = end - 1; block >= first; block--)
        {
            ReadOnlySpan<double> head = x.Row(blocks.Head(block));
            foreach (int v in blocks.Members(block))
            {
                Span<double> to = x.Row(v);
                ReadOnlySpan<double> within = potentials.Row(part.RowOf(v));
                for (int j = 0; j < to.Length; j++)
                    to[j] = head[j] + within[j];
            }
        }
        PanelKernels.Centre(x, of.Start, of.End);
    }

    /// <inheritdoc/>
    public void Dispose()
    {
        currents.Dispose();
        potentials.Dispose();
        workspace.Dispose();
    }
}
