// Rows of a small table whose columns are known by name: planned changes, candidate links. The header is never guessed; it must be there.
// Invariant: a cell is trimmed text, empty where the table has none; each row knows its line.

namespace ScaleResist.Graphs;

/// <summary>A forward-only table with named columns. Not safe for several threads.</summary>
public interface INamedRows : IDisposable
{
    /// <summary>The path as the user named it.</summary>
    string Path { get; }

    /// <summary>The 1-based line (of text) or row (of Parquet) that was read last.</summary>
    long Line { get; }

    /// <summary>Whether the table has the column.</summary>
    bool Has(int column);

    /// <summary>Reads the next row; false at the end.</summary>
    /// <exception cref="InputException">The row or the file cannot be used.</exception>
    bool Read();

    /// <summary>A cell of the row, by the column's place in the request.</summary>
    string this[int column] { get; }
}

/// <summary>Which columns a reader of named columns wants.</summary>
/// <param name="Required">Names that the header must have.</param>
/// <param name="Optional">Names that it may have; their places follow those of the required ones.</param>
public sealed record NamedColumns(IReadOnlyList<string> Required, IReadOnlyList<string> Optional)
{
    /// <summary>How many there are.</summary>
    public int Count => Required.Count + Optional.Count;

    /// <summary>Where each is in a header, -1 for an optional one that is not there. Case does not count.</summary>
    /// <exception cref="InputException">A required column is missing, or a name stands twice.</exception>
    public int[] PlacesIn(IReadOnlyList<string> header, string path, long? line)
    {
        string[] names = [.. Required, .. Optional];
        int[] places = new int[names.Length];
        for (int i = 0; i < names.Length; i++)
        {
            int[] found = [.. Enumerable.Range(0, header.Count)
                .Where(at => string.Equals(header[at].Trim(), names[i], StringComparison.OrdinalIgnoreCase))];
            if (found.Length > 1)
            {
                throw new InputException(path, line, $"the column '{names[i]}' stands twice in the header",
                    "give each column its own name");
            }
            if (found.Length == 0 && i < Required.Count)
            {
                throw new InputException(path, line, $"there is no column '{names[i]}'; the header reads "
                    + string.Join(", ", header.Take(20).Select(cell => InputException.Show(cell))),
                    $"name the columns {string.Join(',', Required)}{(Optional.Count > 0 ? $" and, where wanted, {string.Join(',', Optional)}" : "")}");
            }
            places[i] = found.Length == 0 ? -1 : found[0];
        }
        return places;
    }
}

/// <summary>A text file of named columns: <c>.csv .tsv .txt .edges</c>, each also <c>.gz</c> and <c>.zst</c>.</summary>
public sealed class NamedTextRows : INamedRows
{
    private readonly CellReader cells;
    private readonly int[] places;
    private string[] row = [];

    private NamedTextRows(CellReader cells, NamedColumns columns)
    {
        this.cells = cells;
        if (cells.IsMatrixMarket)
            throw cells.Fault(null, "a matrix has no columns with names", "give a table as .csv, .tsv or .parquet");
        if (!cells.MoveNext())
            throw cells.NoRows();
        places = columns.PlacesIn(cells.Cells(), cells.Path, cells.Line);
    }

    /// <inheritdoc/>
    public string Path => cells.Path;

    /// <inheritdoc/>
    public long Line => cells.Line;

    /// <inheritdoc/>
    public string this[int column] => places[column] >= 0 && places[column] < row.Length ? row[places[column]] : "";

    /// <summary>Opens a text file for one pass.</summary>
    /// <exception cref="InputException">The file cannot be used.</exception>
    public static INamedRows Open(string path, NamedColumns columns, CancellationToken ct = default)
    {
        CellReader cells = CellReader.Open(path, null, ct);
        try
        {
            return new NamedTextRows(cells, columns);
        }
        catch
        {
            cells.Dispose();
            throw;
        }
    }

    /// <inheritdoc/>
    public bool Has(int column) => places[column] >= 0;

    /// <inheritdoc/>
    public bool Read()
    {
        if (!cells.MoveNext())
            return false;
        row = cells.Cells();
        return true;
    }

    /// <inheritdoc/>
    public void Dispose() => cells.Dispose();
}
