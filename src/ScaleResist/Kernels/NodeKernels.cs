// What a probe says of nodes: x_u = z_u - centre - k b_u / d_u, its squares by node and their weighted sums by probe.
// Reads a row of z and one of b, writes nothing; sums by probe go through doubles row by row.

using System.Runtime.CompilerServices;
using System.Runtime.Intrinsics;

namespace ScaleResist.Kernels;

/// <summary>Sums by probe over some nodes for up to three indices, each with weights of its own.</summary>
[InlineArray(Most)]
internal struct NodeSquareSums
{
    /// <summary>Indices there may be: by number, by strength, by node weight.</summary>
    public const int Most = 3;

    private LaneSums first;

    /// <summary>Adds the sums of other nodes.</summary>
    public void Add(in NodeSquareSums other)
    {
        for (int index = 0; index < Most; index++)
        {
            for (int lane = 0; lane < 16; lane++)
                this[index][lane] += other[index][lane];
        }
    }
}

/// <summary>Kernels on single rows of panels of 16 probes.</summary>
internal static unsafe class NodeKernels
{
    /// <summary>sums += w (z - origin), lane by lane.</summary>
    public static void AddOffsets(float* z, float* origin, double weight, ref LaneSums sums)
    {
        if (PanelKernels.Scalar)
        {
            for (int lane = 0; lane < 16; lane++)
                sums[lane] += weight * (z[lane] - origin[lane]);
            return;
        }
        AddTo(ref sums, weight, Vector512.Load(z) - Vector512.Load(origin));
    }

    /// <summary>sums += w x^2 lane by lane, x = z - centre - factor b; returns the sum of x^2 over the lanes.</summary>
    /// <param name="z">Row of z.</param>
    /// <param name="centre">What to take off z in each lane.</param>
    /// <param name="b">Row of the right-hand side; lanes not in use are 0 in all three.</param>
    /// <param name="factor">k / d.</param>
    /// <param name="weight">w.</param>
    /// <param name="sums">Added to.</param>
    public static double AddSquares(float* z, float* centre, float* b, float factor, double weight, ref LaneSums sums)
    {
        if (PanelKernels.Scalar)
            return AddSquaresScalar(z, centre, b, factor, weight, ref sums);
        Vector512<float> x = Vector512.Load(z) - Vector512.Load(centre) - (Vector512.Create(factor) * Vector512.Load(b));
        x *= x;
        AddTo(ref sums, weight, x);
        (Vector512<double> low, Vector512<double> high) = Vector512.Widen(x);
        Vector512<double> eight = low + high;
        Vector256<double> four = eight.GetLower() + eight.GetUpper();
        Vector128<double> two = four.GetLower() + four.GetUpper();
        return two[0] + two[1];
    }

    private static double AddSquaresScalar(float* z, float* centre, float* b, float factor, double weight, ref LaneSums sums)
    {
        double* halves = stackalloc double[8];
        for (int lane = 0; lane < 16; lane++)
        {
            float x = z[lane] - centre[lane] - (factor * b[lane]);
            double square = x * x;
            sums[lane] += weight * square;
            halves[lane & 7] = lane < 8 ? square : halves[lane & 7] + square;
        }
        // Halves are added to halves, as the vector form does.
        for (int half = 4; half > 0; half /= 2)
        {
            for (int lane = 0; lane < half; lane++)
                halves[lane] += halves[lane + half];
        }
        return halves[0];
    }

    private static void AddTo(ref LaneSums sums, double weight, Vector512<float> values)
    {
        (Vector512<double> low, Vector512<double> high) = Vector512.Widen(values);
        fixed (double* to = &sums[0])
        {
            (Vector512.Load(to) + (weight * low)).Store(to);
            (Vector512.Load(to + 8) + (weight * high)).Store(to + 8);
        }
    }
}
