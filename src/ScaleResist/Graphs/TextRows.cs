// Rows of csv, tsv and blank-separated text files.
// Invariant: integers are read straight from the parser's characters; no row allocates.

using System.Globalization;
using nietras.SeparatedValues;

namespace ScaleResist.Graphs;

/// <summary>Rows of a text file: <c>.csv .tsv .txt .edges .mtx</c>, each also <c>.gz</c> and <c>.zst</c>.</summary>
public sealed class TextRows : IRowSource
{
    private readonly CellReader cells;
    private readonly RowRequest request;
    private readonly TextHeader columns;
    private readonly string[] header;

    // The rows that were read to tell whether there is a header, and are still to be handed out.
    private readonly Queue<(long Line, string[] Cells)> ahead = new();
    private long line;
    private long rows;

    private TextRows(CellReader cells, RowRequest request)
    {
        this.cells = cells;
        this.request = request;
        for (int i = 0; i < 2 && cells.MoveNext(); i++)
            ahead.Enqueue((cells.Line, cells.Cells()));
        if (ahead.Count == 0)
            throw cells.NoRows();
        (line, string[] first) = ahead.Peek();
        if (request.Labels == 2 && cells.Separator == "commas" && HasDecimalCommas(first))
        {
            throw Fault($"'{InputException.Show(string.Join(',', first))}' has semicolons between cells and commas in numbers",
                "put commas between cells and points into numbers, as in 1,2,0.5");
        }
        if (request.Number == NumberColumn.Refused && first.Length > request.Labels)
            throw RowRequest.WeightUnsaid(cells.Path, line);
        if (request is { Number: NumberColumn.Required, Columns: null } && first.Length == request.Labels)
            throw request.NumberMissing(cells.Path, line);
        columns = TextHeader.Find(request, first, ahead.Count > 1 ? ahead.Last().Cells : null, Fault);
        header = first;
        if (!columns.IsHeader)
            return;
        GuessedHeaderLine = columns.IsGuessed ? line : null;
        ahead.Dequeue();
        if (ahead.Count == 0)
            throw cells.NoRows();
    }

    /// <inheritdoc/>
    public long? GuessedHeaderLine { get; }

    /// <inheritdoc/>
    public InputFacts Facts => cells.Facts(rows, columns.IsHeader ? header : null, columns.Names);

    /// <summary>Opens a text file for one pass.</summary>
    /// <param name="path">The file; its ending names the form.</param>
    /// <param name="request">The columns wanted.</param>
    /// <param name="bytesRead">Told the bytes read from disk so far.</param>
    /// <param name="ct">Stops reading.</param>
    /// <exception cref="InputException">The file cannot be used.</exception>
    public static IRowSource Open(string path, RowRequest request, Action<long>? bytesRead = null, CancellationToken ct = default)
    {
        request.Check(path);
        CellReader cells = CellReader.Open(path, bytesRead, ct);
        try
        {
            return cells.IsMatrixMarket
                ? new MatrixMarketRows(cells, request)
                : new TextRows(cells, request);
        }
        catch
        {
            cells.Dispose();
            throw;
        }
    }

    /// <summary>Opens a file for reading at any place.</summary>
    /// <exception cref="InputException">It is not there, or may not be read.</exception>
    public static FileStream OpenFile(string path) => InputFile.OpenStream(path, 0);

    /// <inheritdoc/>
    public bool Read(out Row row)
    {
        row = default;
        if (ahead.TryDequeue(out (long Line, string[] Cells) early))
        {
            line = early.Line;
            CheckCount(early.Cells.Length);
            Fill(ref row, early.Cells[columns.Indices[0]], request.Labels == 2 ? early.Cells[columns.Indices[1]] : default,
                request.Number == NumberColumn.Required ? early.Cells[columns.Indices[^1]] : default);
            return true;
        }
        if (!cells.MoveNext())
            return false;
        line = cells.Line;
        SepReader.Row current = cells.Current;
        CheckCount(current.ColCount);
        Fill(ref row, current[columns.Indices[0]].Span, request.Labels == 2 ? current[columns.Indices[1]].Span : default,
            request.Number == NumberColumn.Required ? current[columns.Indices[^1]].Span : default);
        return true;
    }

    /// <inheritdoc/>
    public InputException Fault(string problem, string mend) => cells.Fault(line, problem, mend);

    /// <inheritdoc/>
    public void Dispose() => cells.Dispose();

    /// <summary>Reads a number cell; NaN and infinities come through, other text is refused.</summary>
    internal static double Number(ReadOnlySpan<char> cell, IRowSource rows)
    {
        return double.TryParse(cell, NumberStyles.Float, CultureInfo.InvariantCulture, out double number)
            ? number
            : throw rows.Fault(cell.IsEmpty ? "the number is empty" : $"'{InputException.Show(cell)}' is not a number",
                "give a number with a decimal point, such as 0.5 or 1e-3");
    }

    // 1;2;0,5 splits at its comma into the cells 1;2;0 and 5, which would pass for two node ids.
    private static bool HasDecimalCommas(string[] cells) =>
        cells.Length > 1 && cells[0].Split(';') is { Length: > 2 } parts
        && IsDigits(parts[^1]) && IsDigits(cells[1].Split(';')[0]);

    private static bool IsDigits(string text) => text.Length > 0 && text.All(char.IsAsciiDigit);

    private void CheckCount(int count)
    {
        if (request.Number == NumberColumn.Refused && count > request.Labels)
            throw RowRequest.WeightUnsaid(cells.Path, line);
        foreach (int index in columns.Indices)
        {
            if (index >= count)
            {
                throw Fault($"the row is short: it has {count} of {columns.Indices.Max() + 1} columns",
                    $"give every row {request.Wanted}, separated by {cells.Separator}");
            }
        }
    }

    private void Fill(ref Row row, ReadOnlySpan<char> first, ReadOnlySpan<char> second, ReadOnlySpan<char> number)
    {
        rows++;
        if (NodeLabels.TryCanonicalInteger(first, out row.FirstInteger)
            && (request.Labels == 1 || NodeLabels.TryCanonicalInteger(second, out row.SecondInteger)))
        {
            row.AreIntegers = true;
        }
        else
        {
            CheckLabel(first);
            if (request.Labels == 2)
                CheckLabel(second);
        }
        row.First = first;
        row.Second = second;
        if (request.Number == NumberColumn.Required)
            row.Number = Number(number, this);
    }

    private void CheckLabel(ReadOnlySpan<char> label)
    {
        if (label.IsEmpty)
            throw Fault("a node id is empty", $"give every row {request.Wanted}, separated by {cells.Separator}");
        if (label.Length > RowRequest.LongestLabel)
        {
            throw Fault($"the node id '{InputException.Show(label)}' has {label.Length} characters",
                $"keep node ids within {RowRequest.LongestLabel} characters");
        }
    }
}
