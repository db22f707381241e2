// Kirchhoff indices in closed form, for unit conductances: n times the sum of the reciprocals of the Laplacian's eigenvalues other than 0, which are
// sums of those of paths (2 - 2 cos(pi i / n)), cycles (2 - 2 cos(2 pi i / n)) and links (0, 2) where the network is a product of such.
// Source: Gutman & Mohar 1996 (index as trace), Fiedler 1973 (spectra of products), Lukovits, Nikolic & Trinajstic 1999 (path, cycle, star, complete).

using ScaleResist.DataGen.Networks;

namespace ScaleResist.Bench.Coverage;

internal static class ClosedForms
{
    /// <summary>The Kirchhoff index of a family of n nodes, or null where no closed form is known.</summary>
    public static double? Kirchhoff(Family family, int n)
    {
        int side = (int)Math.Round(Math.Sqrt(n)), edge = (int)Math.Round(Math.Cbrt(n));
        return family switch
        {
            Family.Path => ((double)n * n * n - n) / 6,
            Family.Cycle => ((double)n * n * n - n) / 12,
            Family.Star => ((double)n - 1) * (n - 1),
            Family.Complete => n - 1,
            Family.Grid => OfProduct(Path(side), Path(side)),
            Family.Torus => OfProduct(Cycle(side), Cycle(side)),
            Family.Cube => OfProduct(Path(edge), Path(edge), Path(edge)),
            Family.Ladder => OfProduct(Path(n / 2), Path(2)),
            Family.Hypercube => OfProduct([.. Enumerable.Repeat(Path(2), (int)Math.Log2(n))]),
            _ => null,
        };
    }

    private static double[] Path(int n) => [.. Enumerable.Range(0, n).Select(i => 2 - (2 * Math.Cos(Math.PI * i / n)))];

    private static double[] Cycle(int n) => [.. Enumerable.Range(0, n).Select(i => 2 - (2 * Math.Cos(2 * Math.PI * i / n)))];

    // The first eigenvalue of each factor, and so of the product, is 0.
    private static double OfProduct(params double[][] factors)
    {
        double[] sums = [0];
        foreach (double[] factor in factors)
            sums = [.. sums.SelectMany(sum => factor.Select(value => sum + value))];
        return sums.Length * sums.Skip(1).Sum(value => 1 / value);
    }
}
