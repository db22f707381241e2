// Nodes of a network that is already read. Invariant: every index handed out is one of the given labels, and none comes twice.

namespace ScaleResist.Graphs;

/// <summary>Reads a list of nodes.</summary>
public static class NodeReader
{
    /// <summary>What to ask a row source for: the first column.</summary>
    public static RowRequest Request { get; } = new() { Labels = 1 };

    /// <summary>Reads all rows of a source that was opened with <see cref="Request"/>; a node that stands twice is taken once.</summary>
    /// <exception cref="InputException">The file cannot be used, or names a node that the network does not have.</exception>
    public static int[] Read(IRowSource rows, NodeLabels labels)
    {
        List<int> nodes = [];
        HashSet<int> taken = [];
        while (rows.Read(out Row row))
        {
            int node = row.AreIntegers
                ? PairReader.Index(labels, row.FirstInteger, rows)
                : PairReader.Index(labels, row.First, rows);
            if (taken.Add(node))
                nodes.Add(node);
        }
        Request.CheckHeader(rows, labels);
        return [.. nodes];
    }
}
