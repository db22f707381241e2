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
    private const int JacobiTrial = 25;

    /// <summary>For cores too small to matter.</summary>
    public static PreconditionerChoice Small { get; } = new("jacobi", "small core", null);

    /// <summary>
    /// Jacobi where it converges within 25 steps: no factor pays then, since each of its 11 or more iterations moves three to four times the
    /// bytes and its set-up the bytes of some tens of iterations. Else a sampled factor.
    /// </summary>
    /// <param name="laplacian">L, of which the first <paramref name="n"/> rows are tried.</param>
    /// <param name="n">The number of nodes.</param>
    /// <param name="core">The same rows as a Laplacian of their own, made when a factor is wanted.</param>
    /// <param name="seed">Of the trial and of the factor.</param>
    /// <param name="cancel">Ends the trial.</param>
    public static PreconditionerChoice ByTrial(
        Laplacian laplacian, int n, Func<Laplacian> core, ulong seed, CancellationToken cancel)
    {
        using Panel<float> b = new(n), x = new(n);
        using GradientWorkspace<float> workspace = new(n);
        SolveReport report = new();
        FillSigns(b, seed);
        LaneSums size = PanelKernels.Squares(b, 0, n);
        ConjugateGradient.Iterate(
            laplacian, new Jacobi<float>(laplacian.Strengths), b, x, workspace, 0, n, size, new SolveLimits(Tolerance, JacobiTrial), report, cancel);
        if (report.Reasons.All(reason => reason == StopReason.Converged))
            return new("jacobi", $"converges in {report.Iterations} steps", null);
        int samples = Samples();
        return new(
            $"sampled elimination, {samples} samples", $"jacobi does not converge in {JacobiTrial} steps",
            SampledFactor.Of(core(), samples, seed));
    }

    private static int Samples() =>
        int.TryParse(Environment.GetEnvironmentVariable("SAMPLES"), out int s) ? s : 2;

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
