// Entries of a Matrix Market coordinate file as links: labels are the 1-based indices.
// Invariant: as many entries as the size line declares, each within the declared order.

using System.Globalization;
using nietras.SeparatedValues;

namespace ScaleResist.Graphs;

/// <summary>
/// Rows of <c>%%MatrixMarket matrix coordinate pattern|real|integer general|symmetric</c>. A square matrix of order n; an entry
/// (i, j) is a link between i and j.
/// </summary>
internal sealed class MatrixMarketRows : IRowSource
{
    private const string Banner = "%%MatrixMarket matrix coordinate real symmetric";
    private readonly CellReader cells;
    private readonly RowRequest request;
    private readonly bool hasValues;
    private readonly bool symmetric;
    private readonly long order;
    private readonly long entries;
    private bool lower;
    private bool upper;
    private long rows;

    public MatrixMarketRows(CellReader cells, RowRequest request)
    {
        this.cells = cells;
        this.request = request;
        if (request.Labels == 1)
            throw cells.Fault(null, "is a matrix, where a list of nodes is needed",
                "give a .csv or .tsv file of node and number");
        if (request.Columns is not null)
            throw cells.Fault(null, "columns are named, and a Matrix Market file has none", "leave --columns out");
        (hasValues, symmetric) = ReadBanner(cells);
        if (request.Number == NumberColumn.Refused && hasValues)
            throw RowRequest.WeightUnsaid(cells.Path, 1);
        if (request.Number == NumberColumn.Required && !hasValues)
            throw cells.Fault(1, "is a pattern without values, where weights are asked for", "say --weights none");
        (order, entries) = ReadSize(cells);
    }

    public long? GuessedHeaderLine => null;

    public InputFacts Facts => cells.Facts(rows, null, request.Number == NumberColumn.Required ? ["1", "2", "3"] : ["1", "2"]);

    public bool Read(out Row row)
    {
        row = default;
        if (!cells.MoveNext())
        {
            return rows == entries
                ? false
                : throw cells.Fault(cells.Line,
                    $"the file ends after {rows} of the {entries} entries that its size line declares",
                    "the file is truncated: fetch or make it again");
        }
        if (rows == entries)
        {
            throw Fault($"there are more than the {entries} entries that the size line declares",
                "put the true number of entries into the size line");
        }
        rows++;
        SepReader.Row current = cells.Current;
        int expected = hasValues ? 3 : 2;
        if (current.ColCount != expected)
        {
            throw Fault($"the entry has {current.ColCount} cells where the banner asks for {expected}",
                hasValues ? "give row, column and value" : "give row and column");
        }
        row.AreIntegers = true;
        row.FirstInteger = Index(current[0].Span);
        row.SecondInteger = Index(current[1].Span);
        lower |= row.FirstInteger > row.SecondInteger;
        upper |= row.FirstInteger < row.SecondInteger;
        if (symmetric && lower && upper)
        {
            throw Fault("entries stand on both sides of the diagonal of a symmetric matrix, so links may be listed twice",
                "keep the lower triangle, or declare the matrix general");
        }
        if (request.Number == NumberColumn.Required)
            row.Number = TextRows.Number(current[2].Span, this);
        return true;
    }

    public InputException Fault(string problem, string mend) => cells.Fault(cells.Line, problem, mend);

    public void Dispose() => cells.Dispose();

    private long Index(ReadOnlySpan<char> cell) =>
        NodeLabels.TryCanonicalInteger(cell, out long index) && index >= 1 && index <= order
            ? index
            : throw Fault($"the index '{InputException.Show(cell)}' is not within 1 to {order}",
                "indices start at 1 and end at the size declared");

    private static (bool HasValues, bool Symmetric) ReadBanner(CellReader cells)
    {
        if (cells.FirstLine is null)
            throw cells.NoRows();
        string[] words = cells.FirstLine.Split([' ', '\t'], StringSplitOptions.RemoveEmptyEntries);
        string Word(int i) => i < words.Length ? words[i].ToLowerInvariant() : "";
        if (Word(0) != "%%matrixmarket")
            throw cells.Fault(1, "the Matrix Market banner is missing", $"begin the file with a line such as {Banner}");
        InputException Refuse(int i, string mend) =>
            cells.Fault(1, $"a Matrix Market file with '{InputException.Show(Word(i))}' cannot be read as a network", mend);
        if (Word(1) != "matrix" || Word(2) != "coordinate")
            throw Refuse(Word(1) == "matrix" ? 2 : 1, "store it as 'matrix coordinate'");
        if (Word(3) is not ("pattern" or "real" or "integer" or "double"))
            throw Refuse(3, "store the values as real, integer or pattern");
        if (Word(4) is not ("general" or "symmetric"))
            throw Refuse(4, "store it as general or symmetric");
        return (Word(3) != "pattern", Word(4) == "symmetric");
    }

    private static (long Order, long Entries) ReadSize(CellReader cells)
    {
        if (!cells.MoveNext())
            throw cells.Fault(cells.Line, "the size line is missing", "put a line 'rows columns entries' below the banner");
        string[] size = cells.Cells();
        long[] numbers = new long[3];
        bool valid = size.Length == 3;
        for (int i = 0; valid && i < 3; i++)
            valid = long.TryParse(size[i], NumberStyles.None, CultureInfo.InvariantCulture, out numbers[i]);
        if (!valid)
        {
            throw cells.Fault(cells.Line,
                $"the size line '{InputException.Show(string.Join(' ', size))}' is not three whole numbers",
                "put a line 'rows columns entries' below the banner");
        }
        if (numbers[0] != numbers[1])
        {
            throw cells.Fault(cells.Line, $"the matrix is {numbers[0]} x {numbers[1]}, not square",
                "give the adjacency or Laplacian pattern of a network, with as many rows as columns");
        }
        if (numbers[2] == 0)
            throw cells.Fault(cells.Line, "has no data rows", "give at least one entry");
        return (numbers[0], numbers[2]);
    }
}
