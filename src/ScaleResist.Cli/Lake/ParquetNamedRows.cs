// Parquet input with named columns of any flat type, as text: small tables such as planned changes. A null is an empty cell.
// Invariant: whatever the Parquet library throws at a broken file comes out as an InputException.

using System.Globalization;
using Parquet;
using Parquet.Schema;
using ScaleResist.Graphs;

namespace ScaleResist.Cli.Lake;

/// <summary>Rows of one Parquet file, all of them in memory. Lines are 1-based rows.</summary>
internal sealed class ParquetNamedRows : INamedRows
{
    private readonly string[]?[] columns; // null: an optional column that is not there
    private readonly int rows;
    private int row = -1;

    private ParquetNamedRows(string path, string[]?[] columns, int rows)
    {
        (Path, this.columns, this.rows) = (path, columns, rows);
    }

    /// <inheritdoc/>
    public string Path { get; }

    /// <inheritdoc/>
    public long Line => row + 1;

    /// <inheritdoc/>
    public string this[int column] => columns[column]?[row] ?? "";

    /// <summary>Reads a file.</summary>
    /// <exception cref="InputException">The file cannot be used.</exception>
    public static INamedRows Open(string path, NamedColumns wanted, CancellationToken ct = default)
    {
        if (Directory.Exists(path))
            throw new InputException(path, null, "is a folder, not a file", "name a file in it");
        using FileStream stream = TextRows.OpenFile(path);
        try
        {
            return Load(path, stream, wanted, ct).GetAwaiter().GetResult();
        }
        catch (Exception e) when (e is not (InputException or OperationCanceledException))
        {
            throw new InputException(path, null, $"cannot be read as Parquet ({e.Message})",
                "the file is truncated, corrupted or in another form: write it again", e);
        }
    }

    /// <inheritdoc/>
    public bool Has(int column) => columns[column] is not null;

    /// <inheritdoc/>
    public bool Read() => ++row < rows;

    /// <inheritdoc/>
    public void Dispose()
    {
    }

    private static async Task<INamedRows> Load(string path, Stream stream, NamedColumns wanted, CancellationToken ct)
    {
        await using ParquetReader reader = await ParquetReader.CreateAsync(stream, null, leaveStreamOpen: true, ct).ConfigureAwait(false);
        Field[] fields = [.. reader.Schema.Fields];
        int[] places = wanted.PlacesIn([.. fields.Select(field => field.Name)], path, null);
        List<string>?[] cells = [.. places.Select(place => place < 0 ? null : new List<string>())];
        for (int group = 0; group < reader.RowGroupCount; group++)
        {
            using ParquetRowGroupReader open = reader.OpenRowGroupReader(group);
            int count = checked((int)open.RowCount);
            for (int i = 0; i < places.Length; i++)
            {
                if (places[i] < 0)
                    continue;
                Field field = fields[places[i]];
                if (field is not DataField data || data.IsArray || data.MaxRepetitionLevel > 0)
                    throw new InputException(path, null, $"the column '{InputException.Show(field.Name)}' is nested", "give a flat column");
                cells[i]!.AddRange(await Texts(path, open, data, count, ct).ConfigureAwait(false));
            }
        }
        return new ParquetNamedRows(path, [.. cells.Select(column => column?.ToArray())], cells.Max(column => column?.Count ?? 0));
    }

    private static Task<string[]> Texts(string path, ParquetRowGroupReader group, DataField column, int count, CancellationToken ct)
    {
        Type type = column.ClrType;
        return type == typeof(ReadOnlyMemory<char>) ? Texts<ReadOnlyMemory<char>>(group, column, count, text => text.ToString().Trim(), ct)
            : type == typeof(long) ? Numbers<long>() : type == typeof(int) ? Numbers<int>() : type == typeof(short) ? Numbers<short>()
            : type == typeof(sbyte) ? Numbers<sbyte>() : type == typeof(ulong) ? Numbers<ulong>() : type == typeof(uint) ? Numbers<uint>()
            : type == typeof(ushort) ? Numbers<ushort>() : type == typeof(byte) ? Numbers<byte>() : type == typeof(float) ? Numbers<float>()
            : type == typeof(double) ? Numbers<double>() : type == typeof(decimal) ? Numbers<decimal>()
            : throw new InputException(path, null,
                $"the column '{InputException.Show(column.Name)}' of type {type.Name} cannot be read as text or numbers", "cast it to VARCHAR");

        Task<string[]> Numbers<T>()
            where T : struct, IFormattable => Texts<T>(group, column, count, number => number.ToString(null, CultureInfo.InvariantCulture), ct);
    }

    private static async Task<string[]> Texts<T>(ParquetRowGroupReader group, DataField column, int count, Func<T, string> show, CancellationToken ct)
        where T : struct
    {
        if (column.IsNullable)
        {
            T?[] nullable = new T?[count];
            await group.ReadAsync<T>(column, nullable.AsMemory(), null, ct).ConfigureAwait(false);
            return Array.ConvertAll(nullable, value => value is T there ? show(there) : "");
        }
        T[] values = new T[count];
        await group.ReadAsync<T>(column, values.AsMemory(), null, ct).ConfigureAwait(false);
        return Array.ConvertAll(values, value => show(value));
    }
}
