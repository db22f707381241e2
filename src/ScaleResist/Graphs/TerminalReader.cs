// Nodes of a network that is already read, one a row: supply points, data centres.
// Invariant: at least one node, every node once.

namespace ScaleResist.Graphs;

/// <summary>Reads the nodes that are shorted into one.</summary>
public static class TerminalReader
{
    /// <summary>What to ask a row source for.</summary>
    public static RowRequest Request() => new() { Labels = 1 };

    /// <summary>Reads all rows of a source that was opened with <see cref="Request"/>; a node named twice counts once.</summary>
    /// <exception cref="InputException">The file cannot be used, names no node, or one that the network does not have.</exception>
    public static List<int> Read(IRowSource rows, NodeLabels labels)
    {
        SortedSet<int> terminals = [];
        while (rows.Read(out Row row))
            terminals.Add(row.AreIntegers ? PairReader.Index(labels, row.FirstInteger, rows) : PairReader.Index(labels, row.First, rows));
        Request().CheckHeader(rows, labels);
        return terminals.Count > 0
            ? [.. terminals]
            : throw new InputException(rows.Facts.Path, null, "there is no terminal in it", "name at least one node of the network, one a row");
    }
}
