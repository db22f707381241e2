// One column of one row group, widened to what the readers work with: int64 or string labels, double numbers.
// Invariant: after Load, no value is null; a null or an integer beyond int64 is refused with its row.

using System.Buffers;
using System.Numerics;
using Parquet;
using Parquet.Schema;
using ScaleResist.Graphs;

namespace ScaleResist.Cli.Lake;

/// <summary>Reads a column of labels or numbers, row group by row group.</summary>
internal sealed class ParquetColumn
{
    private readonly DataField column;
    private readonly bool isNumber;
    private readonly Func<long, string, string, InputException> fault;

    /// <summary>Creates a reader of a column.</summary>
    /// <param name="column">The column.</param>
    /// <param name="isNumber">Whether it is read as numbers rather than labels.</param>
    /// <param name="fault">Makes an error from a 0-based row of the row group, the problem and the mend.</param>
    public ParquetColumn(DataField column, bool isNumber, Func<long, string, string, InputException> fault)
    {
        this.column = column;
        this.isNumber = isNumber;
        this.fault = fault;
    }

    /// <summary>Whether labels are integers.</summary>
    public bool IsInteger => IsIntegerType(column.ClrType);

    /// <summary>Integer labels of the row group.</summary>
    public long[] Integers { get; private set; } = [];

    /// <summary>String labels of the row group.</summary>
    public ReadOnlyMemory<char>[] Texts { get; private set; } = [];

    /// <summary>Numbers of the row group.</summary>
    public double[] Numbers { get; private set; } = [];

    /// <summary>Why a field cannot be used: problem and mend; null where it can.</summary>
    public static (string Problem, string Mend)? Unusable(Field field, bool isNumber)
    {
        string name = InputException.Show(field.Name);
        if (field is not DataField data || data.IsArray || data.MaxRepetitionLevel > 0)
            return ($"the column '{name}' is nested", "give a flat column");
        Type type = data.ClrType;
        if (IsIntegerType(type))
            return null;
        if (isNumber)
        {
            return type == typeof(float) || type == typeof(double) || type == typeof(decimal)
                ? null
                : ($"the column '{name}' of type {NameOf(type)} cannot be read as a number", "cast it to DOUBLE");
        }
        return type == typeof(ReadOnlyMemory<char>)
            ? null
            : ($"the column '{name}' of type {NameOf(type)} cannot be read as node ids", "cast it to BIGINT or VARCHAR");
    }

    /// <summary>Loads the column of a row group.</summary>
    public Task Load(ParquetRowGroupReader group, int rows, CancellationToken ct)
    {
        Type type = column.ClrType;
        if (type == typeof(long))
            return Load<long>(group, rows, ct);
        if (type == typeof(int))
            return Load<int>(group, rows, ct);
        if (type == typeof(short))
            return Load<short>(group, rows, ct);
        if (type == typeof(sbyte))
            return Load<sbyte>(group, rows, ct);
        if (type == typeof(ulong))
            return Load<ulong>(group, rows, ct);
        if (type == typeof(uint))
            return Load<uint>(group, rows, ct);
        if (type == typeof(ushort))
            return Load<ushort>(group, rows, ct);
        if (type == typeof(byte))
            return Load<byte>(group, rows, ct);
        if (type == typeof(float))
            return Load<float>(group, rows, ct);
        if (type == typeof(double))
            return Load<double>(group, rows, ct);
        return type == typeof(decimal) ? Load<decimal>(group, rows, ct) : LoadTexts(group, rows, ct);
    }

    private async Task Load<T>(ParquetRowGroupReader group, int rows, CancellationToken ct)
        where T : struct, INumber<T>
    {
        // By type and not by pattern: at run time an array of ulong passes for one of long.
        T[] values = isNumber && typeof(T) == typeof(double) ? Sized((T[])(Array)Numbers, rows)
            : !isNumber && typeof(T) == typeof(long) ? Sized((T[])(Array)Integers, rows) : new T[rows];
        if (column.IsNullable)
        {
            await LoadNullable(group, values, rows, ct).ConfigureAwait(false);
        }
        else
        {
            await group.ReadAsync<T>(column, values.AsMemory(0, rows), null, ct).ConfigureAwait(false);
        }
        if (isNumber)
            Numbers = typeof(T) == typeof(double) ? (double[])(Array)values : Array.ConvertAll(values, double.CreateSaturating);
        else
            Integers = typeof(T) == typeof(long) ? (long[])(Array)values : Widen(values);
    }

    private async Task LoadTexts(ParquetRowGroupReader group, int rows, CancellationToken ct)
    {
        Texts = Sized(Texts, rows);
        if (column.IsNullable)
        {
            await LoadNullable(group, Texts, rows, ct).ConfigureAwait(false);
        }
        else
        {
            await group.ReadAsync<ReadOnlyMemory<char>>(column, Texts.AsMemory(0, rows), null, ct).ConfigureAwait(false);
        }
        for (int i = 0; i < rows; i++)
        {
            if (Texts[i].Length is 0 or > RowRequest.LongestLabel)
            {
                throw fault(i, $"the node id '{InputException.Show(Texts[i].Span)}' has {Texts[i].Length} characters",
                    $"give node ids of 1 to {RowRequest.LongestLabel} characters");
            }
        }
    }

    private async Task LoadNullable<T>(ParquetRowGroupReader group, T[] values, int rows, CancellationToken ct)
        where T : struct
    {
        T?[] nullable = ArrayPool<T?>.Shared.Rent(rows);
        try
        {
            await group.ReadAsync<T>(column, nullable.AsMemory(0, rows), null, ct).ConfigureAwait(false);
            for (int i = 0; i < rows; i++)
                values[i] = nullable[i] ?? throw Null(i);
        }
        finally
        {
            ArrayPool<T?>.Shared.Return(nullable, clearArray: true);
        }
    }

    private long[] Widen<T>(T[] values)
        where T : struct, INumber<T>
    {
        long[] wide = new long[values.Length];
        for (int i = 0; i < wide.Length; i++)
        {
            wide[i] = long.CreateSaturating(values[i]);
            if (T.CreateSaturating(wide[i]) != values[i])
                throw fault(i, $"the node id {values[i]} does not fit into int64", "use smaller ids, or cast them to VARCHAR");
        }
        return wide;
    }

    private InputException Null(int row) =>
        fault(row, $"the column '{InputException.Show(column.Name)}' is null", "drop the row or fill it in");

    private static string NameOf(Type type) => type == typeof(ReadOnlyMemory<char>) ? "String"
        : type == typeof(byte[]) || type == typeof(ReadOnlyMemory<byte>) ? "Binary" : type.Name;

    private static T[] Sized<T>(T[] buffer, int rows) => buffer.Length >= rows ? buffer : new T[rows];

    private static bool IsIntegerType(Type type) =>
        type == typeof(long) || type == typeof(int) || type == typeof(short) || type == typeof(sbyte)
        || type == typeof(ulong) || type == typeof(uint) || type == typeof(ushort) || type == typeof(byte);
}
