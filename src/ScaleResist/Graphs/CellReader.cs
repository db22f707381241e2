// Cells of text rows: Sep does the parsing behind the line filter, which gives it one line of the file as one row.
// Invariant: Line is the 1-based line of the unpacked file; blank and comment lines are passed over.

using nietras.SeparatedValues;

namespace ScaleResist.Graphs;

/// <summary>Reads data rows as cells.</summary>
internal sealed class CellReader : IDisposable
{
    /// <summary>The longest label in characters.</summary>
    public const int LongestLabel = 1000;

    private readonly InputFile file;
    private readonly LineFilter filter;
    private readonly SepReader reader;

    private CellReader(InputFile file, Separation separation)
    {
        this.file = file;
        filter = new LineFilter(file, separation);
        char separator = filter.Separation switch
        {
            Separation.Comma => ',',
            Separation.Semicolon => ';',
            _ => '\t',
        };
        reader = Sep.New(separator)
            .Reader(o => o with { HasHeader = false, DisableColCountCheck = true, Unescape = true, Trim = SepTrim.Outer })
            .From(filter);
    }

    /// <summary>Opens a text file.</summary>
    public static CellReader Open(string path, Action<long>? bytesRead, CancellationToken ct)
    {
        InputFile file = InputFile.Open(path, bytesRead, ct);
        try
        {
            return new CellReader(file, file.Ending switch
            {
                ".csv" => Separation.Comma,
                ".tsv" => Separation.Tab,
                ".mtx" => Separation.Blanks,
                _ => Separation.Undecided,
            });
        }
        catch
        {
            file.Dispose();
            throw;
        }
    }

    /// <summary>The path as the user named it.</summary>
    public string Path => file.Path;

    /// <summary>The line of the current row.</summary>
    public long Line { get; private set; }

    /// <summary>The first line of the file, a comment or not; null where there is none.</summary>
    public string? FirstLine => filter.FirstLine;

    /// <summary>Whether the name says Matrix Market.</summary>
    public bool IsMatrixMarket => file.Ending == ".mtx";

    /// <summary>What separates cells, for messages.</summary>
    public string Separator => filter.Separation switch
    {
        Separation.Comma => "commas",
        Separation.Semicolon => "semicolons",
        Separation.Tab => "tabs",
        _ => "blanks",
    };

    /// <summary>The current row. Sep unescapes a cell in place: read the span of each cell only once.</summary>
    public SepReader.Row Current => reader.Current;

    /// <summary>Goes to the next row that is not blank.</summary>
    public bool MoveNext()
    {
        while (reader.MoveNext())
        {
            Line++;
            SepReader.Row row = reader.Current;
            if (row.ColCount > 1 || !row.Span.IsWhiteSpace())
                return true;
        }
        return false;
    }

    /// <summary>The cells of the current row as strings.</summary>
    public string[] Cells()
    {
        SepReader.Row row = reader.Current;
        string[] cells = new string[row.ColCount];
        for (int i = 0; i < cells.Length; i++)
            cells[i] = row[i].ToString();
        return cells;
    }

    /// <summary>An error at a line.</summary>
    public InputException Fault(long? line, string problem, string mend) => new(Path, line, problem, mend);

    /// <summary>The refusal of a file without data rows.</summary>
    public InputException NoRows() =>
        Fault(null, Line == 0 ? "is empty" : "has no data rows", "give at least one row");

    /// <summary>Facts of the file; complete after the last row.</summary>
    public InputFacts Facts(long rows, IReadOnlyList<string>? header, IReadOnlyList<string> columns) => new()
    {
        Path = Path,
        Form = (file.Ending is ".txt" or ".edges" ? "text" : file.Ending[1..]) + file.Archive.Replace('.', '+'),
        Bytes = file.Bytes,
        Sha256 = file.Sha256,
        Rows = rows,
        CommentLines = filter.CommentLines,
        Header = header,
        Columns = columns,
    };

    public void Dispose()
    {
        reader.Dispose();
        filter.Dispose();
        file.Dispose();
    }
}
