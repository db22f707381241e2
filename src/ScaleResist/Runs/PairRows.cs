// The pairs table, in the order of the request.

using ScaleResist.Estimating;
using ScaleResist.Graphs;

namespace ScaleResist.Runs;

/// <summary>Writes one row a requested pair.</summary>
internal static class PairRows
{
    /// <summary>Writes all pairs, ends as the user gave them.</summary>
    public static void Write(
        Network network, IReadOnlyList<(int U, int V)> pairs, PairSums sums, double confidence, int threads, ITableWriter writer)
    {
        const int BatchRows = 1 << 20;
        double quantile = Quantiles.Normal(confidence);
        for (int first = 0; first < pairs.Count; first += BatchRows)
        {
            int count = Math.Min(BatchRows, pairs.Count - first);
            Array source = LabelColumns.New(network.Labels, count), target = LabelColumns.New(network.Labels, count);
            double[] value = new double[count], error = new double[count], lower = new double[count], upper = new double[count];
            string[] method = new string[count];
            Parallel.For(0, count, new ParallelOptions { MaxDegreeOfParallelism = threads }, i =>
            {
                (int u, int v) = pairs[first + i];
                LabelColumns.Put(network.Labels, source, i, u);
                LabelColumns.Put(network.Labels, target, i, v);
                (Estimate resistance, ResistanceMethod how) = sums.Estimate(first + i, quantile);
                method[i] = how.Name();
                (value[i], error[i], lower[i], upper[i]) = resistance;
            });
            writer.Write(new RowBatch(count, [source, target, value, error, lower, upper, method]));
        }
    }
}
