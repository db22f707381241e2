// Where a run's rows go. The library pushes columns of values; what becomes of them (Parquet, memory) is the sink's affair.
// Invariant: a table's batches all have the columns of its definition, in that order and of that kind.

namespace ScaleResist.Runs;

/// <summary>The kind of a column; the array type of its values stands behind each.</summary>
public enum ColumnKind
{
    /// <summary><c>long[]</c>, or <c>long?[]</c> where nullable.</summary>
    Int64,

    /// <summary><c>double[]</c>, or <c>double?[]</c> where nullable.</summary>
    Double,

    /// <summary><c>bool[]</c>; never null.</summary>
    Boolean,

    /// <summary><c>string[]</c>; never null.</summary>
    Text,

    /// <summary>
    /// <c>float[]</c>, row-major: as many values a row as the batch's array length divided by its count; never null.
    /// </summary>
    FloatList,
}

/// <summary>A column: name, kind, and whether values may be missing.</summary>
/// <param name="Name">The name as the lake shows it.</param>
/// <param name="Kind">The kind of value.</param>
/// <param name="Nullable">Whether values may be missing.</param>
public sealed record ColumnDefinition(string Name, ColumnKind Kind, bool Nullable = false);

/// <summary>A table: name and columns.</summary>
/// <param name="Name">The name of the table, which is also the name of its folder in the lake.</param>
/// <param name="Columns">Its columns.</param>
public sealed record TableDefinition(string Name, IReadOnlyList<ColumnDefinition> Columns);

/// <summary>Some rows of a table, column by column.</summary>
/// <param name="Count">The number of rows.</param>
/// <param name="Columns">One array a column, of the type its <see cref="ColumnKind"/> names.</param>
public sealed record RowBatch(int Count, IReadOnlyList<Array> Columns);

/// <summary>Takes the tables of a run.</summary>
public interface ITableSink
{
    /// <summary>Opens a table. Each name is opened at most once a run.</summary>
    ITableWriter Open(TableDefinition table);
}

/// <summary>Takes the rows of one table, in order.</summary>
public interface ITableWriter
{
    /// <summary>
    /// Takes a batch (at most about a million rows). The batch is the writer's from here on: its arrays are not written again.
    /// May return before the rows are stored; an error of an earlier batch is thrown by a later call.
    /// </summary>
    void Write(RowBatch batch);

    /// <summary>Waits until all rows are stored.</summary>
    /// <returns>The number of rows of the table.</returns>
    long Complete();
}
