// Which preconditioner a core gets: by a short trial and counted work, so that the same network always gets the same answer.

using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Solving;

/// <summary>A choice and its reason.</summary>
/// <param name="Name">As reports show it.</param>
/// <param name="Reason">One line.</param>
/// <param name="Factor">The sampled factor, or null where the diagonal is enough.</param>
/// <param name="LeastEigenvalue">Of D^-1 L, as the trial saw it; 1 where there was none.</param>
internal sealed record PreconditionerChoice(string Name, string Reason, SampledFactor? Factor, double LeastEigenvalue = 1)
{
    private const int TrialSteps = 12;
    private const double MostJacobiSteps = 30;
    private const int ManySolves = 256; // on grids and roads a second sample costs as much to set up as it saves in some 150 solves;
    private const double PlanarDegree = 4.5; // on denser cores it fills in, and never pays

    /// <summary>For a core of one node, where nothing is left to solve.</summary>
    public static PreconditionerChoice None { get; } = new("elimination", "nothing is left to iterate on", null);

    /// <summary>
    /// Tries Jacobi on white right-hand sides, in which every mode has the same share, a weak cut's too, until a thousandth of one mode's share
    /// is left. Where that takes at most thirty steps no factor pays: each of its 11 or more iterations moves three to four times the bytes,
    /// and its set-up the bytes of some tens of iterations. The trial also shows the least eigenvalue of D^-1 L. Else a sampled factor.
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
        double reduction = 1e-3 / n;
        double steps = Try(TrialSteps);
        if (steps > TrialSteps && steps <= MostJacobiSteps)
            steps = Try((int)Math.Ceiling(1.2 * MostJacobiSteps));
        if (steps <= MostJacobiSteps)
        {
            double least = Enumerable.Range(0, Panel<float>.Width).Min(report.Lanczos.LeastRitzValue);
            return new("jacobi", $"a trial needs {steps:0} steps", null, least);
        }
        Laplacian own = core();
        int samples = solves >= ManySolves && own.Neighbours.Length < PlanarDegree * n ? 2 : 1;
        return new(
            $"sampled elimination, {samples} sample{(samples == 1 ? "" : "s")} an entry", $"a trial of jacobi foretells {steps:0} steps",
            SampledFactor.Of(own, samples, seed));

        double Try(int most)
        {
            ConjugateGradient.Solve(
                laplacian, new Jacobi<float>(laplacian.Strengths), b, x, workspace, 0, n, default, new SolveLimits(0, most, reduction), report, cancel);
            return report.Reasons.All(reason => reason == StopReason.Converged)
                ? report.Iterations
                : report.Iterations * Math.Log(reduction) / Math.Log(Math.Min(report.WorstReduction, 0.999));
        }
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
