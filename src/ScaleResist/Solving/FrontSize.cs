// How large the blocks of a front are and what they cost: one place for what the structure foretells and the numeric parts allocate.
// Invariant: every leading dimension leaves room for the up to seven rows past the last that the kernels may touch.

using ScaleResist.Kernels;

namespace ScaleResist.Solving;

/// <summary>Sizes of a front with s own places and r rows, in doubles; work in floating-point operations.</summary>
internal static class FrontSize
{
    private const int Panel = DenseKernels.Tile;

    /// <summary>Values of the factor: of each panel of q &lt;= 8 places its q x q inverse and its shares.</summary>
    public static long Values(int s, int r)
    {
        long values = 0;
        for (int j = 0; j < s; j += Panel)
            values += (long)Math.Min(Panel, s - j) * (s - j + r);
        return values;
    }

    /// <summary>The leading dimension of a front's own columns: s + r rows and the ground.</summary>
    public static long OwnStride(int s, int r) => Round(s + r + 8L);

    /// <summary>The leading dimension of an update: r rows and the ground.</summary>
    public static long UpdateStride(int r) => Round(r + 1L);

    /// <summary>An update: r columns.</summary>
    public static long Update(int r) => UpdateStride(r) * r;

    /// <summary>The leading dimension of a front of the inverse.</summary>
    public static long InverseStride(int s, int r) => Round(s + r + 8L);

    /// <summary>A front of the inverse: s + r columns, and as much before it as aligns its row s.</summary>
    public static long Inverse(int s, int r) => (InverseStride(s, r) * (s + r)) + 8;

    /// <summary>Doubles to leave out before column 0, so that row s of every column is aligned.</summary>
    public static int Shift(int s) => -s & 7;

    /// <summary>Inverses of panels, shares, the panels' own updates and the update passed on.</summary>
    public static long EliminationOperations(int s, int r)
    {
        long operations = 0;
        for (int j = 0; j < s; j += Panel)
        {
            long q = Math.Min(Panel, s - j), later = s - j - q + r;
            operations += (2 * q * q * q) + (2 * later * q * q) + (q * later * (later + 1));
        }
        return operations;
    }

    /// <summary>Of each panel the product of the later inverse with its shares, and the diagonal block.</summary>
    public static long InversionOperations(int s, int r)
    {
        long operations = 0;
        for (int j = 0; j < s; j += Panel)
        {
            long q = Math.Min(Panel, s - j), later = s - j - q + r;
            operations += 2 * q * later * (later + q);
        }
        return operations;
    }

    private static long Round(long rows) => (rows + 7) & ~7L;
}
