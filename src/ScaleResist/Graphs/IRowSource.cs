// The seam between file forms and readers: rows of one or two labels and perhaps a number, with a position for errors.
// Invariant: a source hands out each data row once, in file order, with labels that are not empty and at most 1,000 characters.

namespace ScaleResist.Graphs;

/// <summary>What is to happen with the column after the labels.</summary>
public enum NumberColumn
{
    /// <summary>Further columns are ignored.</summary>
    Ignored,

    /// <summary>A further column is refused: the user has not said what its number means.</summary>
    Refused,

    /// <summary>Every row must have a number.</summary>
    Required,
}

/// <summary>Which columns a reader wants.</summary>
public sealed record RowRequest
{
    /// <summary>The longest label in characters.</summary>
    public const int LongestLabel = 1000;

    /// <summary>The number of label columns, 1 or 2.</summary>
    public required int Labels { get; init; }

    /// <summary>What is to happen with the number column.</summary>
    public NumberColumn Number { get; init; }

    /// <summary>
    /// Names or 1-based positions of the label columns and, where a number is required, of the number column. Null: the first
    /// ones.
    /// </summary>
    public IReadOnlyList<string>? Columns { get; init; }

    /// <summary>The names for messages, in order.</summary>
    internal string Wanted => Labels == 1
        ? Number == NumberColumn.Required ? "node and number" : "node"
        : Number == NumberColumn.Required ? "source, target and weight" : "source and target";

    /// <summary>How many columns each row must have.</summary>
    public int ColumnsUsed => Labels + (Number == NumberColumn.Required ? 1 : 0);

    /// <summary>Checks that as many columns are named as are used.</summary>
    /// <exception cref="InputException">Too few, too many, or one twice.</exception>
    public void Check(string path)
    {
        if (Columns is null)
            return;
        if (Columns.Count != ColumnsUsed)
        {
            throw new InputException(path, null, $"{Columns.Count} columns are named where {ColumnsUsed} are needed ({Wanted})",
                $"name {ColumnsUsed} columns");
        }
        if (Columns.Distinct(StringComparer.Ordinal).Count() != Columns.Count)
            throw new InputException(path, null, "a column is named twice", "name each column once");
    }

    /// <summary>The refusal of a third column whose meaning was not said.</summary>
    public static InputException WeightUnsaid(string path, long? line) => new(path, line,
        "there is a third column, and it was not said what it means",
        "say --weights conductance (a larger number is a stronger link), --weights resistance (a larger number is a weaker link) "
        + "or --weights none (ignore it)");

    /// <summary>The refusal of a first row that may be a header and may be data.</summary>
    internal static InputException HeaderOrNode(string path, long line, string name) => new(path, line,
        $"'{InputException.Show(name)}' may be a column name or a node: there is a node of that name",
        "put a header of other names above the first row, such as source,target (and weight)");

    /// <summary>
    /// Checks a file about nodes that are known: where the row taken for a header names nodes only, it may be data.
    /// </summary>
    internal void CheckHeader(IRowSource rows, NodeLabels labels)
    {
        InputFacts facts = rows.Facts;
        if (rows.GuessedHeaderLine is { } line && facts.Columns.Take(Labels).All(name => labels.IndexOf(name) >= 0))
            throw HeaderOrNode(facts.Path, line, facts.Columns[0]);
    }

    /// <summary>The refusal of a file without the number column that was asked for.</summary>
    public InputException NumberMissing(string path, long? line) => new(path, line,
        Labels == 2 ? "there is no third column for the weight" : "there is no second column for the number",
        Labels == 2 ? "give each link a weight, or say --weights none" : "give each node a number after its id");
}

/// <summary>
/// One row. Its spans live until the next row is read. Where <see cref="AreIntegers"/> holds, the labels are in
/// <see cref="FirstInteger"/> and <see cref="SecondInteger"/>, else in <see cref="First"/> and <see cref="Second"/>.
/// </summary>
public ref struct Row
{
    /// <summary>Whether all labels of the row are int64 in canonical form.</summary>
    public bool AreIntegers;

    /// <summary>The first label as an integer.</summary>
    public long FirstInteger;

    /// <summary>The second label as an integer; 0 where one label was asked for.</summary>
    public long SecondInteger;

    /// <summary>The first label as text.</summary>
    public ReadOnlySpan<char> First;

    /// <summary>The second label as text; empty where one label was asked for.</summary>
    public ReadOnlySpan<char> Second;

    /// <summary>The number, which may be negative, infinite or NaN; 0 where none was required.</summary>
    public double Number;
}

/// <summary>A forward-only source of rows. Not safe for several threads.</summary>
public interface IRowSource : IDisposable
{
    /// <summary>Reads the next row; false at the end.</summary>
    /// <exception cref="InputException">The row or the file cannot be used.</exception>
    bool Read(out Row row);

    /// <summary>An error at the current row.</summary>
    InputException Fault(string problem, string mend);

    /// <summary>The line whose cells were taken for column names on their looks, or null where nothing was guessed.</summary>
    long? GuessedHeaderLine { get; }

    /// <summary>What was read; complete after the last row.</summary>
    InputFacts Facts { get; }
}
