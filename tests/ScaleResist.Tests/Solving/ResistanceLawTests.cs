// The solver against what is known of resistances: determinants, spectra, circuit laws, monotonicity, published values.

using MathNet.Numerics.LinearAlgebra;
using ScaleResist.DataGen.Networks;
using ScaleResist.Graphs;

namespace ScaleResist.Tests.Solving;

public class ResistanceLawTests
{
    private const double Tight = 1e-8;

    [Fact]
    public void Determinant_ratio_gives_the_same_resistance()
    {
        // R(u,v) = det(L without rows and columns u, v) / det(L without u). Source: common practice (all-minors matrix tree theorem).
        for (int seed = 0; seed < 12; seed++)
        {
            Network network = TestNetworks.Random(6 + (3 * seed), 9 + (6 * seed), seed, decades: seed % 3);
            Matrix<double> laplacian = network.DenseLaplacian();
            (int u, int v) = (0, network.NodeCount - 1);
            double ratio = Without(laplacian, u, v).Determinant() / Without(laplacian, u).Determinant();
            Near(ratio, Solved.Resistance(network, u, v));
        }
    }

    [Fact]
    public void Spectral_formula_gives_the_same_resistance_and_index()
    {
        // R(u,v) = sum (x_u - x_v)^2 / lambda, Kf = n sum 1/lambda over lambda > 0 (Gutman & Mohar 1996).
        Network network = TestNetworks.Random(40, 90, 7, decades: 2);
        MathNet.Numerics.LinearAlgebra.Factorization.Evd<double> spectrum = network.DenseLaplacian().Evd(Symmetricity.Symmetric);
        for (int v = 1; v < 40; v += 7)
        {
            double sum = 0;
            for (int i = 1; i < 40; i++)
            {
                double difference = spectrum.EigenVectors[0, i] - spectrum.EigenVectors[v, i];
                sum += difference * difference / spectrum.EigenValues[i].Real;
            }
            Near(sum, Solved.Resistance(network, 0, v));
        }
        Near(40 * Enumerable.Range(1, 39).Sum(i => 1 / spectrum.EigenValues[i].Real), Solved.KirchhoffIndex(network));
    }

    [Fact]
    public void Series_resistances_add()
    {
        Network network = TestNetworks.Of((1, 2, 2), (2, 3, 0.25), (3, 4, 8));
        Near(0.5 + 4 + 0.125, Solved.ResistanceOf(network, 1, 4));
    }

    [Fact]
    public void Path_of_conductances_1_tenth_1_gives_1_11_12()
    {
        Network network = TestNetworks.Of((1, 2, 1), (2, 3, 0.1), (3, 4, 1));
        Near(1, Solved.ResistanceOf(network, 1, 2));
        Near(11, Solved.ResistanceOf(network, 1, 3));
        Near(12, Solved.ResistanceOf(network, 1, 4));
    }

    [Fact]
    public void Parallel_conductances_add()
    {
        Network network = TestNetworks.Of((1, 2, 2), (1, 2, 3), (2, 1, 0.5), (2, 3, 1));
        Near(1 / 5.5, Solved.ResistanceOf(network, 1, 2));
        Assert.Equal(2, network.Cleaning.ParallelLinks);
    }

    [Fact]
    public void Star_and_its_mesh_have_the_same_resistances()
    {
        // A star of conductances a_i equals a mesh of conductances a_i a_j / sum a. Source: common practice (star-mesh transform).
        double[] a = [1, 2, 0.5, 4, 0.25];
        Network star = TestNetworks.Of([.. a.Select((c, i) => ((long)0, (long)(i + 1), c)), (1, 2, 0.7), (3, 5, 1.9)]);
        List<(long, long, double)> mesh = [(1, 2, 0.7), (3, 5, 1.9)];
        for (int i = 0; i < a.Length; i++)
        {
            for (int j = i + 1; j < a.Length; j++)
                mesh.Add((i + 1, j + 1, a[i] * a[j] / a.Sum()));
        }
        Network meshed = TestNetworks.Of([.. mesh]);
        for (int i = 1; i <= a.Length; i++)
        {
            for (int j = i + 1; j <= a.Length; j++)
                Near(Solved.ResistanceOf(star, i, j), Solved.ResistanceOf(meshed, i, j));
        }
    }

    [Fact]
    public void Adding_a_link_raises_no_resistance_and_the_triangle_inequality_holds()
    {
        // Rayleigh's monotonicity law; the triangle inequality of the resistance distance. Source: common practice.
        for (int seed = 0; seed < 8; seed++)
        {
            Network before = TestNetworks.Random(24, 40, seed, decades: 2);
            Matrix<double> r = before.DensePseudoInverse();
            List<(long, long, double)> links = [(before.Labels.Integers[0], before.Labels.Integers[23], 0.5)];
            for (int u = 0; u < 24; u++)
            {
                for (long k = before.FirstLaterArc(u); k < before.RowStart[u + 1]; k++)
                    links.Add((before.Labels.Integers[u], before.Labels.Integers[before.Neighbours[k]], before.Conductance(k)));
            }
            Network after = TestNetworks.Of([.. links]);
            for (int v = 1; v < 24; v++)
            {
                double old = Solved.Resistance(before, 0, v);
                Near(r.Resistance(0, v), old);
                double raised = Solved.ResistanceOf(after, before.Labels.Integers[0], before.Labels.Integers[v]);
                Assert.True(raised <= old + 1e-10);
                for (int w = 1; w < 24; w++)
                    Assert.True(r.Resistance(0, v) <= r.Resistance(0, w) + r.Resistance(w, v) + 1e-10);
            }
        }
    }

    [Theory]
    // Kirchhoff index by family. Sources: closed forms of MathWorld, "Kirchhoff Index" (cycles 2, 5, 10, 35/2, 28, 42; square grids
    // 5, 69/2, 884/7, 11155/33; 6 x 6 by its spectrum, rational; cubic grids 58/3, 16959/70); path n(n^2-1)/6, complete n-1, star (n-1)^2, hypercube
    // 2^d sum C(d,k)/(2k) (Q_4 206/3); 5 x 5 torus 190 (rational, recomputed).
    [InlineData(Family.Path, 10, 165)]
    [InlineData(Family.Cycle, 3, 2)]
    [InlineData(Family.Cycle, 4, 5)]
    [InlineData(Family.Cycle, 5, 10)]
    [InlineData(Family.Cycle, 6, 17.5)]
    [InlineData(Family.Cycle, 7, 28)]
    [InlineData(Family.Cycle, 8, 42)]
    [InlineData(Family.Complete, 12, 11)]
    [InlineData(Family.Star, 12, 121)]
    [InlineData(Family.Grid, 4, 5)]
    [InlineData(Family.Grid, 9, 34.5)]
    [InlineData(Family.Grid, 16, 884.0 / 7)]
    [InlineData(Family.Grid, 25, 11155.0 / 33)]
    [InlineData(Family.Grid, 36, 535131.0 / 715)]
    [InlineData(Family.Cube, 8, 58.0 / 3)]
    [InlineData(Family.Cube, 27, 16959.0 / 70)]
    [InlineData(Family.Hypercube, 16, 206.0 / 3)]
    [InlineData(Family.Torus, 25, 190)]
    [InlineData(Family.Ladder, 6, 71.0 / 5)]
    [InlineData(Family.Ladder, 8, 214.0 / 7)]
    public void Kirchhoff_index_of_a_family_equals_its_closed_form(Family family, int nodes, double index) =>
        Near(index, Solved.KirchhoffIndex(TestNetworks.Of(family, nodes)));

    [Fact]
    public void Polyhedra_have_their_published_resistances()
    {
        // van Steenwijk, Am. J. Phys. 66:90 (1998), from memory; values rational, recomputed exactly.
        Network cube = TestNetworks.Of(Family.Cube, 8);
        Near(7.0 / 12, Solved.ResistanceOf(cube, 0, 1));
        Near(3.0 / 4, Solved.ResistanceOf(cube, 0, 3));
        Near(5.0 / 6, Solved.ResistanceOf(cube, 0, 7));
        Network petersen = TestNetworks.Unit([.. Enumerable.Range(0, 5).SelectMany(i => new (long, long)[]
            { (i, (i + 1) % 5), (i, i + 5), (i + 5, ((i + 2) % 5) + 5) })]);
        Near(3.0 / 5, Solved.ResistanceOf(petersen, 0, 1));
        Near(4.0 / 5, Solved.ResistanceOf(petersen, 0, 2));
        Near(33, Solved.KirchhoffIndex(petersen));
    }

    [Theory]
    // N x N grid, corner to corner: (4/pi) ln N + 0.077318 + 0.266070/N^2 - 0.534779/N^4 (Essam & Wu, J. Phys. A 42, 2009).
    [InlineData(30)]
    [InlineData(60)]
    public void Grid_from_corner_to_corner_follows_Essam_and_Wu(int side)
    {
        double n = side;
        double formula = (4 / Math.PI * Math.Log(n)) + 0.077318 + (0.266070 / (n * n)) - (0.534779 / (n * n * n * n));
        double solved = Solved.ResistanceOf(TestNetworks.Of(Family.Grid, side * side), 0, (side * side) - 1);
        Assert.Equal(formula, solved, 5e-6);
    }

    [Fact]
    public void Middle_of_a_large_grid_approaches_the_infinite_square_lattice()
    {
        // Cserti, Am. J. Phys. 68:896 (2000): (1,0) 1/2; (1,1) 2/pi; (2,0) 2 - 4/pi; (2,1) 4/pi - 1/2. The boundary of a
        // 101 x 101 grid, fifty steps away, explains differences of order 1e-3 at these distances.
        Network grid = TestNetworks.Of(Family.Grid, 101 * 101);
        long middle = (50 * 101) + 50;
        Assert.Equal(0.5, Solved.ResistanceOf(grid, middle, middle + 1), 5e-4);
        Assert.Equal(2 / Math.PI, Solved.ResistanceOf(grid, middle, middle + 102), 5e-4);
        Assert.Equal(2 - (4 / Math.PI), Solved.ResistanceOf(grid, middle, middle + 2), 2e-3);
        Assert.Equal((4 / Math.PI) - 0.5, Solved.ResistanceOf(grid, middle, middle + 2 + 101), 2e-3);
    }

    private static void Near(double expected, double actual) =>
        Assert.True(Math.Abs(actual - expected) <= Tight * Math.Abs(expected), $"expected {expected:R}, got {actual:R}");

    private static Matrix<double> Without(Matrix<double> matrix, params int[] removed)
    {
        foreach (int index in removed.OrderDescending())
            matrix = matrix.RemoveRow(index).RemoveColumn(index);
        return matrix;
    }
}
