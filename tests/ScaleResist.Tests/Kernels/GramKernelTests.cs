// Gram kernels against their scalar twins, bit for bit, for every number of rows.

using ScaleResist.Kernels;

namespace ScaleResist.Tests.Kernels;

public sealed unsafe class GramKernelTests
{
    [Theory]
    [InlineData(false)]
    [InlineData(true)]
    public void Kernels_equal_their_scalar_twins(bool weighted)
    {
        const int Most = 256;
        Random random = new(1);
        using Panel<double> a = new(Most), b = new(Most);
        double[] w = new double[Most];
        for (int u = 0; u < Most; u++)
        {
            w[u] = random.NextDouble();
            for (int j = 0; j < 8; j++)
                (a.Row(u)[j], b.Row(u)[j]) = (random.NextDouble() - 0.5, random.NextDouble() - 0.5);
        }
        double* sums = stackalloc double[80], twins = stackalloc double[80];
        fixed (double* given = w)
        {
            double* weights = weighted ? given : null;
            for (int rows = 0; rows <= Most; rows++)
            {
                new Span<double>(sums, 80).Fill(0.25);
                new Span<double>(twins, 80).Fill(0.25);
                int start = rows / 3;
                GramKernels.Products(a.Pointer, b.Pointer, weights, start, rows, sums);
                GramKernels.Rows(a.Pointer, weights, start, rows, sums + 64);
                GramKernels.Squares(b.Pointer, weights, start, rows, sums + 72);
                GramKernelTwins.Products(a.Pointer, b.Pointer, weights, start, rows, twins);
                GramKernelTwins.Rows(a.Pointer, weights, start, rows, twins + 64);
                GramKernelTwins.Squares(b.Pointer, weights, start, rows, twins + 72);
                Assert.True(new Span<double>(sums, 80).SequenceEqual(new Span<double>(twins, 80)), $"{rows} rows");
            }
        }
    }
}
