// Quantiles for intervals, from MathNet.Numerics.

using MathNet.Numerics.Distributions;

namespace ScaleResist.Estimating;

/// <summary>Quantiles of two-sided intervals.</summary>
public static class Quantiles
{
    /// <summary>z with P(|N(0,1)| &lt;= z) = confidence.</summary>
    public static double Normal(double confidence) => MathNet.Numerics.Distributions.Normal.InvCDF(0, 1, (1 + confidence) / 2);

    /// <summary>t with P(|t_f| &lt;= t) = confidence, f degrees of freedom.</summary>
    public static double Student(double confidence, int degreesOfFreedom) =>
        StudentT.InvCDF(0, 1, degreesOfFreedom, (1 + confidence) / 2);
}
