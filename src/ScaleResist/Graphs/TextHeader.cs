// Whether the first data row of a text file holds column names, and which columns are meant.
// Invariant: a row whose labels are both integers is never taken for a header on its looks.

using System.Globalization;

namespace ScaleResist.Graphs;

/// <summary>The columns of a text file.</summary>
internal sealed class TextHeader
{
    private static readonly HashSet<string> WellKnown = new(StringComparer.OrdinalIgnoreCase)
    {
        "source", "target", "src", "dst", "dest", "destination", "origin", "from", "to", "start", "end", "head", "tail",
        "u", "v", "i", "j", "a", "b", "left", "right", "node", "neighbor", "neighbour", "id", "label", "name", "site",
        "node1", "node2", "node_1", "node_2", "node_a", "node_b", "nodea", "nodeb", "id1", "id2", "vertex1", "vertex2",
        "source_id", "target_id", "sourceid", "targetid", "src_id", "dst_id", "from_id", "to_id", "fromid", "toid",
        "from_node", "to_node", "fromnode", "tonode", "fromnodeid", "tonodeid", "node_id", "nodeid", "vertex",
    };

    private static readonly StringComparison[] Comparisons = [StringComparison.Ordinal, StringComparison.OrdinalIgnoreCase];

    private TextHeader(int[] indices, bool isHeader, bool guessed, string[] first)
    {
        Indices = indices;
        IsHeader = isHeader;
        IsGuessed = guessed;
        Names = Array.ConvertAll(
            indices, i => isHeader && i < first.Length ? first[i] : (i + 1).ToString(CultureInfo.InvariantCulture));
    }

    /// <summary>The 0-based columns: labels, then the number where one is required.</summary>
    public int[] Indices { get; }

    /// <summary>Whether the first row is a header.</summary>
    public bool IsHeader { get; }

    /// <summary>Whether that was concluded from the looks of the rows.</summary>
    public bool IsGuessed { get; }

    /// <summary>The columns used: names, or 1-based positions where there are no names.</summary>
    public string[] Names { get; }

    /// <summary>Finds the columns.</summary>
    /// <param name="request">What is asked for.</param>
    /// <param name="first">The first data row.</param>
    /// <param name="second">The second data row, or null.</param>
    /// <param name="fault">Makes an error at the first row.</param>
    public static TextHeader Find(
        RowRequest request, string[] first, string[]? second, Func<string, string, InputException> fault)
    {
        int[] indices = new int[request.ColumnsUsed];
        bool named = false;
        for (int i = 0; i < indices.Length; i++)
        {
            if (request.Columns is null)
            {
                indices[i] = i;
            }
            else if (int.TryParse(request.Columns[i], NumberStyles.None, CultureInfo.InvariantCulture, out int position))
            {
                if (position < 1 || position > first.Length)
                    throw fault($"there is no column {position}; the row has {first.Length}", "name columns that the file has");
                indices[i] = position - 1;
            }
            else
            {
                named = true;
                indices[i] = IndexOf(request.Columns[i], first, fault);
            }
        }
        if (indices.Distinct().Count() != indices.Length)
            throw fault("one column is named twice", "name each column once");
        bool looks = !named && LooksLikeHeader(request, indices, first, second);
        return new TextHeader(indices, named || looks, looks, first);
    }

    private static int IndexOf(string name, string[] header, Func<string, string, InputException> fault)
    {
        foreach (StringComparison comparison in Comparisons)
        {
            int[] found = [.. Enumerable.Range(0, header.Length).Where(i => string.Equals(header[i], name, comparison))];
            if (found.Length == 1)
                return found[0];
            if (found.Length > 1)
                throw fault($"the column '{InputException.Show(name)}' stands twice in the header",
                    "give each column its own name");
        }
        string has = string.Join(", ", header.Take(20).Select(cell => InputException.Show(cell)));
        throw fault($"there is no column '{InputException.Show(name)}'; the first row reads {has}",
            "name columns of the header, or give 1-based positions where there is no header");
    }

    private static bool LooksLikeHeader(RowRequest request, int[] indices, string[] first, string[]? second)
    {
        string Cell(string[] row, int index) => index < row.Length ? row[index] : "";
        int[] labels = indices[..request.Labels];
        if (labels.All(i => IsInteger(Cell(first, i))))
            return false;
        if (labels.All(i => WellKnown.Contains(Cell(first, i))))
            return true;
        if (second is null)
            return false;
        if (labels.All(i => !IsInteger(Cell(first, i)) && IsInteger(Cell(second, i))))
            return true;
        // The number column tells too: a name above a number.
        return request.Number == NumberColumn.Required && !IsNumber(Cell(first, indices[^1]))
            && IsNumber(Cell(second, indices[^1]));
    }

    private static bool IsInteger(string cell) => NodeLabels.TryCanonicalInteger(cell, out _);

    private static bool IsNumber(string cell) => double.TryParse(cell, NumberStyles.Float, CultureInfo.InvariantCulture, out _);
}
