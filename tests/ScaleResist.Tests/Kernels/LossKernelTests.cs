// The kernels for the loss of links against their scalar twins, and these against plain sums in doubles.

using ScaleResist.Kernels;

namespace ScaleResist.Tests.Kernels;

public sealed unsafe class LossKernelTests
{
    [Fact]
    public void Both_forms_give_the_same_bits_and_the_plain_sums()
    {
        Random random = new(5);
        float* rows = stackalloc float[4 * 16];
        for (int trial = 0; trial < 200; trial++)
        {
            for (int i = 0; i < 64; i++)
                rows[i] = (float)(random.NextDouble() - 0.5);
            uint u = (uint)random.Next(1 << 16), v = (uint)random.Next(1 << 16);
            float share = (float)random.NextDouble();
            (float Squares, float WithU, float WithV) moments = LossKernels.LinkMoments(rows, rows + 16, u, v), twin;
            float squares = LossKernels.NodeSquares(rows + 32, rows + 48, share), squaresTwin;
            bool before = PanelKernels.Scalar;
            PanelKernels.Scalar = true;
            try
            {
                twin = LossKernels.LinkMoments(rows, rows + 16, u, v);
                squaresTwin = LossKernels.NodeSquares(rows + 32, rows + 48, share);
            }
            finally
            {
                PanelKernels.Scalar = before;
            }
            Assert.Equal(twin, moments);
            Assert.Equal(squaresTwin, squares);
            double square = 0, withU = 0, nodes = 0;
            for (int lane = 0; lane < 16; lane++)
            {
                double d = (double)rows[lane] - rows[16 + lane], rest = rows[32 + lane] - (share * (double)rows[48 + lane]);
                square += d * d;
                withU += (u >> lane & 1) != 0 ? -d : d;
                nodes += rest * rest;
            }
            Assert.Equal(square, moments.Squares, 1e-5);
            Assert.Equal(withU, moments.WithU, 1e-5);
            Assert.Equal(nodes, squares, 1e-5);
        }
    }
}
