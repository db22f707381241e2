// The second smallest eigenvalue of L of a component and its eigenvector: algebraic connectivity, and the cut that the vector's signs make
// (Fiedler, Czech. Math. J. 23:298, 1973).
//
// Blocks of eight columns: V_0 = (L+)^2 g for random numbers g at the nodes, V_j+1 = L+ V_j, each orthonormal to all before it; Rayleigh-Ritz with L itself on
// all of them (block Krylov: Golub & Underwood 1977). Invariant: the value is a Rayleigh quotient of a vector that sums to zero, so it is never below
// the true one but for rounding, however rough the solves; sums run over fixed pieces in order, so results do not depend on threads.

using MathNet.Numerics.LinearAlgebra;
using MathNet.Numerics.LinearAlgebra.Factorization;
using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Estimating;

/// <summary>Algebraic connectivity of a component and the split by the signs of its vector.</summary>
public sealed record ConnectivityFacts
{
    /// <summary>The Rayleigh quotient lambda.</summary>
    public required double Value { get; init; }

    /// <summary>|L x - lambda x| / |x|: an eigenvalue lies within so much of the value, as a rule within its square over the gap.</summary>
    public required double Residual { get; init; }

    /// <summary>Whether the last block of solves moved the value by less than a thousandth: else it is no more than an upper bound.</summary>
    public required bool Settled { get; init; }

    /// <summary>Blocks of eight solves.</summary>
    public required int Solves { get; init; }

    /// <summary>Nodes on the smaller side.</summary>
    public required int SmallerSide { get; init; }

    /// <summary>Nodes on the larger side.</summary>
    public required int LargerSide { get; init; }

    /// <summary>Links between the sides.</summary>
    public required long LinksCut { get; init; }

    /// <summary>The sum of their conductances.</summary>
    public required double ConductanceCut { get; init; }
}

/// <summary>Finds them.</summary>
internal sealed unsafe class WeakestCut : IDisposable
{
    private const int Width = 8;
    private const int Square = Width * Width;
    private const int RowsPerPiece = 1 << 13;
    private const int Smoothings = 2;
    private const double Enough = 1e-7; // relative residual
    private const double Steady = 1e-11; // relative change of the value
    private const double SettledChange = 1e-3;
    private const double Negligible = 1e-22; // of a squared length: nothing new is left of a column
    private const uint Stream = 4; // of Philox
    private readonly Network network;
    private readonly Component component;
    private readonly int pieces;
    private readonly ParallelOptions options;
    private readonly List<Panel<double>> basis = [];
    private double[,] projected = new double[0, 0];

    private WeakestCut(Network network, Component component, int threads)
    {
        this.network = network;
        this.component = component;
        options = new ParallelOptions { MaxDegreeOfParallelism = threads };
        pieces = (component.Nodes + RowsPerPiece - 1) / RowsPerPiece;
    }

    /// <summary>For a component of at least two nodes.</summary>
    /// <param name="network">The network.</param>
    /// <param name="component">Of it.</param>
    /// <param name="solve">x = L+ b for n x 8; b is 0 outside the component and sums to zero in it.</param>
    /// <param name="mostSolves">Blocks of solves at most, at least 4.</param>
    /// <param name="seed">Of the start.</param>
    /// <param name="threads">Threads for all but the solves.</param>
    public static ConnectivityFacts Of(
        Network network, Component component, Action<Panel<double>, Panel<double>> solve, int mostSolves, ulong seed, int threads)
    {
        using WeakestCut cut = new(network, component, threads);
        return cut.Find(solve, mostSolves, seed);
    }

    private ConnectivityFacts Find(Action<Panel<double>, Panel<double>> solve, int mostSolves, ulong seed)
    {
        Panel<double> next = new(network.NodeCount);
        DrawStart(next, seed);
        int solves = 0;
        for (; solves < Smoothings; solves++)
        {
            Panel<double> smooth = new(network.NodeCount);
            solve(next, smooth);
            next.Dispose();
            next = smooth;
        }
        double value = double.PositiveInfinity, residual = double.PositiveInfinity, change = double.PositiveInfinity;
        double[] vector = [];
        bool whole = false; // the basis spans all that the start reaches
        while (!whole)
        {
            whole = !Add(next);
            (value, double before) = (Ritz(out vector), value);
            (residual, value) = Residual(vector, value);
            change = Math.Abs(before - value) / value;
            if (residual <= Enough * value || change <= Steady || solves >= mostSolves)
                break;
            next = new Panel<double>(network.NodeCount);
            solve(basis[^1], next);
            solves++;
        }
        return Split(vector) with
        {
            Value = value,
            Residual = residual,
            Solves = solves,
            Settled = whole || change <= SettledChange || residual <= SettledChange * value,
        };
    }

    private void DrawStart(Panel<double> b, ulong seed)
    {
        double[] sums = new double[Width];
        for (int u = component.Start; u < component.End; u++)
        {
            ulong key = network.NodeKeys[u];
            Bits128 bits = Philox.Block((uint)key, (uint)(key >> 32), 0, Stream, seed);
            for (int j = 0; j < Width; j++)
            {
                ulong half = j < 4 ? bits.Low : bits.High;
                b.Row(u)[j] = ((ushort)(half >> (j % 4 * 16)) / 32767.5) - 1;
                sums[j] += b.Row(u)[j];
            }
        }
        for (int u = component.Start; u < component.End; u++)
        {
            for (int j = 0; j < Width; j++)
                b.Row(u)[j] -= sums[j] / component.Nodes;
        }
    }

    // Takes a block into the basis, orthonormal to it; false where nothing of it is left, and then it is not taken.
    private bool Add(Panel<double> block)
    {
        double scale = 0;
        for (int pass = 0; pass < 2; pass++)
        {
            PanelKernels.Centre(block, component.Start, component.End);
            scale = pass == 0 ? Largest(Gram(block, block)) : 1;
            foreach (Panel<double> known in basis)
                Combine(block, known, Negative(Gram(known, block)), replace: false);
            if (!Normalise(block, scale))
            {
                block.Dispose();
                return basis.Count == 0 ? throw new InvalidOperationException("A component has no direction but the constant one.") : false;
            }
        }
        using Panel<double> image = new(network.NodeCount);
        Parallel.For(0, pieces, options, i => PanelKernels.Multiply(network.Laplacian, block, image, StartOf(i), EndOf(i)));
        basis.Add(block);
        Project(image);
        return true;
    }

    // Y = Y T with T'(Y'Y)T = I; columns of which nothing is left become 0.
    private bool Normalise(Panel<double> block, double scale)
    {
        Evd<double> modes = Matrix<double>.Build.Dense(Width, Width, Gram(block, block)).Evd(Symmetricity.Symmetric);
        double[] factor = new double[Square]; // by rows: (k, j)
        bool any = false;
        for (int j = 0; j < Width; j++)
        {
            double length = modes.EigenValues[j].Real;
            if (!(length > Negligible * scale))
                continue;
            any = true;
            for (int k = 0; k < Width; k++)
                factor[(k * Width) + j] = modes.EigenVectors[k, j] / Math.Sqrt(length);
        }
        if (any)
            Combine(block, block, factor, replace: true);
        return any;
    }

    // V'LV, with the new block's rows and columns.
    private void Project(Panel<double> image)
    {
        int size = basis.Count * Width, before = size - Width;
        double[,] grown = new double[size, size];
        for (int i = 0; i < before; i++)
        {
            for (int j = 0; j < before; j++)
                grown[i, j] = projected[i, j];
        }
        for (int block = 0; block < basis.Count; block++)
        {
            double[] part = Gram(basis[block], image);
            for (int i = 0; i < Width; i++)
            {
                for (int j = 0; j < Width; j++)
                    grown[(block * Width) + i, before + j] = grown[before + j, (block * Width) + i] = part[i + (j * Width)];
            }
        }
        projected = grown;
    }

    // The least Ritz value that belongs to a vector, and the vector by node of the component.
    private double Ritz(out double[] found)
    {
        int size = projected.GetLength(0);
        Matrix<double> matrix = Matrix<double>.Build.DenseOfArray(projected);
        double beyond = 10 * matrix.Diagonal().Maximum();
        for (int i = 0; i < size; i++)
        {
            if (matrix[i, i] <= 0)
                matrix[i, i] = beyond; // a column of zeros is no direction
        }
        Evd<double> modes = matrix.Evd(Symmetricity.Symmetric);
        int least = modes.EigenValues.Select((value, i) => (value.Real, i)).Min().i;
        double[] weights = [.. modes.EigenVectors.Column(least)];
        double[] vector = new double[component.Nodes];
        Parallel.For(0, pieces, options, piece =>
        {
            for (int u = StartOf(piece); u < EndOf(piece); u++)
            {
                double sum = 0;
                for (int block = 0; block < basis.Count; block++)
                {
                    Span<double> row = basis[block].Row(u);
                    for (int j = 0; j < Width; j++)
                        sum += weights[(block * Width) + j] * row[j];
                }
                vector[u - component.Start] = sum;
            }
        });
        found = vector;
        return modes.EigenValues[least].Real;
    }

    // |L x - lambda x| / |x|, and the Rayleigh quotient from differences, which keeps its digits.
    private (double Residual, double Value) Residual(double[] x, double value)
    {
        double[] squares = new double[pieces], energies = new double[pieces], misses = new double[pieces];
        Parallel.For(0, pieces, options, piece =>
        {
            for (int u = StartOf(piece); u < EndOf(piece); u++)
            {
                double own = x[u - component.Start], image = 0;
                for (long k = network.RowStart[u]; k < network.RowStart[u + 1]; k++)
                {
                    double c = network.Conductance(k), difference = own - x[network.Neighbours[k] - component.Start];
                    image += c * difference;
                    energies[piece] += 0.5 * c * difference * difference;
                }
                squares[piece] += own * own;
                misses[piece] += (image - (value * own)) * (image - (value * own));
            }
        });
        double square = squares.Sum();
        return (Math.Sqrt(misses.Sum() / square), energies.Sum() / square);
    }

    private ConnectivityFacts Split(double[] x)
    {
        int positive = x.Count(value => value >= 0);
        long links = 0;
        double conductance = 0;
        for (int u = component.Start; u < component.End; u++)
        {
            for (long k = network.FirstLaterArc(u); k < network.RowStart[u + 1]; k++)
            {
                if (x[u - component.Start] >= 0 == x[network.Neighbours[k] - component.Start] >= 0)
                    continue;
                links++;
                conductance += network.Conductance(k);
            }
        }
        return new ConnectivityFacts
        {
            Value = 0,
            Residual = 0,
            Settled = false,
            Solves = 0,
            SmallerSide = Math.Min(positive, x.Length - positive),
            LargerSide = Math.Max(positive, x.Length - positive),
            LinksCut = links,
            ConductanceCut = conductance,
        };
    }

    // A'B, 8 x 8 by columns.
    private double[] Gram(Panel<double> a, Panel<double> b)
    {
        double[][] parts = new double[pieces][];
        Parallel.For(0, pieces, options, piece =>
        {
            double[] part = parts[piece] = new double[Square];
            long start = StartOf(piece);
            fixed (double* to = part)
            {
                DenseKernels.MultiplyAdd(
                    Width, Width, EndOf(piece) - (int)start, a.Pointer + (start * Width), Width, b.Pointer + (start * Width), Width, to, Width);
            }
        });
        double[] sum = new double[Square];
        foreach (double[] part in parts)
        {
            for (int i = 0; i < Square; i++)
                sum[i] += part[i];
        }
        return sum;
    }

    // Rows of Y += V H, or Y = V H, H 8 x 8 by rows.
    private void Combine(Panel<double> y, Panel<double> v, double[] h, bool replace) => Parallel.For(0, pieces, options, piece =>
    {
        double* row = stackalloc double[Width];
        for (int u = StartOf(piece); u < EndOf(piece); u++)
        {
            double* to = y.Pointer + ((long)u * Width);
            new Span<double>(v.Pointer + ((long)u * Width), Width).CopyTo(new Span<double>(row, Width));
            if (replace)
                new Span<double>(to, Width).Clear();
            fixed (double* factor = h)
                DenseKernels.MultiplyAdd(Width, 1, Width, factor, Width, row, 1, to, Width);
        }
    });

    // From A'B by columns to -A'B by rows.
    private static double[] Negative(double[] gram)
    {
        double[] negative = new double[Square];
        for (int i = 0; i < Width; i++)
        {
            for (int j = 0; j < Width; j++)
                negative[(i * Width) + j] = -gram[i + (j * Width)];
        }
        return negative;
    }

    private static double Largest(double[] gram) => Enumerable.Range(0, Width).Max(j => gram[(j * Width) + j]);

    private int StartOf(int piece) => component.Start + (piece * RowsPerPiece);

    private int EndOf(int piece) => Math.Min(component.End, component.Start + ((piece + 1) * RowsPerPiece));

    /// <inheritdoc/>
    public void Dispose()
    {
        foreach (Panel<double> panel in basis)
            panel.Dispose();
    }
}
