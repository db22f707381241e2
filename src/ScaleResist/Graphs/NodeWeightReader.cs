// A number for every node of a network that is already read.
// Invariant: every node has exactly one weight, finite and not negative.

using System.Globalization;

namespace ScaleResist.Graphs;

/// <summary>Reads the weights of nodes.</summary>
public static class NodeWeightReader
{
    /// <summary>Reads a text file of node and weight; the same forms as <see cref="EdgeListReader"/> but Matrix Market.</summary>
    /// <param name="path">The file.</param>
    /// <param name="labels">The network's labels.</param>
    /// <param name="columns">Two column names or 1-based positions, node and weight; null: the first two.</param>
    /// <param name="ct">Stops reading.</param>
    /// <returns>The weights by dense index, length n.</returns>
    /// <exception cref="InputException">
    /// The file cannot be used; a node is unknown, stands twice or is missing; a weight is negative or not finite.
    /// </exception>
    public static double[] Read(
        string path, NodeLabels labels, IReadOnlyList<string>? columns = null, CancellationToken ct = default)
    {
        using IRowSource rows = TextRows.Open(path, Request(columns), null, ct);
        return Read(rows, labels);
    }

    /// <summary>What to ask a row source for.</summary>
    public static RowRequest Request(IReadOnlyList<string>? columns) =>
        new() { Labels = 1, Number = NumberColumn.Required, Columns = columns };

    /// <summary>Reads all rows of a source that was opened with <see cref="Request"/>.</summary>
    public static double[] Read(IRowSource rows, NodeLabels labels)
    {
        double[] weights = new double[labels.Count];
        Array.Fill(weights, double.NaN);
        int given = 0;
        while (rows.Read(out Row row))
        {
            int node = row.AreIntegers
                ? PairReader.Index(labels, row.FirstInteger, rows)
                : PairReader.Index(labels, row.First, rows);
            if (!double.IsNaN(weights[node]))
                throw rows.Fault($"the node '{InputException.Show(labels[node])}' has a weight already",
                    "give each node one row");
            if (!double.IsFinite(row.Number) || row.Number < 0)
            {
                string shown = row.Number.ToString(CultureInfo.InvariantCulture);
                throw rows.Fault($"the weight {shown} is not a finite number from zero up",
                    "give a finite weight that is not negative");
            }
            weights[node] = row.Number;
            given++;
        }
        Request(null).CheckHeader(rows, labels);
        if (given < weights.Length)
        {
            string missing = labels[Array.FindIndex(weights, double.IsNaN)];
            throw new InputException(rows.Facts.Path, null,
                $"{weights.Length - given} nodes of the network have no weight, among them '{InputException.Show(missing)}'",
                "give every node of the network a row");
        }
        return weights;
    }
}
