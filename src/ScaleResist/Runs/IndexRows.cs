// The index table: one row a component.

using ScaleResist.Estimating;
using ScaleResist.Graphs;

namespace ScaleResist.Runs;

/// <summary>Global measures of every component.</summary>
internal static class IndexRows
{
    /// <summary>Computes the entries; a single node has Kirchhoff index 0, exactly.</summary>
    public static List<IndexEntry> Of(
        Network network, NodeSums sums, StrengthForms forms, double[]? weights, double[] fosterSums, double confidence)
    {
        List<IndexEntry> entries = new(network.Components.Count);
        for (int c = 0; c < network.Components.Count; c++)
        {
            Component component = network.Components[c];
            double n = component.Nodes;
            double volume = Sum(network.Strengths, component);
            Estimate trace = sums.Trace(c, confidence);
            double degreeIndex = (volume * sums.TraceByStrength(c)) - forms.ByStrength[c];
            entries.Add(new IndexEntry
            {
                ComponentId = c,
                Nodes = component.Nodes,
                Links = network.LinksOf(component),
                TotalConductance = volume / 2,
                KirchhoffIndex = new Estimate(n * trace.Value, n * trace.StandardError, n * trace.Lower, n * trace.Upper),
                MeanResistance = n == 1 ? 0 : trace.Value * 2 / (n - 1),
                DegreeKirchhoffIndex = degreeIndex,
                KemenyConstant = n == 1 ? 0 : degreeIndex / volume,
                NodeWeightedKirchhoffIndex =
                    weights is null ? null : (Sum(weights, component) * sums.TraceByWeight(c)) - forms.ByWeight[c],
                FosterSum = fosterSums[c],
                Method = n == 1 ? "exact" : "probe",
                Probes = n == 1 ? 0 : sums.Probes,
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
