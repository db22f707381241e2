// Every vector kernel against its scalar twin, bit for bit, for every length up to 256 rows and beyond a chunk.

using System.Numerics;
using ScaleResist.DataGen.Networks;
using ScaleResist.Graphs;
using ScaleResist.Kernels;
using ScaleResist.Solving;

namespace ScaleResist.Tests.Kernels;

public unsafe class KernelTwinTests
{
    public static TheoryData<double> Spreads => [0.0, 3.0];

    [Theory]
    [MemberData(nameof(Spreads))]
    public void Float_kernels_equal_their_scalar_twins(double decades) => AllLengths<float>(decades);

    [Theory]
    [MemberData(nameof(Spreads))]
    public void Double_kernels_equal_their_scalar_twins(double decades) => AllLengths<double>(decades);

    [Fact]
    public void Deflation_kernels_equal_their_scalar_twins()
    {
        using Panel<float> x = Filled<float>(300, 3);
        double[] vector = All(), scalar = [];
        WithScalar(() => scalar = All());
        Assert.Equal(vector, scalar);
        Assert.Contains(vector, value => value != 0);

        double[] All()
        {
            double[] values = new double[(16 * 16) + 48];
            float[] reduced = new float[16];
            fixed (double* sums = values)
            fixed (float* y = reduced)
            {
                double* row = sums + 256, combined = row + 16;
                for (int u = 0; u < 299; u++)
                {
                    float* own = x.Pointer + (16 * u);
                    DeflationKernels.AddDifference(own, own + 16, 0.1 + u, row);
                    DeflationKernels.AddProducts(own, row, sums);
                }
                DeflationKernels.Combine(row, sums, combined);
                DeflationKernels.Reduce(x.Pointer, x.Pointer + 16, x.Pointer + 32, y);
                DeflationKernels.Widen(y, combined + 16);
            }
            return values;
        }
    }

    [Theory]
    [MemberData(nameof(Spreads))]
    public void Probe_kernels_equal_their_scalar_twins(double decades)
    {
        Network network = TestNetworks.Of(Family.Preferential, 300, decades: decades);
        using Panel<float> b = new(300), twin = new(300), z = Filled<float>(300, 9);
        foreach (int panel in new[] { 0, 1, 7, 8, 13 })
        {
            uint lanes = ProbeKernels.LanesOf(panel == 13 ? 5 : 16);
            ProbeKernels.Fill(network, 11, panel, lanes, b, 0, 300);
            float[] vector = new float[2 * network.Neighbours.Length];
            float[] scalar = new float[2 * network.Neighbours.Length];
            double[] squares = new double[300], squaresTwin = new double[300];
            Squares(vector);
            LaneSums sumsTwin = default;
            WithScalar(() =>
            {
                ProbeKernels.Fill(network, 11, panel, lanes, twin, 0, 300);
                Squares(scalar);
                sumsTwin = NodeRows(squaresTwin, twin);
            });
            LaneSums sums = NodeRows(squares, b);
            AssertSame(b, twin);
            Assert.Equal(vector, scalar);
            Assert.Equal(squares, squaresTwin);
            for (int lane = 0; lane < 16; lane++)
                Assert.Equal(sums[lane], sumsTwin[lane]);

            // Changes the rows of b as well: links are added to them again.
            LaneSums NodeRows(double[] into, Panel<float> b)
            {
                LaneSums sums = default;
                for (int u = 0; u < 300; u++)
                {
                    float* row = b.Pointer + (16 * u), next = z.Pointer + (16 * ((u + 1) % 300));
                    NodeKernels.AddOffsets(z.Pointer + (16 * u), next, network.Strengths[u], ref sums);
                    into[u] = NodeKernels.AddSquares(z.Pointer + (16 * u), next, row, 0.3f, network.Strengths[u], ref sums);
                    ProbeKernels.AddLink(row, (float)network.Strengths[u], (uint)(u * 7919) & 0xFFFF, lanes);
                }
                return sums;
            }

            void Squares(float[] into)
            {
                for (int u = 0; u < 300; u++)
                {
                    for (long k = network.RowStart[u]; k < network.RowStart[u + 1]; k++)
                    {
                        int v = network.Neighbours[k];
                        uint signs = ProbeKernels.Signs(network.NodeKeys[u], network.NodeKeys[v], 11, panel);
                        (into[2 * k], into[(2 * k) + 1]) = ProbeKernels.LinkSquares(
                            z.Pointer + (16 * u), z.Pointer + (16 * v), b.Pointer + (16 * u), b.Pointer + (16 * v),
                            0.3f, 0.7f, signs, 1.5f, lanes);
                    }
                }
            }
        }
    }

    [Theory]
    [MemberData(nameof(Spreads))]
    public void Walk_kernels_equal_their_scalar_twins(double decades)
    {
        Network network = TestNetworks.Of(Family.Preferential, 300, decades: decades);
        float[] weights = [.. Enumerable.Range(0, 300).Select(u => u % 7 == 0 ? 0 : (float)(1 / network.Strengths[u]))];
        using Panel<float> x = Filled<float>(300, 3), z = Filled<float>(300, 4), y = new(300), twin = new(300);
        float[] vector = [], scalar = [];
        vector = All(y);
        WithScalar(() => scalar = All(twin));
        AssertSame(y, twin);
        Assert.Equal(vector, scalar);
        Assert.Contains(vector, value => value != 0);

        float[] All(Panel<float> into)
        {
            WalkKernels.Step(network.Laplacian, weights, x, into, 0, 300);
            float* factors = stackalloc float[6] { 0.3f, 0.7f, 0.2f, -0.4f, 0.15f, 0.6f };
            List<float> squares = [];
            for (int u = 1; u < 300; u++)
            {
                foreach (bool further in (ReadOnlySpan<bool>)[false, true])
                {
                    (float shorted, float single) = ProbeKernels.LinkSquares(
                        z.Pointer, x.Pointer, into.Pointer, further ? z.Pointer : null, u, u - 1, factors, (uint)(u * 7919) & 0xFFFF, 1.5f, 0x7FFF);
                    squares.AddRange([shorted, single]);
                }
            }
            return [.. squares];
        }
    }

    [Theory]
    [InlineData(Family.Grid, 400)]
    [InlineData(Family.Road, 700)]
    [InlineData(Family.SmallWorld, 300)]
    public void Factor_and_elimination_kernels_equal_their_scalar_twins(Family family, int nodes)
    {
        Network network = TestNetworks.Of(family, nodes, decades: 2);
        Sweep<float>(network);
        Sweep<double>(network);
    }

    private static void Sweep<T>(Network network)
        where T : unmanaged, INumber<T>
    {
        int n = network.NodeCount;
        SampledFactor factor = SampledFactor.Of(network.Laplacian, 2, 1);
        EliminationStep[] steps = [.. Elimination.Of(network.Laplacian, network.Components[0]).Steps];
        using Panel<T> x = Filled<T>(n, 5), r = Filled<T>(n, 1), p = Filled<T>(n, 4), y = Filled<T>(n, 2), b = Filled<T>(n, 3);
        using Panel<T> x2 = Filled<T>(n, 5), r2 = Filled<T>(n, 1), p2 = Filled<T>(n, 4), y2 = Filled<T>(n, 2), b2 = Filled<T>(n, 3);
        LaneSums factors = Factors();
        List<LaneSums> vector = Run(x, r, p, y, b), scalar = [];
        WithScalar(() => scalar = Run(x2, r2, p2, y2, b2));
        AssertSame(x, x2);
        AssertSame(r, r2);
        AssertSame(p, p2);
        AssertSame(y, y2);
        AssertSame(b, b2);
        for (int i = 0; i < vector.Count; i++)
        {
            for (int lane = 0; lane < Panel<T>.Width; lane++)
                Assert.Equal(scalar[i][lane], vector[i][lane]);
        }

        List<LaneSums> Run(Panel<T> x, Panel<T> r, Panel<T> p, Panel<T> y, Panel<T> b)
        {
            FactorHalf rows = new(factor.RowStart, factor.Predecessors, factor.RowShares);
            LaneSums first = FactorKernels.Forward(rows, factor.Inverse, r, y, n);
            FactorKernels.Back(new FactorHalf(factor.ColumnStart, factor.Successors, factor.ColumnShares), factor.Inverse, y, p, factors, n);
            LaneSums second = FactorKernels.StepForward(rows, factor.Inverse, x, r, p, y, factors, n);
            LaneSums energy = FactorKernels.Eliminate<T>(steps, b);
            FactorKernels.Restore<T>(steps, b);
            return [first, second, energy, PanelKernels.Squares(b, 0, n)];
        }
    }

    private static void AllLengths<T>(double decades)
        where T : unmanaged, INumber<T>
    {
        for (int n = 2; n <= 256; n += n < 40 ? 1 : 9)
            Compare<T>(TestNetworks.Of(Family.Cycle, Math.Max(n, 3), decades: decades), 0);
        Compare<T>(TestNetworks.Of(Family.Grid, 900, decades: decades), 0);
        Compare<T>(TestNetworks.Of(Family.SmallWorld, 700, decades: decades), 130);
    }

    private static void Compare<T>(Network network, int start)
        where T : unmanaged, INumber<T>
    {
        int n = network.NodeCount;
        using Panel<T> x = Filled<T>(n, 1), r = Filled<T>(n, 2), p = Filled<T>(n, 3), q = Filled<T>(n, 4), s = new(n);
        using Panel<T> x2 = Filled<T>(n, 1), r2 = Filled<T>(n, 2), p2 = Filled<T>(n, 3), q2 = Filled<T>(n, 4), s2 = new(n);
        LaneSums factors = Factors();
        SplitLaplacian split = SplitLaplacian.Of(network.Laplacian);
        List<LaneSums> vector = Run(x, r, p, q, s);
        List<LaneSums> scalar = [];
        WithScalar(() => scalar = Run(x2, r2, p2, q2, s2));
        AssertSame(x, x2);
        AssertSame(r, r2);
        AssertSame(p, p2);
        AssertSame(q, q2);
        AssertSame(s, s2);
        for (int i = 0; i < vector.Count; i++)
        {
            for (int lane = 0; lane < Panel<T>.Width; lane++)
                Assert.Equal(scalar[i][lane], vector[i][lane]);
        }

        List<LaneSums> Run(Panel<T> x, Panel<T> r, Panel<T> p, Panel<T> q, Panel<T> s)
        {
            List<LaneSums> sums =
            [
                PanelKernels.Multiply(network.Laplacian, p, q, start, n),
                PanelKernels.Residual(network.Laplacian, r, x, null, start, n),
                PanelKernels.Residual(network.Laplacian, r, x, s, start, n),
            ];
            GaussSeidelKernels.Start(split, s, s, start, n, out LaneSums squares, out LaneSums energies);
            sums.Add(squares);
            sums.Add(energies);
            sums.Add(GaussSeidelKernels.Back(split, s, p, q, factors, start, n));
            sums.Add(GaussSeidelKernels.Forward(split, x, s, p, q, factors, start, n));
            PanelKernels.Centre(x, start, n);
            return sums;
        }
    }

    // The first lane's is 0.
    private static LaneSums Factors()
    {
        LaneSums factors = default;
        for (int lane = 0; lane < 16; lane++)
            factors[lane] = 0.1 * lane;
        return factors;
    }

    // The switch is shared with tests that run beside this one; both settings give the same bits, so they may run either.
    private static void WithScalar(Action action)
    {
        PanelKernels.Scalar = true;
        try
        {
            action();
        }
        finally
        {
            PanelKernels.Scalar = false;
        }
    }

    private static Panel<T> Filled<T>(int rows, int seed)
        where T : unmanaged, INumber<T>
    {
        Panel<T> panel = new(rows);
        Random random = new(seed);
        for (int u = 0; u < rows; u++)
        {
            foreach (ref T value in panel.Row(u))
                value = T.CreateTruncating(random.NextDouble() - 0.5);
        }
        return panel;
    }

    private static void AssertSame<T>(Panel<T> one, Panel<T> other)
        where T : unmanaged
    {
        for (int u = 0; u < one.Rows; u++)
            Assert.True(one.Row(u).SequenceEqual(other.Row(u)), $"row {u}");
    }
}
