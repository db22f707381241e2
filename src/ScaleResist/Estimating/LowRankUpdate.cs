// What k changed links do to L+, from k columns of it.
//
//     L' = L + U diag(dc) U'      L'+ = L+ - X K^-1 X',     X = L+ U,     K = diag(1/dc) + U'X      (Woodbury 1950)
//
// so that a resistance falls by d'K^-1 d with d_j = x_uj - x_vj, and sum over pairs of w_u w_v R by W tr(K^-1 G), where W = sum w and
// G = sum w_u (x_u - m)(x_u - m)', m the weighted mean row. K is indefinite where links are lost: it is solved with pivoting.
// Invariant: L and L' have the same null space (Splits sees to that), so K has an inverse.

using MathNet.Numerics.LinearAlgebra;
using MathNet.Numerics.LinearAlgebra.Factorization;

namespace ScaleResist.Estimating;

/// <summary>The small system of one case, k x k.</summary>
internal sealed class LowRankUpdate
{
    private readonly LU<double>? factors;
    private readonly double largest; // of the terms that K's pivots are what is left of, relative to the least pivot

    /// <summary>Factorises.</summary>
    /// <param name="couplings">U'X, k x k, symmetric but for rounding.</param>
    /// <param name="steps">dc of each column, not 0.</param>
    public LowRankUpdate(double[,] couplings, double[] steps)
    {
        int k = steps.Length;
        if (k == 0)
            return;
        Matrix<double> system = Matrix<double>.Build.Dense(k, k, (i, j) => 0.5 * (couplings[i, j] + couplings[j, i]));
        // In units of sqrt|dc|: diagonals of 1 + dc R or of -1 + |dc| R, however far conductances are spread.
        Scale = Array.ConvertAll(steps, dc => Math.Sqrt(Math.Abs(dc)));
        for (int i = 0; i < k; i++)
        {
            for (int j = 0; j < k; j++)
                system[i, j] *= Scale[i] * Scale[j];
            largest = Math.Max(largest, 1 + Math.Abs(system[i, i]));
            system[i, i] += Math.Sign(steps[i]);
        }
        factors = system.LU();
        double least = double.PositiveInfinity;
        for (int i = 0; i < k; i++)
            least = Math.Min(least, Math.Abs(factors.U[i, i]));
        largest /= least;
    }

    private double[] Scale { get; } = [];

    /// <summary>How many digits the system loses, as a factor on the relative rounding error of what it gives: 1 or more.</summary>
    public double Loss => Math.Max(1, largest);

    /// <summary>tr(K^-1 G), G k x k and symmetric.</summary>
    public double Trace(double[,] gram)
    {
        if (factors is null)
            return 0;
        return factors.Solve(Matrix<double>.Build.Dense(Scale.Length, Scale.Length, (i, j) => gram[i, j] * Scale[i] * Scale[j])).Trace();
    }

    /// <summary>d'K^-1 d.</summary>
    public double Square(ReadOnlySpan<double> d)
    {
        if (factors is null)
            return 0;
        Vector<double> scaled = Vector<double>.Build.Dense(d.Length);
        for (int i = 0; i < d.Length; i++)
            scaled[i] = d[i] * Scale[i];
        return factors.Solve(scaled).DotProduct(scaled);
    }
}
