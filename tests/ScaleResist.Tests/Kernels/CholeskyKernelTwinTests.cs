// The kernels of the exact factor against their scalar twins, bit for bit, for all small sizes and past every tile and block.

using ScaleResist.Kernels;

namespace ScaleResist.Tests.Kernels;

public unsafe class CholeskyKernelTwinTests
{
    [Fact]
    public void Dense_products_equal_their_scalar_twin_entry_by_entry()
    {
        foreach (int m in Sizes(34, 71))
        {
            foreach (int n in Sizes(9, 16, 27))
            {
                foreach (int k in new[] { 1, 2, 8, 65, 130 })
                {
                    Product(m, n, k, lower: false);
                    if (m >= n)
                        Product(m, n, k, lower: true);
                }
            }
        }
    }

    private static void Product(int m, int n, int k, bool lower)
    {
        int stride = m + 8;
        using NativeDoubles a = Filled(stride * k, 1), b = Filled(k * (n + 3), 2), c = Filled(stride * n, 3), twin = Filled(stride * n, 3);
        DenseKernels.MultiplyAdd(m, n, k, a.Pointer, stride, b.Pointer, n + 3, c.Pointer, stride, lower);
        DenseKernelTwins.MultiplyAdd(m, n, k, a.Pointer, stride, b.Pointer, n + 3, twin.Pointer, stride, lower);
        for (int j = 0; j < n; j++)
        {
            for (int i = lower ? j : 0; i < m; i++)
            {
                if (!c.Pointer[i + (j * stride)].Equals(twin.Pointer[i + (j * stride)]))
                    Assert.Fail($"{m} x {n} x {k}: {i}, {j}");
            }
        }
    }

    [Fact]
    public void Inverses_of_panels_and_their_pivots_equal_their_scalar_twin()
    {
        double* x = stackalloc double[64], twin = stackalloc double[64];
        double* pivots = stackalloc double[8], pivotsTwin = stackalloc double[8], outside = stackalloc double[8];
        for (int seed = 0; seed < 50; seed++)
        {
            for (int q = 1; q <= 8; q++)
            {
                Conductances(q, seed, x, outside);
                new Span<double>(x, 64).CopyTo(new Span<double>(twin, 64));
                Assert.Equal(-1, FrontKernels.Invert(q, x, outside, pivots));
                Assert.Equal(-1, FrontKernelTwins.Invert(q, twin, outside, pivotsTwin));
                Same(q, pivots, pivotsTwin);
                for (int i = 0; i < q; i++)
                    Same(q, x + (8 * i), twin + (8 * i));
            }
        }
    }

    [Fact]
    public void A_panel_without_a_way_out_is_refused_at_the_same_node()
    {
        double* x = stackalloc double[64], outside = stackalloc double[8], pivots = stackalloc double[8];
        foreach (int q in new[] { 1, 3, 8 })
        {
            Conductances(q, 1, x, outside);
            new Span<double>(outside, 8).Clear();
            Assert.Equal(q - 1, FrontKernels.Invert(q, x, outside, pivots));
            Conductances(q, 1, x, outside);
            new Span<double>(outside, 8).Clear();
            Assert.Equal(q - 1, FrontKernelTwins.Invert(q, x, outside, pivots));
            Conductances(q, 1, x, outside);
            outside[0] = double.NaN;
            Assert.Equal(0, FrontKernels.Invert(q, x, outside, pivots));
        }
    }

    [Fact]
    public void Sums_shares_and_quadratic_forms_equal_their_scalar_twins()
    {
        double* g = stackalloc double[64], outside = stackalloc double[8], z = stackalloc double[64], zTwin = stackalloc double[64];
        for (int m = 0; m <= 70; m++)
        {
            int stride = m + 8;
            for (int q = 1; q <= 8; q++)
            {
                using NativeDoubles a = Filled(stride * q, m), w = Filled((m * q) + 8, 1), twin = Filled((m * q) + 8, 1);
                for (int j = 0; j < q; j++)
                    new Span<double>(a.Pointer + (j * stride) + m, 8).Clear();
                Conductances(q, m, g, outside);
                FrontKernels.Shares(m, q, a.Pointer, stride, g, w.Pointer);
                FrontKernelTwins.Shares(m, q, a.Pointer, stride, g, twin.Pointer);
                Same((m * q) + 8, w.Pointer, twin.Pointer); // and nothing past the end is touched
                FrontKernels.ColumnSums(m, q, a.Pointer, stride, z);
                FrontKernelTwins.ColumnSums(m, q, a.Pointer, stride, zTwin);
                Same(q, z, zTwin);
                FrontKernels.Quadratic(m, q, w.Pointer, a.Pointer, stride, g, z, 8);
                FrontKernelTwins.Quadratic(m, q, w.Pointer, a.Pointer, stride, g, zTwin, 8);
                for (int j = 0; j < q; j++)
                    Same(q, z + (8 * j), zTwin + (8 * j));
            }
        }
    }

    [Fact]
    public void Scattered_sums_and_gathers_go_where_their_indices_say()
    {
        Random random = new(5);
        for (int count = 0; count <= 60; count++)
        {
            int[] index = [.. Enumerable.Range(0, 90).Where(_ => random.Next(3) > 0 || count > 55).Take(count)];
            double[] from = [.. Enumerable.Range(0, 100).Select(_ => random.NextDouble())], to = [.. from.Reverse()];
            double[] added = [.. to], gathered = new double[100];
            int start = Math.Min(count / 3, index.Length);
            fixed (double* source = from, sum = added, gather = gathered)
            fixed (int* at = index)
            {
                FrontKernels.AddRuns(source, sum, at, start, index.Length);
                FrontKernels.GatherRuns(source, gather, at, index.Length);
            }
            for (int i = start; i < index.Length; i++)
                to[index[i]] += from[i];
            Assert.Equal(to, added);
            Assert.Equal(index.Select(i => from[i]), gathered[..index.Length]);
            Assert.All(gathered[index.Length..], value => Assert.Equal(0, value));
        }
    }

    [Fact]
    public void Substitution_with_panels_equals_its_scalar_twin()
    {
        Substitute<OneVector>();
        Substitute<TwoVectors>();
    }

    private static void Substitute<TWidth>()
        where TWidth : struct, IRowWidth
    {
        int width = 8 * TWidth.Vectors;
        for (int q = 1; q <= 8; q++)
        {
            foreach (int following in new[] { 0, 1, 9 })
            {
                foreach (int count in new[] { 0, 1, 2, 7, 20 })
                {
                    int[] index = [.. Enumerable.Range(0, count).Select(i => 3 + q + following + (2 * i))];
                    int rows = 3 + q + following + (2 * count) + 1;
                    using NativeDoubles x = Filled(rows * width, 1), twin = Filled(rows * width, 1);
                    using NativeDoubles panel = Filled(q * (q + following + count), 2);
                    fixed (int* at = index)
                    {
                        SubstitutionKernels.Forward<TWidth>(q, panel.Pointer + (q * q), x.Pointer, 3, following, at, count);
                        SubstitutionKernels.Back<TWidth>(q, panel.Pointer, x.Pointer, 3, following, at, count);
                        SubstitutionKernelTwins.Forward(width, q, panel.Pointer + (q * q), twin.Pointer, 3, following, at, count);
                        SubstitutionKernelTwins.Back(width, q, panel.Pointer, twin.Pointer, 3, following, at, count);
                    }
                    Same(rows * width, x.Pointer, twin.Pointer);
                }
            }
        }
    }

    private static IEnumerable<int> Sizes(int all, params int[] more) => Enumerable.Range(1, all).Concat(more);

    private static void Conductances(int q, int seed, double* x, double* outside)
    {
        Random random = new((10 * seed) + q);
        new Span<double>(x, 64).Clear();
        for (int i = 0; i < 8; i++)
        {
            outside[i] = random.Next(2) == 0 && i > 0 ? 0 : random.NextDouble();
            for (int j = 0; j < i && i < q; j++)
                x[(8 * i) + j] = x[(8 * j) + i] = random.NextDouble();
        }
    }

    private static NativeDoubles Filled(int length, int seed)
    {
        NativeDoubles block = new(length);
        Random random = new(seed);
        for (int i = 0; i < length; i++)
            block.Pointer[i] = random.NextDouble() - 0.3;
        return block;
    }

    private static void Same(int length, double* one, double* other) =>
        Assert.Equal(new Span<double>(other, length).ToArray(), new Span<double>(one, length).ToArray());
}
