// The nodes, components and coordinates tables.
// Invariant: one row a node, in internal order.

using ScaleResist.Estimating;
using ScaleResist.Graphs;

namespace ScaleResist.Runs;

/// <summary>Writes one row a node.</summary>
internal static class NodeRows
{
    private const int BatchRows = 1 << 20;

    /// <summary>The components table.</summary>
    public static void WriteComponents(Network network, ITableWriter writer, CancellationToken cancel)
    {
        int[] componentOf = network.ComponentOfNodes();
        InBatches(network.NodeCount, BatchRows, cancel, (start, count) =>
        {
            Array node = LabelColumns.New(network.Labels, count);
            long[] component = new long[count];
            for (int i = 0; i < count; i++)
            {
                LabelColumns.Put(network.Labels, node, i, start + i);
                component[i] = componentOf[start + i];
            }
            writer.Write(new RowBatch(count, [node, component]));
        });
    }

    /// <summary>The nodes table.</summary>
    public static void WriteNodes(
        Network network, NodeSums sums, Estimate[]? toTerminals, double confidence, ITableWriter writer, CancellationToken cancel)
    {
        int[] componentOf = network.ComponentOfNodes();
        double[] trace = new double[network.Components.Count];
        for (int c = 0; c < trace.Length; c++)
            trace[c] = sums.KirchhoffIndex(c, confidence).Value / network.Components[c].Nodes;
        bool[] exact = [.. Enumerable.Range(0, trace.Length).Select(sums.IsExact)];
        Estimate[] diagonal = sums.Diagonals(Quantiles.Normal(confidence));
        Ranks ranks = Ranks.Of(network, diagonal);
        InBatches(network.NodeCount, BatchRows, cancel, (start, count) =>
        {
            Array node = LabelColumns.New(network.Labels, count);
            long[] component = new long[count], degree = new long[count];
            long[] rank = new long[count], rankLower = new long[count], rankUpper = new long[count];
            double[] strength = new double[count], value = new double[count], error = new double[count];
            double[] total = new double[count], closeness = new double[count];
            string[] method = new string[count];
            for (int i = 0; i < count; i++)
            {
                int u = start + i;
                int c = componentOf[u];
                int n = network.Components[c].Nodes;
                LabelColumns.Put(network.Labels, node, i, u);
                component[i] = c;
                degree[i] = network.Degree(u);
                strength[i] = network.Strengths[u];
                value[i] = diagonal[u].Value;
                error[i] = diagonal[u].StandardError;
                total[i] = (n * diagonal[u].Value) + trace[c];
                closeness[i] = n == 1 ? 0 : (n - 1) / total[i]; // by convention 0 for a single node
                rank[i] = ranks.Rank[u];
                rankLower[i] = ranks.Lower[u];
                rankUpper[i] = ranks.Upper[u];
                method[i] = (exact[c] ? ResistanceMethod.Exact : ResistanceMethod.Probe).Name();
            }
            Array[] terminals = toTerminals is null ? [] :
            [
                Array.ConvertAll(toTerminals[start..(start + count)], r => r.Value),
                Array.ConvertAll(toTerminals[start..(start + count)], r => r.StandardError),
            ];
            writer.Write(new RowBatch(
                count, [node, component, degree, strength, value, error, total, closeness, rank, rankLower, rankUpper, method, .. terminals]));
        });
    }

    /// <summary>The coordinates table.</summary>
    public static void WriteCoordinates(
        Network network, Coordinates coordinates, ITableWriter writer, CancellationToken cancel)
    {
        int probes = coordinates.Probes;
        int batch = Math.Max(1, BatchRows * 16 / probes); // about 64 MB of coordinates at a time
        InBatches(network.NodeCount, Math.Min(batch, BatchRows), cancel, (start, count) =>
        {
            Array node = LabelColumns.New(network.Labels, count);
            float[] r = new float[(long)count * probes];
            for (int i = 0; i < count; i++)
            {
                LabelColumns.Put(network.Labels, node, i, start + i);
                coordinates.CopyTo(start + i, r.AsSpan(i * probes, probes));
            }
            writer.Write(new RowBatch(count, [node, network.Strengths.AsSpan(start, count).ToArray(), r]));
        });
    }

    private static void InBatches(int rows, int batch, CancellationToken cancel, Action<int, int> write)
    {
        for (int start = 0; start < rows; start += batch)
        {
            cancel.ThrowIfCancellationRequested();
            write(start, Math.Min(batch, rows - start));
        }
    }
}
