// The resistance of a link from its probes, given what its end nodes already tell.
//
// Let e = (u,v) with conductance c, strengths d, g = 1/(d_u - c) + 1/(d_v - c). By Rayleigh's monotonicity
//     lower = g / (1 + c g)  <=  R  <=  upper = 1/c,       upper - lower = 1 / (c (1 + c g)):
// lower when all other neighbours of u and v are shorted into one node, upper when nothing else joins u and v.
// A probe z = L+ b, b = B' C^(1/2) q gives, with D = z_u - z_v, two residuals
//     x1 = D - [b_u/(d_u - c) - b_v/(d_v - c)] / (1 + c g)      (what shorted neighbours would make of D)
//     x2 = D - q_e / sqrt(c)                                    (what a lone link would make of D)
// From Cov(z) = L+, Cov(D, q_e) = sqrt(c) R, Cov(D, b_u) = -Cov(D, b_v) = 1 follow Var x1 = R - lower, Var x2 = upper - R,
// Cov(x1, x2) = 0. With s = (R - lower)/(upper - lower) in (0,1), a = mean x1^2 / (upper - lower), e = mean x2^2 / (upper - lower)
// over K probes, the Gaussian likelihood is
//     -2/K log = log s + log(1 - s) + a/s + e/(1 - s) + const,
// stationary where 2s^3 + (e - a - 3)s^2 + (1 + 2a)s - a = 0; its information a sample is (1/s^2 + 1/(1-s)^2)/2.
// Each residual alone estimates R with relative error sqrt(2/K) of ITS variance; the likelihood weighs both by itself.

using System.Runtime.CompilerServices;


namespace ScaleResist.Estimating;

/// <summary>What conditioning on the two end nodes says of a link before any probe.</summary>
/// <param name="Lower">The least resistance the link can have: g / (1 + c g), or more where it is <see cref="Raised"/>.</param>
/// <param name="Upper">1 / c: the most.</param>
/// <param name="FactorU">Factor of b_u in the first residual: 1 / ((d_u - c)(1 + c g)).</param>
/// <param name="FactorV">Factor of b_v.</param>
public readonly record struct LinkBounds(double Lower, double Upper, double FactorU, double FactorV)
{
    private const double RoundOff = 1e-14;

    /// <summary>Upper - Lower, without cancellation; 0 where the link is as good as alone.</summary>
    public double Range { get; private init; }

    /// <summary>The bounds of a link of conductance c between nodes of strengths d_u and d_v, both above c (so it is no lone link).</summary>
    [MethodImpl(MethodImplOptions.AggressiveInlining)]
    public static LinkBounds Of(double c, double du, double dv)
    {
        // Where all else at an end is lost in rounding beside c, the link is as good as alone.
        if (!(du - c > RoundOff * du && dv - c > RoundOff * dv))
            return new LinkBounds(1 / c, 1 / c, 0, 0) { Range = 0 };
        double restU = 1 / (du - c), restV = 1 / (dv - c);
        double g = restU + restV;
        double damp = 1 / (1 + (c * g));
        return new LinkBounds(g * damp, 1 / c, restU * damp, restV * damp) { Range = damp / c };
    }

    /// <summary>The same with a lower bound that is higher by less than the range.</summary>
    public LinkBounds Raised(double gain) => this with { Lower = Lower + gain, Range = Range - gain };

    /// <summary>The same for two nodes that no link joins: R >= 1/d_u + 1/d_v, without an upper end.</summary>
    public static LinkBounds OfPair(double du, double dv) =>
        new((1 / du) + (1 / dv), double.PositiveInfinity, 1 / du, 1 / dv) { Range = double.PositiveInfinity };
}

/// <summary>The maximum-likelihood estimate of a link's resistance from the squares of its two residuals.</summary>
public static class LinkLikelihood
{
    /// <summary>The estimate with its standard error and an interval symmetric in log(s / (1-s)), which stays within the bounds.</summary>
    /// <param name="bounds">Of the link.</param>
    /// <param name="shorted">Sum over the probes of x1^2.</param>
    /// <param name="single">Sum over the probes of x2^2.</param>
    /// <param name="probes">K.</param>
    /// <param name="quantile">Of the standard normal, for the confidence wanted.</param>
    public static Estimate Estimate(in LinkBounds bounds, double shorted, double single, int probes, double quantile)
    {
        if (bounds.Range == 0)
            return Estimating.Estimate.Exact(bounds.Upper);
        double scale = 1 / (probes * bounds.Range);
        double s = Maximise(shorted * scale, single * scale);
        double rest = 1 - s;
        double root = Math.Sqrt(2.0 / probes) / Math.Sqrt((s * s) + (rest * rest)); // standard error of log(s / (1-s))
        double stretch = Math.Exp(quantile * root);
        return new Estimate(
            bounds.Lower + (s * bounds.Range),
            bounds.Range * s * rest * root,
            bounds.Lower + (bounds.Range * s / (s + (rest * stretch))),
            bounds.Lower + (bounds.Range * s * stretch / ((s * stretch) + rest)));
    }

    /// <summary>Two nodes without a link: R = lower + mean x1^2, interval symmetric in log(R - lower).</summary>
    /// <inheritdoc cref="Estimate"/>
    public static Estimate EstimatePair(in LinkBounds bounds, double shorted, int probes, double quantile)
    {
        double variance = shorted / probes;
        double root = Math.Sqrt(2.0 / probes);
        double stretch = Math.Exp(quantile * root);
        return new Estimate(
            bounds.Lower + variance, variance * root, bounds.Lower + (variance / stretch), bounds.Lower + (variance * stretch));
    }

    /// <summary>The s in [0,1] that minimises log s + log(1-s) + a/s + e/(1-s), for a, e >= 0.</summary>
    public static double Maximise(double a, double e)
    {
        if (!(a > 0))
            return 0;
        if (!(e > 0))
            return 1;
        // s^3 + b s^2 + c s + d = 0 through s = t - b/3: t^3 + 3p t + 2q = 0 (Cardano).
        double b = (e - a - 3) / 2, c = (1 + (2 * a)) / 2, d = -a / 2;
        double shift = b / 3;
        double p = (c / 3) - (shift * shift);
        double q = (shift * shift * shift) - (shift * c / 2) + (d / 2);
        double discriminant = (q * q) + (p * p * p);
        if (discriminant > 0)
        {
            double w = Math.Cbrt(Math.Abs(q) + Math.Sqrt(discriminant));
            double t = p == 0 && w == 0 ? 0 : (p / w) - w;
            return Polish((q < 0 ? -t : t) - shift, a, e);
        }
        double radius = 2 * Math.Sqrt(-p);
        double angle = Math.Acos(Math.Clamp(-q / (-p * Math.Sqrt(-p)), -1, 1)) / 3;
        double best = double.NaN, least = double.PositiveInfinity;
        for (int k = -1; k <= 1; k++)
        {
            double root = (radius * Math.Cos(angle + (k * 2 * Math.PI / 3))) - shift;
            if (root is <= 0 or >= 1)
                continue;
            double value = Math.Log(root * (1 - root)) + (a / root) + (e / (1 - root));
            if (value < least)
                (best, least) = (root, value);
        }
        return Polish(best, a, e);
    }

    // Two Newton steps on the cubic take the last digits that the closed form loses where a or e is tiny.
    private static double Polish(double s, double a, double e)
    {
        if (!(s is > 0 and < 1))
            s = a / (a + e);
        for (int step = 0; step < 2; step++)
        {
            double value = (((((2 * s) + (e - a - 3)) * s) + (1 + (2 * a))) * s) - a;
            double slope = (((6 * s) + (2 * (e - a - 3))) * s) + (1 + (2 * a));
            double next = s - (value / slope);
            if (next is > 0 and < 1)
                s = next;
        }
        return s;
    }
}
