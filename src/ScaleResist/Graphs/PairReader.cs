// Pairs of nodes of a network that is already read.
// Invariant: every pair handed out is two dense indices of the given labels, in file order.

namespace ScaleResist.Graphs;

/// <summary>Reads the pairs of nodes whose resistance is wanted.</summary>
public static class PairReader
{
    /// <summary>Reads a text file of pairs; the same forms as <see cref="EdgeListReader"/>. A node may be paired with
    /// itself.</summary>
    /// <param name="path">The file.</param>
    /// <param name="labels">The network's labels.</param>
    /// <param name="columns">Two column names or 1-based positions; null: the first two.</param>
    /// <param name="ct">Stops reading.</param>
    /// <exception cref="InputException">The file cannot be used, or names a node that the network does not have.</exception>
    public static List<(int Source, int Target)> Read(
        string path, NodeLabels labels, IReadOnlyList<string>? columns = null, CancellationToken ct = default)
    {
        using IRowSource rows = TextRows.Open(path, Request(columns), null, ct);
        return Read(rows, labels);
    }

    /// <summary>What to ask a row source for.</summary>
    public static RowRequest Request(IReadOnlyList<string>? columns) => new() { Labels = 2, Columns = columns };

    /// <summary>Reads all rows of a source that was opened with <see cref="Request"/>.</summary>
    public static List<(int Source, int Target)> Read(IRowSource rows, NodeLabels labels)
    {
        List<(int, int)> pairs = [];
        while (rows.Read(out Row row))
        {
            pairs.Add(row.AreIntegers
                ? (Index(labels, row.FirstInteger, rows), Index(labels, row.SecondInteger, rows))
                : (Index(labels, row.First, rows), Index(labels, row.Second, rows)));
        }
        Request(null).CheckHeader(rows, labels);
        return pairs;
    }

    /// <summary>The node with a label; throws at the current row where there is none.</summary>
    internal static int Index(NodeLabels labels, ReadOnlySpan<char> label, IRowSource rows)
    {
        int node = labels.IndexOf(label);
        return node >= 0 ? node : throw Unknown(label, rows);
    }

    /// <summary>The node with a label; throws at the current row where there is none.</summary>
    internal static int Index(NodeLabels labels, long label, IRowSource rows)
    {
        int node = labels.IndexOf(label);
        return node >= 0 ? node : throw Unknown(label.ToString(System.Globalization.CultureInfo.InvariantCulture), rows);
    }

    private static InputException Unknown(ReadOnlySpan<char> label, IRowSource rows) =>
        rows.Fault($"the network has no node '{InputException.Show(label)}'",
            "name nodes of the network, spelled as in its file");
}
