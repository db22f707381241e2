// How a panel solve ended, column by column. Stopping is data: whoever asked decides what a reason is worth.

using System.Numerics;
using ScaleResist.Kernels;

namespace ScaleResist.Solving;

/// <summary>Why a column stopped.</summary>
public enum StopReason
{
    /// <summary>The recurrence's residual fell below the target.</summary>
    Converged,

    /// <summary>The right-hand side is zero, and so is the solution.</summary>
    ZeroRightHandSide,

    /// <summary>The most iterations allowed were used up.</summary>
    IterationLimit,

    /// <summary>A step length came out negative or not a number: the precision of the panel is used up.</summary>
    Breakdown,
}

/// <summary>The end of a lockstep solve; reused from one solve to the next.</summary>
public sealed class SolveReport
{
    /// <summary>Iterations of the whole panel.</summary>
    public int Iterations { get; internal set; }

    /// <summary>One reason a column.</summary>
    public StopReason[] Reasons { get; } = new StopReason[16];

    /// <summary>|b - Lx| / |b| by column, recomputed from x after the last iteration; 0 where b is 0.</summary>
    public double[] Residuals { get; } = new double[16];

    /// <summary>|x - x*|_L / |x*|_L by column, estimated from the true residual: sqrt(r'M r / (m/2) / x'b).</summary>
    public double[] EnergyErrors { get; } = new double[16];

    /// <summary>The least eigenvalue m of M L as far as it was seen.</summary>
    public double LeastEigenvalue { get; internal set; }

    /// <summary>The largest share of r'M r that a column has left when it stops.</summary>
    public double WorstReduction { get; internal set; }

    /// <summary>The same after half of the iterations allowed, or at the end where fewer were needed.</summary>
    public double HalfReduction { get; internal set; }

    internal LanczosMatrix Lanczos { get; } = new();
}

/// <summary>When to stop.</summary>
/// <param name="Tolerance">The relative error in the energy norm that is wanted.</param>
/// <param name="MostIterations">The most iterations allowed.</param>
/// <param name="Reduction">Stop also when r'M r has fallen to this share of its first value; 0: never.</param>
public readonly record struct SolveLimits(double Tolerance, int MostIterations, double Reduction = 0)
{
    /// <summary>
    /// Limits for a component of n nodes: conjugate gradient ends after n steps in exact arithmetic; rounding may ask for more.
    /// </summary>
    public static SolveLimits For(double tolerance, int nodes) => new(tolerance, (int)Math.Min(200 + (4L * nodes), 100_000));
}

/// <summary>The three panels that a lockstep conjugate gradient works in.</summary>
/// <typeparam name="T"><see cref="float"/> or <see cref="double"/>.</typeparam>
/// <param name="rows">The number of nodes of the network.</param>
public sealed class GradientWorkspace<T>(int rows) : IDisposable
    where T : unmanaged, INumber<T>
{
    /// <summary>Residuals r, or what a preconditioner keeps in their place.</summary>
    internal Panel<T> R { get; } = new(rows);

    /// <summary>Directions p.</summary>
    internal Panel<T> P { get; } = new(rows);

    /// <summary>L p, and what a preconditioner makes of r.</summary>
    internal Panel<T> Q { get; } = new(rows);

    /// <inheritdoc/>
    public void Dispose()
    {
        R.Dispose();
        P.Dispose();
        Q.Dispose();
    }
}
