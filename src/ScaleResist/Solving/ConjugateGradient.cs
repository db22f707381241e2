// Preconditioned conjugate gradient on a whole panel at once: every column has its own scalars, all columns share each pass.
// Invariant: a column that has stopped gets step 0 and direction factor 0, so its x does not change while others go on.
//
//   q = L p          a = r's / p'q      (Multiply: reads p and the adjacency, writes q)
//   x += a p         r -= a q           (Step: reads x, r, p, q, writes x, r; gives |r|^2)
//   s = M r          b = new r's / old  (Apply: reads r, writes s; Jacobi: 2 panels)
//   p = s + b p                         (Direction: reads s, p, writes p)
//
// 11 panel passes an iteration beside the gathers of L p. s lives in q's memory, which is free by then.

using System.Numerics;
using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Solving;

/// <summary>Lockstep conjugate gradient for L x = b on the rows <c>start .. end-1</c>, one component, W columns at a time.</summary>
public static class ConjugateGradient
{
    /// <summary>
    /// Solves to |b - Lx| &lt;= tolerance |b| column by column, and recomputes the true residual. Each column of b must sum to zero; x is centred.
    /// </summary>
    /// <param name="laplacian">L.</param>
    /// <param name="preconditioner">M.</param>
    /// <param name="b">Right-hand sides, n x W.</param>
    /// <param name="x">Solutions, n x W; what it held is overwritten.</param>
    /// <param name="workspace">Three panels of at least n rows.</param>
    /// <param name="start">First row.</param>
    /// <param name="end">One past the last row.</param>
    /// <param name="limits">When to stop.</param>
    /// <param name="report">Receives iterations, reasons and true residuals.</param>
    /// <param name="cancel">Checked once an iteration.</param>
    public static void Solve<T>(
        Laplacian laplacian,
        IPreconditioner<T> preconditioner,
        Panel<T> b,
        Panel<T> x,
        GradientWorkspace<T> workspace,
        int start,
        int end,
        SolveLimits limits,
        SolveReport report,
        CancellationToken cancel)
        where T : unmanaged, INumber<T>
    {
        LaneSums size = PanelKernels.Squares(b, start, end);
        Iterate(laplacian, preconditioner, b, x, workspace, start, end, size, limits, report, cancel);
        Verify(laplacian, b, x, start, end, size, report);
        PanelKernels.Centre(x, start, end);
    }

    /// <summary>Puts |b - Lx| / |b| of every column into the report; <paramref name="size"/> holds |b|^2.</summary>
    internal static void Verify<T>(
        Laplacian laplacian, Panel<T> b, Panel<T> x, int start, int end, in LaneSums size, SolveReport report)
        where T : unmanaged, INumber<T>
    {
        LaneSums residual = PanelKernels.Residual(laplacian, b, x, start, end);
        for (int lane = 0; lane < Panel<T>.Width; lane++)
            report.Residuals[lane] = size[lane] > 0 ? Math.Sqrt(residual[lane] / size[lane]) : 0;
    }

    /// <summary>
    /// The iteration alone, until the recurrence's |r|^2 is below the tolerance squared times <paramref name="size"/>. It aims a fifth below
    /// the tolerance, so that the true residual can meet it.
    /// </summary>
    internal static void Iterate<T>(
        Laplacian laplacian,
        IPreconditioner<T> preconditioner,
        Panel<T> b,
        Panel<T> x,
        GradientWorkspace<T> workspace,
        int start,
        int end,
        in LaneSums size,
        SolveLimits limits,
        SolveReport report,
        CancellationToken cancel)
        where T : unmanaged, INumber<T>
    {
        Panel<T> r = workspace.R, p = workspace.P, q = workspace.Q;
        Clear(x, start, end);
        Copy(b, r, start, end);
        LaneSums rr = PanelKernels.Squares(r, start, end);
        LaneSums rs = preconditioner.Apply(r, q, start, end);
        Copy(q, p, start, end);

        LaneSums target = default;
        int running = 0;
        uint active = 0;
        for (int lane = 0; lane < Panel<T>.Width; lane++)
        {
            target[lane] = limits.Tolerance * limits.Tolerance * 0.64 * size[lane];
            report.Reasons[lane] =
                size[lane] == 0 ? StopReason.ZeroRightHandSide : rr[lane] <= target[lane] ? StopReason.Converged : StopReason.IterationLimit;
            if (report.Reasons[lane] == StopReason.IterationLimit)
            {
                active |= 1u << lane;
                running++;
            }
        }

        int iteration = 0;
        while (running > 0 && iteration < limits.MostIterations)
        {
            cancel.ThrowIfCancellationRequested();
            iteration++;
            LaneSums pq = PanelKernels.Multiply(laplacian, p, q, start, end);
            LaneSums a = default;
            for (int lane = 0; lane < Panel<T>.Width; lane++)
            {
                if ((active & (1u << lane)) == 0)
                    continue;
                a[lane] = rs[lane] / pq[lane];
                if (!(pq[lane] > 0 && double.IsFinite(a[lane])))
                    Stop(lane, StopReason.Breakdown, ref a);
            }
            rr = PanelKernels.Step(x, r, p, q, a, start, end);
            LaneSums newRs = preconditioner.Apply(r, q, start, end);
            LaneSums beta = default;
            for (int lane = 0; lane < Panel<T>.Width; lane++)
            {
                if ((active & (1u << lane)) == 0)
                    continue;
                beta[lane] = newRs[lane] / rs[lane];
                rs[lane] = newRs[lane];
                if (rr[lane] <= target[lane])
                    Stop(lane, StopReason.Converged, ref beta);
                else if (!(beta[lane] > 0 && double.IsFinite(beta[lane])))
                    Stop(lane, StopReason.Breakdown, ref beta);
            }
            if (running > 0)
                PanelKernels.Direction(p, q, beta, start, end);
        }

        report.Iterations = iteration;

        void Stop(int lane, StopReason reason, ref LaneSums factors)
        {
            report.Reasons[lane] = reason;
            factors[lane] = 0;
            active &= ~(1u << lane);
            running--;
        }
    }

    internal static unsafe void Clear<T>(Panel<T> panel, int start, int end)
        where T : unmanaged =>
        System.Runtime.InteropServices.NativeMemory.Clear(panel.Pointer + ((long)start * Panel<T>.Width), (nuint)(end - start) * 64);

    internal static unsafe void Copy<T>(Panel<T> from, Panel<T> to, int start, int end)
        where T : unmanaged
    {
        long offset = (long)start * Panel<T>.Width;
        Buffer.MemoryCopy(from.Pointer + offset, to.Pointer + offset, (end - start) * 64L, (end - start) * 64L);
    }
}
