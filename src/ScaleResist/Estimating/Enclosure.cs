// Two numbers between which a resistance lies, whatever the solver did: Thomson's and Dirichlet's principles from one vector of potentials.
// Invariant: Lower <= R <= Upper in exact arithmetic on the network's conductances as they are stored; rounding is bounded and paid for.
//
// For b = e_u - e_v and any x, with D = b'x and Q = x'Lx:
//     D^2 / Q <= R                                     (Dirichlet; the best multiple of x)
//     R <= sum f^2 / c for any unit flow f             (Thomson)
// The flow C B x has the divergence L x, not b. With g the flow that carries r = b - L x along a tree, f = C B x + g is a unit flow, and because
// B'g = r, its energy is Q + 2 r'x + sum g^2/c = 2 D - Q + E, E the energy of g. So the width is E and a term of second order: the square of
// the solve's energy error times the tree's stretch.

namespace ScaleResist.Estimating;

/// <summary>R lies in [Lower, Upper].</summary>
/// <param name="Lower">Not above R.</param>
/// <param name="Upper">Not below R.</param>
public readonly record struct Enclosure(double Lower, double Upper)
{
    /// <summary>Between different components.</summary>
    public static Enclosure Infinite { get; } = new(double.PositiveInfinity, double.PositiveInfinity);

    /// <summary>The middle.</summary>
    public double Middle => Lower == Upper ? Lower : Lower + ((Upper - Lower) / 2);

    /// <summary>Upper - Lower, as a share of the middle; 0 for a point, also at infinity.</summary>
    public double RelativeWidth => Lower == Upper ? 0 : (Upper - Lower) / Middle;

    /// <summary>The bounds that computed values give.</summary>
    /// <param name="drop">D = x_u - x_v, of one rounding.</param>
    /// <param name="energy">Q, to a relative error of <paramref name="rounding"/>.</param>
    /// <param name="routed">E, with the rounding of the flow already in it, to the same relative error.</param>
    /// <param name="rounding">A bound on the relative error of sums of positive terms.</param>
    internal static Enclosure Of(double drop, double energy, double routed, double rounding)
    {
        // Four roundings of the formulas themselves are among those that the bound counts for a term.
        double lower = drop > 0 && energy > 0 ? drop * drop / energy * (1 - (2 * rounding)) : 0;
        double upper = (2 * drop) - energy + routed + (2 * rounding * ((2 * drop) + energy + routed));
        return new Enclosure(lower, double.IsNaN(upper) ? double.PositiveInfinity : upper);
    }
}
