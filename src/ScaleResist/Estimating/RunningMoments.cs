// Mean, spread and skewness of a stream of samples, one at a time.

namespace ScaleResist.Estimating;

/// <summary>Moments of independent samples (Welford 1962; the third: Pebay 2008).</summary>
internal struct RunningMoments
{
    private const double Symmetric = 1e-6; // skewness below which the transformation is the identity
    private double mean;
    private double spread;
    private double third;

    public readonly double Mean => mean;

    public int Count { get; private set; }

    /// <summary>Standard error of the mean.</summary>
    public readonly double StandardError => StandardErrorOf(Count);

    /// <summary>Standard error that the mean of so many samples is foreseen to have.</summary>
    public readonly double StandardErrorOf(int samples) => Math.Sqrt(spread / samples / (Count - 1));

    public void Add(double sample)
    {
        int before = Count++;
        double step = sample - mean, share = step / Count, square = step * share * before;
        mean += share;
        third += (square * share * (Count - 2)) - (3 * share * spread);
        spread += square;
    }

    /// <summary>
    /// The interval of the mean: Student t once the skewness g that the samples show is transformed away (Hall 1992, J. R. Statist. Soc. B 54, 221,
    /// the cubic transformation). With T = (mean - truth) / s, W = T + g T^2/3 + g^2 T^3/27 + g/(6K) is symmetric to second order, and sqrt(K) W is
    /// taken as t. Squares of one or two slow modes are far from normal; of many, g is near 0 and this is Student's interval.
    /// </summary>
    /// <param name="quantile">Of Student's t with K - 1 degrees of freedom.</param>
    public readonly (double Lower, double Upper) Interval(double quantile)
    {
        double deviation = Math.Sqrt(spread / (Count - 1)), variance = spread / Count;
        double skewness = variance > 0 ? third / Count / (variance * Math.Sqrt(variance)) : 0;
        double reach = quantile / Math.Sqrt(Count), shift = skewness / (6 * Count);
        return (mean - (deviation * Back(reach)), mean - (deviation * Back(-reach)));

        double Back(double w) => Math.Abs(skewness) < Symmetric ? w : 3 / skewness * (Math.Cbrt(1 + (skewness * (w - shift))) - 1);
    }
}
