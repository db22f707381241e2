// The index table: one row a component.

using ScaleResist.Estimating;
using ScaleResist.Graphs;

namespace ScaleResist.Runs;

/// <summary>Global measures of every component.</summary>
internal static class IndexRows
{
    /// <summary>Computes the entries; trees are exact, a single node with Kirchhoff index 0.</summary>
    public static List<IndexEntry> Of(Network network, NodeSums sums, double[] fosterSums, double[]? logSpanningTrees, ConnectivityFacts? connectivity, double confidence)
    {
        List<IndexEntry> entries = new(network.Components.Count);
        for (int c = 0; c < network.Components.Count; c++)
        {
            Component component = network.Components[c];
            double n = component.Nodes;
            double volume = Sum(network.Strengths, component);
            bool exact = sums.IsExact(c);
            Estimate index = sums.KirchhoffIndex(c, confidence);
            double degreeIndex = sums.DegreeKirchhoffIndex(c, confidence).Value;
            entries.Add(new IndexEntry
            {
                ComponentId = c,
                Nodes = component.Nodes,
                Links = network.LinksOf(component),
                TotalConductance = volume / 2,
                KirchhoffIndex = index,
                MeanResistance = n == 1 ? 0 : index.Value * 2 / (n * (n - 1)),
                DegreeKirchhoffIndex = degreeIndex,
                KemenyConstant = n == 1 ? 0 : degreeIndex / volume,
                NodeWeightedKirchhoffIndex = sums.WeightedKirchhoffIndex(c, confidence)?.Value,
                FosterSum = fosterSums[c],
                LogSpanningTrees = logSpanningTrees is not null && double.IsFinite(logSpanningTrees[c]) ? logSpanningTrees[c] : null,
                AlgebraicConnectivity = c == 0 && connectivity is { Settled: true } ? connectivity.Value : null,
                Method = (exact ? ResistanceMethod.Exact : ResistanceMethod.Probe).Name(),
                Probes = exact ? 0 : sums.Probes,
            });
        }
        return entries;
    }

    /// <summary>Writes the entries.</summary>
    public static void Write(IReadOnlyList<IndexEntry> entries, ITableWriter writer)
    {
        foreach (IndexEntry[] batch in entries.Chunk(1 << 20))
        {
            writer.Write(new RowBatch(batch.Length,
            [
                Column(batch, e => (long)e.ComponentId), Column(batch, e => e.Nodes), Column(batch, e => e.Links),
                Column(batch, e => e.TotalConductance), Column(batch, e => e.KirchhoffIndex.Value),
                Column(batch, e => e.KirchhoffIndex.StandardError), Column(batch, e => e.KirchhoffIndex.Lower),
                Column(batch, e => e.KirchhoffIndex.Upper), Column(batch, e => e.MeanResistance),
                Column(batch, e => e.DegreeKirchhoffIndex), Column(batch, e => e.KemenyConstant),
                Column(batch, e => e.NodeWeightedKirchhoffIndex), Column(batch, e => e.FosterSum),
                Column(batch, e => e.LogSpanningTrees), Column(batch, e => e.AlgebraicConnectivity),
                Column(batch, e => e.Method), Column(batch, e => (long)e.Probes),
            ]));
        }
    }

    private static Array Column<T>(IndexEntry[] entries, Func<IndexEntry, T> value) => Array.ConvertAll(entries, e => value(e));

    private static double Sum(double[] values, Component component)
    {
        double sum = 0;
        for (int u = component.Start; u < component.End; u++)
            sum += values[u];
        return sum;
    }
}
