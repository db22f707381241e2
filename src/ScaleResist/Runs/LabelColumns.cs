// Columns of node labels, as int64 or as text, whichever the network has.

using ScaleResist.Graphs;

namespace ScaleResist.Runs;

/// <summary>Label columns of a network.</summary>
internal static class LabelColumns
{
    /// <summary>The kind of every label column of the network.</summary>
    public static ColumnKind KindOf(NodeLabels labels) => labels.AreIntegers ? ColumnKind.Int64 : ColumnKind.Text;

    /// <summary>An empty label column.</summary>
    public static Array New(NodeLabels labels, int count) => labels.AreIntegers ? new long[count] : new string[count];

    /// <summary>Writes a node's label into a column.</summary>
    public static void Put(NodeLabels labels, Array column, int row, int node)
    {
        if (column is long[] integers)
            integers[row] = labels.Integers[node];
        else
            ((string[])column)[row] = labels.Texts[node];
    }
}
