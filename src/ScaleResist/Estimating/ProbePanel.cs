// The central artefact of the probed route: right-hand sides b and solutions z = L+ b of 16 probes.
// Invariant: probe j of panel i is probe number 16 i + j of the run, whatever else runs, and unused lanes are 0 in b and z.

using ScaleResist.Graphs;
using ScaleResist.Kernels;
using ScaleResist.Solving;

namespace ScaleResist.Estimating;

/// <summary>Sixteen probes: b = B' C^(1/2) q with independent signs q on the links, and z = L+ b; Cov(z) = L+ (Spielman &amp; Srivastava 2008).</summary>
public sealed class ProbePanel : IDisposable
{
    /// <summary>Probes in a panel.</summary>
    public const int Width = ProbeKernels.Width;

    private readonly Network network;
    private readonly ulong seed;
    private readonly List<(int Start, int End)> chunks;

    /// <summary>Memory for a panel of the network; <see cref="Draw"/> fills it.</summary>
    public ProbePanel(Network network, ulong seed)
    {
        this.network = network;
        this.seed = seed;
        chunks = RowChunks.Of(network);
        B = new Panel<float>(network.NodeCount);
        Z = new Panel<float>(network.NodeCount);
    }

    /// <summary>The panel's number.</summary>
    public int Number { get; private set; }

    /// <summary>How many of its lanes are in use.</summary>
    public int Probes { get; private set; }

    /// <summary>Right-hand sides, n x 16.</summary>
    public Panel<float> B { get; }

    /// <summary>Solutions, n x 16, to be filled by a solver.</summary>
    public Panel<float> Z { get; }

    internal uint Lanes => ProbeKernels.LanesOf(Probes);

    /// <summary>The number of panels that K probes need.</summary>
    public static int CountFor(int probes) => (probes + Width - 1) / Width;

    /// <summary>Draws the right-hand sides of a panel.</summary>
    /// <param name="number">The panel's number.</param>
    /// <param name="probes">K, the probes of the whole run; the last panel may use fewer than 16 lanes.</param>
    /// <param name="threads">Threads to share the rows among.</param>
    public void Draw(int number, int probes, int threads)
    {
        Number = number;
        Probes = Math.Min(Width, probes - (number * Width));
        Parallel.For(0, chunks.Count, new ParallelOptions { MaxDegreeOfParallelism = threads }, i =>
            ProbeKernels.Fill(network, seed, number, Lanes, B, chunks[i].Start, chunks[i].End));
    }

    /// <summary>The mode error that the solutions are good to (<see cref="LaplacianSolver.SolveProbes"/>); 0 where nobody said.</summary>
    public double ModeError { get; private set; }

    /// <summary>Fills <see cref="Z"/>, and remembers how well.</summary>
    /// <inheritdoc cref="LaplacianSolver.SolveProbes"/>
    public void Solve(LaplacianSolver solver, double modeError, SolverWorkspace<float> workspace, CancellationToken cancel)
    {
        solver.SolveProbes(B, Z, Probes, modeError, workspace, cancel);
        ModeError = modeError;
    }

    /// <summary>The signs of the link between two nodes in this panel, as seen from the first.</summary>
    internal uint Signs(int from, int to) => ProbeKernels.Signs(network.NodeKeys[from], network.NodeKeys[to], seed, Number);

    /// <inheritdoc/>
    public void Dispose()
    {
        B.Dispose();
        Z.Dispose();
    }
}
