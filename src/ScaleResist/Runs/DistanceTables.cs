// The tables of a distances run as readers of the lake know them: a contract, as Tables is.

using ScaleResist.Distances;
using ScaleResist.Graphs;

namespace ScaleResist.Runs;

/// <summary>Definitions and rows of the distance tables.</summary>
public static class DistanceTables
{
    private const int BatchRows = 1 << 20;

    /// <summary>One row a requested pair.</summary>
    public static TableDefinition Pairs(ColumnKind label) => new("distance_pairs",
    [
        new("source", label),
        new("target", label),
        new("distance", ColumnKind.Double),
        new("resistance", ColumnKind.Double, Nullable: true),
        new("ratio", ColumnKind.Double, Nullable: true),
    ]);

    /// <summary>One row a node.</summary>
    public static TableDefinition Eccentricity(ColumnKind label) => new("eccentricity",
    [
        new("node", label),
        new("component_id", ColumnKind.Int64),
        new("eccentricity", ColumnKind.Double),
        new("farthest", label),
    ]);

    /// <summary>One row a component.</summary>
    public static TableDefinition Summary(ColumnKind label) => new("distance_summary",
    [
        new("component_id", ColumnKind.Int64),
        new("nodes", ColumnKind.Int64),
        new("diameter", ColumnKind.Double),
        new("radius", ColumnKind.Double),
        new("centre", label),
        new("periphery_source", label),
        new("periphery_target", label),
        new("wiener_index", ColumnKind.Double),
        new("wiener_index_se", ColumnKind.Double),
        new("wiener_index_lower", ColumnKind.Double),
        new("wiener_index_upper", ColumnKind.Double),
        new("node_weighted_wiener_index", ColumnKind.Double, Nullable: true),
        new("mean_distance", ColumnKind.Double),
        new("sources", ColumnKind.Int64),
    ]);

    /// <summary>Rows of a component by distance.</summary>
    public static TableDefinition Profile { get; } = new("distance_profile",
    [
        new("component_id", ColumnKind.Int64),
        new("distance", ColumnKind.Double),
        new("pairs_within", ColumnKind.Double),
        new("share_within", ColumnKind.Double),
        new("share_se", ColumnKind.Double),
    ]);

    internal static void WritePairs(
        NodeLabels labels, IReadOnlyList<(int U, int V)> pairs, double[] distances, double[]? resistances, ITableWriter writer)
    {
        foreach (int[] batch in Enumerable.Range(0, pairs.Count).Chunk(BatchRows))
        {
            writer.Write(new RowBatch(batch.Length,
            [
                Labels(labels, batch, i => pairs[i].U), Labels(labels, batch, i => pairs[i].V), Column(batch, i => distances[i]),
                Column(batch, i => Known(resistances?[i])), Column(batch, i => Known(resistances?[i] / distances[i])),
            ]));
        }

        static double? Known(double? value) => value is double number && !double.IsNaN(number) ? number : null;
    }

    internal static void WriteEccentricities(
        Network network, IReadOnlyList<(int Node, int Component, double Eccentricity, int Farthest)> rows, ITableWriter writer)
    {
        foreach (int[] batch in Enumerable.Range(0, rows.Count).Chunk(BatchRows))
        {
            writer.Write(new RowBatch(batch.Length,
            [
                Labels(network.Labels, batch, i => rows[i].Node), Column(batch, i => (long)rows[i].Component),
                Column(batch, i => rows[i].Eccentricity), Labels(network.Labels, batch, i => rows[i].Farthest),
            ]));
        }
    }

    internal static void WriteSummary(
        NodeLabels labels, IReadOnlyList<(DistanceEntry Entry, int Centre, int Source, int Target)> rows, ITableWriter writer)
    {
        foreach ((DistanceEntry Entry, int Centre, int Source, int Target)[] batch in rows.Chunk(BatchRows))
        {
            writer.Write(new RowBatch(batch.Length,
            [
                Column(batch, r => (long)r.Entry.ComponentId), Column(batch, r => r.Entry.Nodes), Column(batch, r => r.Entry.Diameter),
                Column(batch, r => r.Entry.Radius), Labels(labels, batch, r => r.Centre), Labels(labels, batch, r => r.Source),
                Labels(labels, batch, r => r.Target), Column(batch, r => r.Entry.WienerIndex), Column(batch, r => r.Entry.WienerIndexSe),
                Column(batch, r => r.Entry.WienerIndexLower), Column(batch, r => r.Entry.WienerIndexUpper),
                Column(batch, r => r.Entry.NodeWeightedWienerIndex), Column(batch, r => r.Entry.MeanDistance),
                Column(batch, r => r.Entry.Sources),
            ]));
        }
    }

    internal static void WriteProfile(IReadOnlyList<(int Component, double Pairs, ProfileStep Step)> rows, ITableWriter writer)
    {
        foreach ((int Component, double Pairs, ProfileStep Step)[] batch in rows.Chunk(BatchRows))
        {
            writer.Write(new RowBatch(batch.Length,
            [
                Column(batch, r => (long)r.Component), Column(batch, r => r.Step.Distance), Column(batch, r => r.Pairs * r.Step.Share),
                Column(batch, r => r.Step.Share), Column(batch, r => r.Step.Error),
            ]));
        }
    }

    private static Array Column<TRow, T>(TRow[] rows, Func<TRow, T> value) => Array.ConvertAll(rows, r => value(r));

    private static Array Labels<TRow>(NodeLabels labels, TRow[] rows, Func<TRow, int> node)
    {
        Array column = LabelColumns.New(labels, rows.Length);
        for (int i = 0; i < rows.Length; i++)
            LabelColumns.Put(labels, column, i, node(rows[i]));
        return column;
    }
}
