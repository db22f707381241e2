// Preconditioned conjugate gradient on a whole panel at once: every column has its own scalars, all columns share each pass.
// Invariant: a column that has stopped gets step 0 and direction factor 0, so its x does not change while others go on.
//
//   p = M r + b p        p'L p               (Product)
//   a = r'M r / p'L p
//   x += a p             r -= a L p          (Advance: gives the new r'M r)
//   b = new r'M r / old
//
// How many passes this takes is the preconditioner's affair: GaussSeidel makes 2 that move 11 panels, SampledElimination 3 that move 13.
//
// When to stop. A residual small beside b says little: a weak cut's mode may hold most of x and next to nothing of b. What counts is the error in
// the energy norm, |x - x*|_L^2 = r' L+ r <= r'M r / m with m the least eigenvalue of M L on vectors that sum to zero; the energy x'b = sum a r's
// comes with the recurrence, and so does m, as the least Ritz value. A column stops when r's <= tolerance^2 (m/2) (energy so far).

using System.Numerics;
using System.Runtime.InteropServices;
using ScaleResist.Kernels;

namespace ScaleResist.Solving;

/// <summary>Lockstep conjugate gradient for L x = b on the rows <c>start .. end-1</c>, one component, W columns at a time.</summary>
internal static class ConjugateGradient
{
    // The recurrence aims below the tolerance, so that the error recomputed from the true residual can meet it.
    private const double Aim = 0.64;
    private const double Safety = 0.5;
    private const int MostRestarts = 3;

    /// <summary>
    /// Solves until |x - x*|_L &lt;= tolerance |x*|_L, as far as the preconditioner lets one tell, and checks by the true residual. Each column of b
    /// must sum to zero; x is not centred.
    /// </summary>
    /// <param name="preconditioned">L and M.</param>
    /// <param name="b">Right-hand sides, n x W.</param>
    /// <param name="x">Solutions, n x W; what it held is overwritten.</param>
    /// <param name="workspace">Three panels of at least n rows.</param>
    /// <param name="start">First row.</param>
    /// <param name="end">One past the last row.</param>
    /// <param name="known">Energy that x*'b has beside the rows solved for here, by column.</param>
    /// <param name="limits">When to stop.</param>
    /// <param name="report">Receives iterations, reasons, energy errors and true residuals.</param>
    /// <param name="cancel">Checked once an iteration.</param>
    public static void Solve<T>(
        IPreconditionedLaplacian<T> preconditioned,
        Panel<T> b,
        Panel<T> x,
        GradientWorkspace<T> workspace,
        int start,
        int end,
        in LaneSums known,
        SolveLimits limits,
        SolveReport report,
        CancellationToken cancel)
        where T : unmanaged, INumber<T>
    {
        Clear(x, start, end);
        Run<T> run = new(preconditioned, b, x, workspace, start, end, known, limits, report);
        run.Begin();
        for (int restart = 0; ; restart++)
        {
            run.Iterate(cancel);
            if (!run.Resume() || restart == MostRestarts)
                break;
        }
        report.LeastEigenvalue = run.Least;
    }

    // The state of one solve. Where rounding has parted the recurrence from the truth, it begins again from the true residual, x as it is.
    private sealed class Run<T>(
        IPreconditionedLaplacian<T> preconditioned,
        Panel<T> b,
        Panel<T> x,
        GradientWorkspace<T> workspace,
        int start,
        int end,
        LaneSums known,
        SolveLimits limits,
        SolveReport report)
        where T : unmanaged, INumber<T>
    {
        private readonly double factor = limits.Tolerance * limits.Tolerance * Safety;
        private LaneSums size;
        private LaneSums rs;
        private LaneSums first;
        private LaneSums energy = known;
        private uint active;
        private bool judged;

        public double Least { get; private set; } = preconditioned.LeastEigenvalue;

        public void Begin()
        {
            report.Iterations = 0;
            report.HalfReduction = 1;
            preconditioned.Begin(b, workspace, start, end, out size, out rs);
            first = rs;
            active = 0;
            for (int lane = 0; lane < Panel<T>.Width; lane++)
            {
                report.Reasons[lane] = rs[lane] > 0 ? StopReason.IterationLimit : StopReason.ZeroRightHandSide;
                if (rs[lane] > 0 && rs[lane] > Aim * factor * Least * energy[lane])
                    active |= 1u << lane;
                else if (rs[lane] > 0)
                    report.Reasons[lane] = StopReason.Converged;
            }
        }

        public void Iterate(CancellationToken cancel)
        {
            LaneSums beta = default;
            report.Lanczos.Clear();
            while (active != 0 && report.Iterations < limits.MostIterations)
            {
                cancel.ThrowIfCancellationRequested();
                report.Iterations++;
                LaneSums pq = preconditioned.Product(beta, workspace, start, end);
                LaneSums a = default;
                for (int lane = 0; lane < Panel<T>.Width; lane++)
                {
                    if (!IsActive(lane))
                        continue;
                    a[lane] = rs[lane] / pq[lane];
                    if (!(pq[lane] > 0 && double.IsFinite(a[lane])))
                        Stop(lane, StopReason.Breakdown, ref a);
                    energy[lane] += a[lane] * rs[lane];
                }
                report.Lanczos.AddSteps(a);
                LaneSums newRs = preconditioned.Advance(a, x, workspace, start, end);
                beta = default;
                for (int lane = 0; lane < Panel<T>.Width; lane++)
                {
                    if (!IsActive(lane))
                        continue;
                    beta[lane] = newRs[lane] / rs[lane];
                    rs[lane] = newRs[lane];
                    if (rs[lane] <= limits.Reduction * first[lane] || IsNear(lane, Aim))
                        Stop(lane, StopReason.Converged, ref beta);
                    else if (!(beta[lane] > 0 && double.IsFinite(beta[lane])))
                        Stop(lane, StopReason.Breakdown, ref beta);
                }
                report.Lanczos.AddDirections(beta);
                if (report.Iterations <= limits.MostIterations / 2)
                    report.HalfReduction = WorstReduction();
            }
            report.WorstReduction = WorstReduction();
        }

        // Judges every column by its true residual, recomputed from x. Those that fall short go on from it, as long as that halves the error.
        public bool Resume()
        {
            preconditioned.BeginAt(b, x, workspace, start, end, out LaneSums rr, out rs);
            active = 0;
            for (int lane = 0; lane < Panel<T>.Width; lane++)
            {
                report.Residuals[lane] = size[lane] > 0 ? Math.Sqrt(rr[lane] / size[lane]) : 0;
                double error = rs[lane] > 0 ? Math.Sqrt(rs[lane] / (Safety * Least * energy[lane])) : rs[lane] == 0 ? 0 : double.NaN;
                bool worthIt = !judged || error < 0.5 * report.EnergyErrors[lane];
                report.EnergyErrors[lane] = error;
                if (error > limits.Tolerance && worthIt && report.Reasons[lane] != StopReason.IterationLimit && limits.Tolerance > 0)
                    active |= 1u << lane;
            }
            judged = true;
            return active != 0;
        }

        private bool IsActive(int lane) => (active & (1u << lane)) != 0;

        private bool IsNear(int lane, double share)
        {
            if (rs[lane] > share * factor * Least * energy[lane])
                return false;
            Least = Math.Min(Least, report.Lanczos.LeastRitzValue(lane));
            return rs[lane] <= share * factor * Least * energy[lane];
        }

        private double WorstReduction()
        {
            double worst = 0;
            for (int lane = 0; lane < Panel<T>.Width; lane++)
                worst = Math.Max(worst, first[lane] > 0 ? rs[lane] / first[lane] : 0);
            return worst;
        }

        private void Stop(int lane, StopReason reason, ref LaneSums factors)
        {
            report.Reasons[lane] = reason;
            factors[lane] = 0;
            active &= ~(1u << lane);
        }
    }

    internal static unsafe void Copy<T>(Panel<T> from, Panel<T> to, int start, int end)
        where T : unmanaged
    {
        long offset = (long)start * Panel<T>.Width;
        Buffer.MemoryCopy(from.Pointer + offset, to.Pointer + offset, (end - start) * 64L, (end - start) * 64L);
    }

    internal static unsafe void Clear<T>(Panel<T> panel, int start, int end)
        where T : unmanaged =>
        NativeMemory.Clear(panel.Pointer + ((long)start * Panel<T>.Width), (nuint)(end - start) * 64);
}
