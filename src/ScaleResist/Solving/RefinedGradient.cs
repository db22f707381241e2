// Conjugate gradient in floats with its solution and its true residuals in doubles: 16 columns at the price of floats, to the accuracy of doubles.
// Invariant: what a column is judged by is b - L x, taken in doubles from the x that is returned.
//
// The iteration is that of ConjugateGradient on a residual scaled to size 1, and collects its steps in d. Whenever a column's residual has fallen
// by Fall in the norm of M, before rounding parts the recurrence from the truth,
//     x += d / scale       d = 0       r = new scale (b - L x)      (in doubles)
// and the iteration goes on from the true residual along its old directions, rescaled: nothing that it has learnt of the spectrum is lost
// (residual replacement: van der Vorst & Ye, SIAM J. Sci. Comput. 22:835, 2000).

using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Solving;

/// <summary>Lockstep conjugate gradient in mixed precision for L x = b on the rows <c>start .. end-1</c>, one component, 16 columns.</summary>
internal sealed class RefinedGradient(
    Laplacian laplacian,
    IPreconditionedLaplacian<float> preconditioned,
    PanelPair b,
    PanelPair x,
    RefinedWorkspace workspace,
    int start,
    int end,
    LaneSums known,
    SolveLimits limits)
{
    private const double Aim = 0.64; // as in ConjugateGradient
    private const double Safety = 0.5;
    private const double Fall = 1e-3;

    private readonly Panel<float> d = workspace.Steps;
    private readonly GradientWorkspace<float> gradient = workspace.Gradient;
    private readonly SolveReport report = workspace.Report;
    private readonly double factor = limits.Tolerance * limits.Tolerance * Safety;
    private double least = preconditioned.LeastEigenvalue;
    private LaneSums energy = known; // x'b so far
    private LaneSums size;           // |b|^2
    private LaneSums scale;
    private LaneSums rs;             // r'M r, unscaled
    private LaneSums scaled;         // the same of the scaled residual, and what it was after the last replacement
    private LaneSums replaced;
    private uint active;             // columns that still move
    private uint open;               // columns not judged yet, or judged and found short

    /// <summary>
    /// Solves until |x - x*|_L &lt;= tolerance |x*|_L, as far as the preconditioner lets one tell. Each column of b must sum to zero; x is not centred.
    /// A column that stops halving its error between two replacements is given up: its energy error in the report says so.
    /// </summary>
    public void Solve(CancellationToken cancel)
    {
        Begin();
        LaneSums beta = default;
        while (open != 0 && report.Iterations < limits.MostIterations)
        {
            cancel.ThrowIfCancellationRequested();
            beta = Step(beta);
        }
        report.LeastEigenvalue = least;
    }

    private void Begin()
    {
        report.Iterations = 0;
        report.Lanczos.Clear();
        x.Clear(start, end);
        for (int half = 0; half < 2; half++)
        {
            LaneSums squares = PanelKernels.Squares(b[half], start, end);
            for (int lane = 0; lane < PanelPair.Half; lane++)
                size[(half * PanelPair.Half) + lane] = squares[lane];
        }
        ConjugateGradient.Clear(d, start, end);
        for (int lane = 0; lane < PanelPair.Width; lane++)
            scale[lane] = InverseRoot(size[lane]);
        RefineKernels.Narrow(b, scale, gradient.R, start, end);
        preconditioned.Begin(gradient.R, gradient, start, end, out _, out scaled);
        replaced = scaled;
        for (int lane = 0; lane < PanelPair.Width; lane++)
        {
            rs[lane] = scaled[lane] / (scale[lane] * scale[lane]);
            report.EnergyErrors[lane] = rs[lane] > 0 ? double.PositiveInfinity : 0;
            report.Residuals[lane] = rs[lane] > 0 ? 1 : 0;
            report.Reasons[lane] = rs[lane] > 0 ? StopReason.IterationLimit : StopReason.ZeroRightHandSide;
            if (rs[lane] > 0)
                active |= 1u << lane;
        }
        open = active;
    }

    // p = M r + beta p, d += a p, r -= a L p; gives the next beta. A column that looks done waits for the next replacement.
    private LaneSums Step(in LaneSums beta)
    {
        report.Iterations++;
        LaneSums before = rs, a = default, next = default;
        LaneSums pq = preconditioned.Product(beta, gradient, start, end);
        for (int lane = 0; lane < PanelPair.Width; lane++)
        {
            if (!Has(active, lane))
                continue;
            a[lane] = rs[lane] * scale[lane] * scale[lane] / pq[lane];
            if (pq[lane] > 0 && double.IsFinite(a[lane]))
            {
                energy[lane] += a[lane] * rs[lane];
                continue;
            }
            a[lane] = 0;
            report.Reasons[lane] = StopReason.Breakdown;
            active &= ~(1u << lane);
        }
        report.Lanczos.AddSteps(a);
        scaled = preconditioned.Advance(a, d, gradient, start, end);
        bool due = false;
        for (int lane = 0; lane < PanelPair.Width; lane++)
        {
            if (!Has(active, lane))
                continue;
            due |= scaled[lane] <= Fall * Fall * replaced[lane];
            rs[lane] = scaled[lane] / (scale[lane] * scale[lane]);
            next[lane] = rs[lane] / before[lane];
            if (IsNear(lane) || !(next[lane] > 0 && double.IsFinite(next[lane])))
            {
                active &= ~(1u << lane);
                next[lane] = 0;
            }
        }
        if (due || active == 0)
            return Replace(before);
        report.Lanczos.AddDirections(next);
        return next;
    }

    // Takes the steps into x, the residual from x, and judges every open column by it.
    private LaneSums Replace(in LaneSums before)
    {
        LaneSums factors = default, stretch = default, beta = default;
        for (int lane = 0; lane < PanelPair.Width; lane++)
        {
            factors[lane] = 1 / scale[lane];
            stretch[lane] = scaled[lane] > 0 ? InverseRoot(scaled[lane] / replaced[lane]) : 1;
            scale[lane] *= stretch[lane];
        }
        RefineKernels.Correct(x, d, factors, start, end);
        LaneSums residual = RefineKernels.Residual(laplacian, b, x, scale, gradient.R, start, end);
        preconditioned.Begin(gradient.R, gradient, start, end, out _, out scaled);
        replaced = scaled;
        for (int lane = 0; lane < PanelPair.Width; lane++)
        {
            if (!Has(open, lane))
                continue;
            rs[lane] = scaled[lane] / (scale[lane] * scale[lane]);
            least = Math.Min(least, report.Lanczos.LeastRitzValue(lane));
            double error = rs[lane] > 0 ? Math.Sqrt(rs[lane] / (Safety * least * energy[lane])) : rs[lane] == 0 ? 0 : double.NaN;
            bool gains = error < 0.5 * report.EnergyErrors[lane];
            report.EnergyErrors[lane] = error;
            report.Residuals[lane] = size[lane] > 0 ? Math.Sqrt(residual[lane] / size[lane]) : 0;
            if (error <= limits.Tolerance || !gains)
            {
                report.Reasons[lane] = error <= limits.Tolerance ? StopReason.Converged : report.Reasons[lane];
                open &= ~(1u << lane);
                active &= ~(1u << lane);
                continue;
            }
            // A column that had stopped begins afresh: its old direction is gone.
            beta[lane] = Has(active, lane) ? rs[lane] / before[lane] : 0;
            active |= 1u << lane;
        }
        report.Lanczos.AddDirections(beta);
        for (int lane = 0; lane < PanelPair.Width; lane++)
            beta[lane] *= stretch[lane];
        return beta;
    }

    private bool IsNear(int lane)
    {
        if (rs[lane] > Aim * factor * least * energy[lane])
            return false;
        least = Math.Min(least, report.Lanczos.LeastRitzValue(lane));
        return rs[lane] <= Aim * factor * least * energy[lane];
    }

    // A power of two near 1 / sqrt(square): scaling by it is exact.
    private static double InverseRoot(double square) =>
        square > 0 && double.IsFinite(square) ? Math.ScaleB(1, -(Math.ILogB(square) / 2)) : 1;

    private static bool Has(uint lanes, int lane) => (lanes & (1u << lane)) != 0;
}
