// The plain twins of FactorKernels, lane by lane, in the same order of operations.

using System.Numerics;

namespace ScaleResist.Kernels;

/// <summary>Reference kernels; see <see cref="FactorKernels"/> for each one's meaning.</summary>
internal static class FactorKernelTwins
{
    public static LaneSums Forward<T>(FactorHalf rows, float[] inverse, Panel<T> r, Panel<T> y, int n)
        where T : unmanaged, INumber<T>
    {
        LaneSums sums = default;
        for (int chunk = 0; chunk < n; chunk += LaneSums.ChunkRows)
        {
            for (int lane = 0; lane < Panel<T>.Width; lane++)
            {
                T energy = T.Zero;
                for (int v = chunk; v < Math.Min(n, chunk + LaneSums.ChunkRows); v++)
                {
                    T sum = Gathered(rows, y, v, lane, r.Row(v)[lane]);
                    y.Row(v)[lane] = sum;
                    energy += T.CreateTruncating(inverse[v]) * sum * sum;
                }
                sums[lane] += double.CreateTruncating(energy);
            }
        }
        return sums;
    }

    public static LaneSums StepForward<T>(
        FactorHalf rows, float[] inverse, Panel<T> x, Panel<T> r, Panel<T> p, Panel<T> q, in LaneSums factors, int n)
        where T : unmanaged, INumber<T>
    {
        for (int v = 0; v < n; v++)
        {
            for (int lane = 0; lane < Panel<T>.Width; lane++)
            {
                T a = T.CreateTruncating(factors[lane]);
                x.Row(v)[lane] += a * p.Row(v)[lane];
                r.Row(v)[lane] -= a * q.Row(v)[lane];
            }
        }
        return Forward(rows, inverse, r, q, n);
    }

    public static void Back<T>(FactorHalf columns, float[] inverse, Panel<T> y, Panel<T> p, in LaneSums factors, int n)
        where T : unmanaged, INumber<T>
    {
        for (int v = n - 1; v >= 0; v--)
        {
            for (int lane = 0; lane < Panel<T>.Width; lane++)
            {
                T sum = Gathered(columns, y, v, lane, T.CreateTruncating(inverse[v]) * y.Row(v)[lane]);
                T beta = T.CreateTruncating(factors[lane]);
                y.Row(v)[lane] = sum;
                p.Row(v)[lane] = beta == T.Zero ? sum : sum + (beta * p.Row(v)[lane]);
            }
        }
    }

    private static T Gathered<T>(FactorHalf half, Panel<T> panel, int place, int lane, T sum)
        where T : unmanaged, INumber<T>
    {
        for (long k = half.Start[place]; k < half.Start[place + 1]; k++)
            sum += T.CreateTruncating(half.Share[k]) * panel.Row(half.Index[k])[lane];
        return sum;
    }

    public static LaneSums Eliminate<T>(ReadOnlySpan<EliminationStep> steps, Panel<T> b)
        where T : unmanaged, INumber<T>
    {
        LaneSums sums = default;
        for (int lane = 0; lane < Panel<T>.Width; lane++)
        {
            for (int chunk = 0; chunk < steps.Length; chunk += LaneSums.ChunkRows)
            {
                T energy = T.Zero;
                foreach (ref readonly EliminationStep step in steps[chunk..Math.Min(steps.Length, chunk + LaneSums.ChunkRows)])
                {
                    T own = b.Row(step.Node)[lane];
                    energy += T.CreateTruncating(step.Inverse) * own * own;
                    b.Row(step.A)[lane] += T.CreateTruncating(step.ShareA) * own;
                    if (step.B >= 0)
                        b.Row(step.B)[lane] += T.CreateTruncating(step.ShareB) * own;
                    if (step.C >= 0)
                        b.Row(step.C)[lane] += T.CreateTruncating(step.ShareC) * own;
                }
                sums[lane] += double.CreateTruncating(energy);
            }
        }
        return sums;
    }

    public static void Restore<T>(ReadOnlySpan<EliminationStep> steps, Panel<T> x)
        where T : unmanaged, INumber<T>
    {
        for (int i = steps.Length - 1; i >= 0; i--)
        {
            EliminationStep step = steps[i];
            for (int lane = 0; lane < Panel<T>.Width; lane++)
            {
                T sum = (T.CreateTruncating(step.Inverse) * x.Row(step.Node)[lane])
                    + (T.CreateTruncating(step.ShareA) * x.Row(step.A)[lane]);
                if (step.B >= 0)
                    sum += T.CreateTruncating(step.ShareB) * x.Row(step.B)[lane];
                if (step.C >= 0)
                    sum += T.CreateTruncating(step.ShareC) * x.Row(step.C)[lane];
                x.Row(step.Node)[lane] = sum;
            }
        }
    }
}
