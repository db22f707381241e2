// The plain twins of FactorKernels, lane by lane, in the same order of operations.

using System.Numerics;

namespace ScaleResist.Kernels;

/// <summary>Reference kernels; see <see cref="FactorKernels"/> for each one's meaning.</summary>
internal static class FactorKernelTwins
{
    public static void Forward<T>(FactorHalf rows, Panel<T> r, Panel<T> y, int n)
        where T : unmanaged, INumber<T>
    {
        for (int v = 0; v < n; v++)
        {
            for (int lane = 0; lane < Panel<T>.Width; lane++)
            {
                T sum = r.Row(v)[lane];
                for (long k = rows.Start[v]; k < rows.Start[v + 1]; k++)
                    sum += T.CreateTruncating(rows.Share[k]) * y.Row(rows.Index[k])[lane];
                y.Row(v)[lane] = sum;
            }
        }
    }

    public static LaneSums Back<T>(FactorHalf columns, float[] inverse, Panel<T> r, Panel<T> y, int n)
        where T : unmanaged, INumber<T>
    {
        LaneSums sums = default;
        for (int chunkEnd = n; chunkEnd > 0; chunkEnd -= LaneSums.ChunkRows)
        {
            int chunk = Math.Max(0, chunkEnd - LaneSums.ChunkRows);
            for (int lane = 0; lane < Panel<T>.Width; lane++)
            {
                T products = T.Zero;
                for (int v = chunkEnd - 1; v >= chunk; v--)
                {
                    T sum = T.CreateTruncating(inverse[v]) * y.Row(v)[lane];
                    for (long k = columns.Start[v]; k < columns.Start[v + 1]; k++)
                        sum += T.CreateTruncating(columns.Share[k]) * y.Row(columns.Index[k])[lane];
                    y.Row(v)[lane] = sum;
                    products += r.Row(v)[lane] * sum;
                }
                sums[lane] += double.CreateTruncating(products);
            }
        }
        return sums;
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
