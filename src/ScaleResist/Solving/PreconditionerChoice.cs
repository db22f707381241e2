// Which preconditioner a core gets: by a short trial and counted work, so that the same network always gets the same answer.

using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Solving;

/// <summary>A choice and its reason.</summary>
/// <param name="Name">As reports show it.</param>
/// <param name="Reason">One line.</param>
/// <param name="Factor">The sampled factor, or null where the diagonal is enough.</param>
internal sealed record PreconditionerChoice(string Name, string Reason, SampledFactor? Factor)
{
    private const double Tolerance = 1e-4;
    private const int TrialSteps = 12;
    private const double MostJacobiSteps = 30;
    private const int ManySolves = 256; // on grids and roads a second sample costs as much to set up as it saves in some 150 solves;
    private const double PlanarDegree = 4.5; // on denser cores it fills in, and never pays

    /// <summary>For cores too small to matter.</summary>
    public static PreconditionerChoice Small { get; } = new("jacobi", "small core", null);

    /// <summary>
    /// Jacobi where twelve steps foretell that thirty are enough: no factor pays then, since each of its 11 or more iterations moves three to
    /// four times the bytes and its set-up the bytes of some tens of iterations. Else a sampled factor.
    /// </summary>
    /// <param name="laplacian">L, of which the first <paramref name="n"/> rows are tried.</param>
    /// <param name="n">The number of nodes.</param>
    /// <param name="core">The same rows as a Laplacian of their own, made when a factor is wanted.</param>
    /// <param name="solves">Right-hand sides to come.</param>
    /// <param name="seed">Of the trial and of the factor.</param>
    /// <param name="cancel">Ends the trial.</param>
    public static PreconditionerChoice ByTrial(
        Laplacian laplacian, int n, Func<Laplacian> core, int solves, ulong seed, CancellationToken cancel)
    {
        using Panel<float> b = new(n), x = new(n);
        using GradientWorkspace<float> workspace = new(n);
        SolveReport report = new();
        FillSigns(b, seed);
        LaneSums size = PanelKernels.Squares(b, 0, n);
        ConjugateGradient.Iterate(
            laplacian, new Jacobi<float>(laplacian.Strengths), b, x, workspace, 0, n, size, new SolveLimits(Tolerance, TrialSteps), report, cancel);
        double steps = report.Iterations;
        if (report.Reasons.Any(reason => reason != StopReason.Converged))
        {
            LaneSums left = PanelKernels.Squares(workspace.R, 0, n);
            double worst = 0;
            for (int lane = 0; lane < Panel<float>.Width; lane++)
                worst = Math.Max(worst, Math.Sqrt(left[lane] / size[lane]));
            steps = worst < 1 ? TrialSteps * Math.Log(Tolerance) / Math.Log(worst) : double.PositiveInfinity;
        }
        if (steps <= MostJacobiSteps)
            return new("jacobi", $"a trial foretells {steps:0} steps", null);
        Laplacian own = core();
        int samples = solves >= ManySolves && own.Neighbours.Length < PlanarDegree * n ? 2 : 1;
        return new(
            $"sampled elimination, {samples} sample{(samples == 1 ? "" : "s")} an entry", $"a trial of jacobi foretells {steps:0} steps",
            SampledFactor.Of(own, samples, seed));
    }

    private static void FillSigns(Panel<float> b, ulong seed)
    {
        for (int u = 0; u < b.Rows; u++)
        {
            Bits128 bits = Philox.Block((uint)u, 0, 0, 1, seed);
            for (int lane = 0; lane < Panel<float>.Width; lane++)
                b.Row(u)[lane] = (bits.Low >> lane & 1) == 0 ? 1 : -1;
        }
        PanelKernels.Centre(b, 0, b.Rows);
    }
}
