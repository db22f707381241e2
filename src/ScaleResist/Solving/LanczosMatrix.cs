// What conjugate gradient learns of its operator on the way: the tridiagonal matrix whose least eigenvalue approaches, from above, that of M L.
// (Golub & Meurant, Matrices, Moments and Quadrature, 2010, ch. 4.)
//
//     T_jj = 1/a_j + b_(j-1)/a_(j-1),     T_(j,j+1) = sqrt(b_j)/a_j     for step lengths a and direction factors b.

using ScaleResist.Kernels;

namespace ScaleResist.Solving;

/// <summary>Step lengths and direction factors of a lockstep run, and the least Ritz value of a column.</summary>
internal sealed class LanczosMatrix
{
    private const double Least = 1e-16;
    private readonly List<LaneSums> steps = [];
    private readonly List<LaneSums> directions = [];

    /// <summary>Forgets the last run.</summary>
    public void Clear()
    {
        steps.Clear();
        directions.Clear();
    }

    /// <summary>Takes the step lengths of an iteration.</summary>
    public void AddSteps(in LaneSums a) => steps.Add(a);

    /// <summary>Takes the direction factors of an iteration.</summary>
    public void AddDirections(in LaneSums b) => directions.Add(b);

    /// <summary>The least eigenvalue of a column's tridiagonal matrix, to five per cent. O(iterations).</summary>
    public double LeastRitzValue(int lane)
    {
        int size = 0;
        double high = double.PositiveInfinity;
        for (; size < steps.Count && steps[size][lane] > 0; size++)
            high = Math.Min(high, Diagonal(size, lane));
        if (size == 0)
            return 1;
        // The least eigenvalue is at most the least diagonal entry; bisection on a scale of ratios.
        double low = Least;
        while (high > 1.05 * low)
        {
            double middle = Math.Sqrt(low * high);
            if (HasEigenvalueBelow(middle, lane, size))
                high = middle;
            else
                low = middle;
        }
        return high;
    }

    // Sturm's count stops at the first negative pivot.
    private bool HasEigenvalueBelow(double x, int lane, int size)
    {
        double pivot = Diagonal(0, lane) - x;
        for (int j = 1; j < size; j++)
        {
            if (pivot <= 0)
                return true;
            double a = steps[j - 1][lane];
            pivot = Diagonal(j, lane) - x - (directions[j - 1][lane] / (a * a) / pivot);
        }
        return pivot <= 0;
    }

    private double Diagonal(int j, int lane) =>
        (1 / steps[j][lane]) + (j == 0 ? 0 : directions[j - 1][lane] / steps[j - 1][lane]);
}
