// A number and what it is worth.
// Invariant: Lower <= Value <= Upper; an exact value has StandardError 0 and both ends equal to it.

namespace ScaleResist.Estimating;

/// <summary>A value with one standard error and an interval of the confidence asked for.</summary>
/// <param name="Value">The estimate.</param>
/// <param name="StandardError">One standard error; 0 where exact.</param>
/// <param name="Lower">Lower end of the interval.</param>
/// <param name="Upper">Upper end of the interval.</param>
public readonly record struct Estimate(double Value, double StandardError, double Lower, double Upper)
{
    /// <summary>A value without error.</summary>
    public static Estimate Exact(double value) => new(value, 0, value, value);

    /// <summary>The same with a bias of at most so much on top, as a solver leaves: its whole size goes to the ends, and to the error as if it were one.</summary>
    /// <param name="bias">The most it can be, either way.</param>
    /// <param name="least">What the truth cannot lie below.</param>
    internal Estimate WithBias(double bias, double least) => this with
    {
        StandardError = Math.Sqrt((StandardError * StandardError) + (bias * bias)),
        Lower = Math.Min(Lower, Math.Max(least, Lower - bias)),
        Upper = Upper + bias,
    };
}
