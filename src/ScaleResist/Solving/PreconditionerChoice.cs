// Which preconditioner a core gets: by a short trial and counted work, so that the same network always gets the same answer.

using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Solving;

/// <summary>A choice and its reason.</summary>
/// <param name="Name">As reports show it.</param>
/// <param name="Reason">One line.</param>
/// <param name="Factor">The sampled factor, or null where Gauss-Seidel is enough.</param>
/// <param name="LeastEigenvalue">Of M L, as the trial saw it; 1 where there was none.</param>
internal sealed record PreconditionerChoice(string Name, string Reason, SampledFactor? Factor, double LeastEigenvalue = 1)
{
    private const int TrialSteps = 16;
    private const int BallNodes = 1 << 16;

    // In steps of Gauss-Seidel on a panel of 16: what a sampled factor costs to make, and what a solve with it costs. Rough by nature.
    private const double SetUpSteps = 200;
    private const double SolveSteps = 60;
    private const double MostSteps = 128; // beyond, the early pace foretells too few steps (226 on a grid that needs 1200)
    // A ball may look worse than the whole, since most of its nodes lie on its boundary: 103 steps against 31 on a small world of 10^6 nodes.
    private const double BallMargin = 2;
    // A second sample costs as much to set up as it saves in some 50 solves on a grid and on a road-like network of 10^6 nodes; on a cubic grid
    // it saves nothing.
    private const int ManySolves = 48;
    private const double PlanarDegree = 5.5;

    /// <summary>For a core of one node, where nothing is left to solve.</summary>
    public static PreconditionerChoice None { get; } = new("elimination", "nothing is left to iterate on", null);

    /// <summary>
    /// Tries Gauss-Seidel on white right-hand sides, in which every mode has the same share, a weak cut's too, until a thousandth of one mode's
    /// share is left: first on a small ball, which tells meshes and roads, then on the whole. Where the steps this takes cost less, over the
    /// solves to come, than a sampled factor and its solves, Gauss-Seidel it is, and the trial has shown the least eigenvalue of M L. Else a
    /// sampled factor.
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
        double most = Math.Min(MostSteps, SolveSteps + (SetUpSteps * ProbeKernels.Width / Math.Max(solves, ProbeKernels.Width)));
        Trial trial;
        if (n > 2 * BallNodes)
        {
            Laplacian ball = LeadingBall.Of(laplacian, BallNodes);
            trial = Trial.Of(ball, ball.NodeCount, TrialSteps, seed, cancel);
            if (trial.Steps > BallMargin * most)
                return Sampled($" on {ball.NodeCount:N0} nodes");
        }
        trial = Trial.Of(laplacian, n, most, seed, cancel);
        if (trial.Least is double least)
            return new("gauss-seidel", $"a trial needs {trial.Steps:0} steps", null, least);
        return Sampled("");

        PreconditionerChoice Sampled(string where)
        {
            Laplacian own = core();
            int samples = solves >= ManySolves && own.Neighbours.Length < PlanarDegree * n ? 2 : 1;
            return new(
                $"sampled elimination, {samples} sample{(samples == 1 ? "" : "s")} an entry",
                $"a trial of gauss-seidel{where} foretells {trial.Steps:0} steps", SampledFactor.Of(own, samples, seed));
        }
    }

    // The steps needed, and the least eigenvalue of M L they showed; or those foretold from the pace of the last half, where they are too many.
    private sealed record Trial(double Steps, double? Least)
    {
        public static Trial Of(Laplacian laplacian, int n, double most, ulong seed, CancellationToken cancel)
        {
            using Panel<float> b = new(n), x = new(n);
            using GradientWorkspace<float> workspace = new(n);
            SolveReport report = new();
            GaussSeidel<float> preconditioned = new(SplitLaplacian.Of(laplacian));
            FillSigns(b, seed);
            double reduction = 1e-3 / n;
            double steps = Try(TrialSteps);
            if (steps > TrialSteps && steps <= most)
                steps = Try((int)most);
            return steps <= most && report.Reasons.All(reason => reason == StopReason.Converged)
                ? new(steps, Enumerable.Range(0, Panel<float>.Width).Min(report.Lanczos.LeastRitzValue))
                : new(steps, null);

            double Try(int limit)
            {
                ConjugateGradient.Solve(
                    preconditioned, b, x, workspace, 0, n, default, new SolveLimits(0, limit, reduction), report, cancel);
                if (report.Reasons.All(reason => reason == StopReason.Converged))
                    return report.Iterations;
                double pace = Math.Log(report.HalfReduction / report.WorstReduction) / (limit - (limit / 2));
                return pace > 0 ? limit + (Math.Log(report.WorstReduction / reduction) / pace) : double.PositiveInfinity;
            }
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
