// Turns rows into one Parquet part: one row group, zstd, flushed to disk before it counts as written.
// Integers are delta-packed (which keeps min/max for filters), doubles byte-split (smaller and faster, without min/max),
// and the few values of `method` go to a dictionary.

using System.IO.Compression;
using System.Numerics;
using Parquet;
using Parquet.Schema;
using ScaleResist.Runs;

namespace ScaleResist.Cli.Lake;

/// <summary>Writes the parts of one table.</summary>
internal sealed class PartEncoder
{
    /// <summary>The most rows of a part.</summary>
    public const int MostRows = 1 << 20;

    private const int MostListValues = 1 << 23;
    private readonly TableDefinition table;
    private readonly IReadOnlyDictionary<string, string> metadata;
    private readonly ParquetSchema schema;

    public PartEncoder(TableDefinition table, IReadOnlyDictionary<string, string> metadata)
    {
        this.table = table;
        this.metadata = metadata;
        schema = new ParquetSchema(table.Columns.Select(Field));
    }

    /// <summary>Rows of a part whose rows carry lists of a width (0: none): a power of two, at most 2^23 list values.</summary>
    public static int RowsPerPart(int listWidth) =>
        listWidth == 0
            ? MostRows
            : Math.Min(MostRows, (int)BitOperations.RoundUpToPowerOf2((uint)Math.Max(1, MostListValues / listWidth) + 1) / 2);

    /// <summary>Holds a batch against the definition; a mismatch is our own fault.</summary>
    /// <returns>The width of its lists, 0 where it has none.</returns>
    public int Check(RowBatch batch)
    {
        if (batch.Columns.Count != table.Columns.Count)
            throw Misfit("*", $"{table.Columns.Count} columns are wanted, the batch has {batch.Columns.Count}");
        int width = 0;
        for (int i = 0; i < batch.Columns.Count; i++)
        {
            ColumnDefinition column = table.Columns[i];
            Array values = batch.Columns[i];
            Type wanted = ArrayType(column);
            if (values.GetType() != wanted)
                throw Misfit(column.Name, $"{wanted.Name} is wanted, the batch has {values.GetType().Name}");
            if (column.Kind == ColumnKind.FloatList && batch.Count > 0)
            {
                if (values.Length == 0 || values.Length % batch.Count != 0)
                    throw Misfit(column.Name, $"{values.Length} values in {batch.Count} rows");
                width = values.Length / batch.Count;
            }
            else if (values.Length < batch.Count)
            {
                throw Misfit(column.Name, $"{values.Length} values in {batch.Count} rows");
            }
        }
        return width;
    }

    /// <summary>Writes a part on the calling thread.</summary>
    public void Write(string path, IReadOnlyList<RowSegment> segments)
    {
        using InlineFile file = new(path);
        WriteAsync(file, segments).GetAwaiter().GetResult();
        file.Flush(flushToDisk: true);
    }

    private async Task WriteAsync(FileStream file, IReadOnlyList<RowSegment> segments)
    {
        await using ParquetWriter writer = await ParquetWriter.CreateAsync(schema, file, Options());
        writer.CustomMetadata = metadata;
        if (segments.Count == 0)
            return;
        using ParquetRowGroupWriter group = writer.CreateRowGroup();
        for (int i = 0; i < table.Columns.Count; i++)
            await WriteColumn(group, i, segments);
        group.CompleteValidate();
    }

    private ArgumentException Misfit(string column, string problem) => new($"Column '{table.Name}.{column}': {problem}.");

    private static Type ArrayType(ColumnDefinition column) => column.Kind switch
    {
        ColumnKind.Int64 => column.Nullable ? typeof(long?[]) : typeof(long[]),
        ColumnKind.Double => column.Nullable ? typeof(double?[]) : typeof(double[]),
        ColumnKind.Boolean => typeof(bool[]),
        ColumnKind.Text => typeof(string[]),
        ColumnKind.FloatList => typeof(float[]),
        _ => throw new ArgumentOutOfRangeException(nameof(column), column.Kind, "Unknown column kind."),
    };

    private static Field Field(ColumnDefinition column) => column.Kind switch
    {
        ColumnKind.Int64 => new DataField<long>(column.Name, column.Nullable),
        ColumnKind.Double => new DataField<double>(column.Name, column.Nullable),
        ColumnKind.Boolean => new DataField<bool>(column.Name, false),
        ColumnKind.Text => new DataField<string>(column.Name, false),
        ColumnKind.FloatList => new ListField(column.Name, new DataField<float>("element", false)),
        _ => throw new ArgumentOutOfRangeException(nameof(column), column.Kind, "Unknown column kind."),
    };

    private ParquetOptions Options()
    {
        ParquetOptions options = new()
        {
            CompressionMethod = CompressionMethod.Zstd,
            CompressionLevel = CompressionLevel.Fastest,
        };
        for (int i = 0; i < table.Columns.Count; i++)
        {
            EncodingHint? hint = table.Columns[i].Kind switch
            {
                ColumnKind.Int64 => EncodingHint.DeltaBinaryPacked,
                ColumnKind.Double or ColumnKind.FloatList => EncodingHint.ByteSplitStream,
                // Labels are mostly distinct: a dictionary of them took three times as long and was larger.
                ColumnKind.Text when table.Columns[i].Name == "method" => EncodingHint.Dictionary,
                _ => null,
            };
            if (hint is EncodingHint known)
                options.ColumnEncodingHints[schema.DataFields[i].Path.ToString()] = known;
        }
        return options;
    }

    private Task WriteColumn(ParquetRowGroupWriter group, int index, IReadOnlyList<RowSegment> segments)
    {
        ColumnDefinition column = table.Columns[index];
        DataField field = schema.DataFields[index];
        return column.Kind switch
        {
            ColumnKind.Int64 when column.Nullable => group.WriteAsync(field, Gather<long?>(index, segments, 1)),
            ColumnKind.Int64 => group.WriteAsync(field, Gather<long>(index, segments, 1)),
            ColumnKind.Double when column.Nullable => group.WriteAsync(field, Gather<double?>(index, segments, 1)),
            ColumnKind.Double => group.WriteAsync(field, Gather<double>(index, segments, 1)),
            ColumnKind.Boolean => group.WriteAsync(field, Gather<bool>(index, segments, 1)),
            ColumnKind.Text => group.WriteAsync(field, Characters(index, segments)),
            ColumnKind.FloatList => WriteLists(group, field, index, segments),
            _ => throw new ArgumentOutOfRangeException(nameof(index), column.Kind, "Unknown column kind."),
        };
    }

    // The values of a column over all segments, without a copy where one batch is the whole part.
    private static ReadOnlyMemory<T> Gather<T>(int index, IReadOnlyList<RowSegment> segments, int width)
    {
        if (segments.Count == 1)
            return Values<T>(segments[0], index, width);
        T[] all = new T[segments.Sum(s => s.Rows) * width];
        int at = 0;
        foreach (RowSegment segment in segments)
        {
            ReadOnlyMemory<T> some = Values<T>(segment, index, width);
            some.CopyTo(all.AsMemory(at));
            at += some.Length;
        }
        return all;
    }

    private static ReadOnlyMemory<T> Values<T>(RowSegment segment, int index, int width) =>
        ((T[])segment.Batch.Columns[index]).AsMemory(segment.From * width, segment.Rows * width);

    private static ReadOnlyMemory<ReadOnlyMemory<char>> Characters(int index, IReadOnlyList<RowSegment> segments)
    {
        ReadOnlyMemory<char>[] all = new ReadOnlyMemory<char>[segments.Sum(s => s.Rows)];
        int at = 0;
        foreach (RowSegment segment in segments)
        {
            foreach (string text in Values<string>(segment, index, 1).Span)
                all[at++] = text.AsMemory();
        }
        return all;
    }

    private static Task WriteLists(ParquetRowGroupWriter group, DataField field, int index, IReadOnlyList<RowSegment> segments)
    {
        RowBatch first = segments[0].Batch;
        int width = first.Columns[index].Length / first.Count;
        ReadOnlyMemory<float> values = Gather<float>(index, segments, width);
        // Dremel levels: every value is defined, and a list begins where the repetition level is 0.
        int[] definition = new int[values.Length];
        Array.Fill(definition, field.MaxDefinitionLevel);
        int[] repetition = new int[values.Length];
        Array.Fill(repetition, field.MaxRepetitionLevel);
        for (int i = 0; i < repetition.Length; i += width)
            repetition[i] = 0;
        return group.WriteAllPartsAsync(field, values, definition.AsMemory(), repetition.AsMemory(), CancellationToken.None);
    }

    // Asynchronous calls are done at once: an encoder must not wait for a pool thread while the pool's threads wait for it.
    private sealed class InlineFile(string path)
        : FileStream(path, FileMode.CreateNew, FileAccess.Write, FileShare.Read, bufferSize: 1 << 16)
    {
        public override ValueTask WriteAsync(ReadOnlyMemory<byte> buffer, CancellationToken cancellationToken = default)
        {
            Write(buffer.Span);
            return ValueTask.CompletedTask;
        }

        public override Task WriteAsync(byte[] buffer, int offset, int count, CancellationToken cancellationToken)
        {
            Write(buffer, offset, count);
            return Task.CompletedTask;
        }

        public override Task FlushAsync(CancellationToken cancellationToken)
        {
            Flush();
            return Task.CompletedTask;
        }
    }
}
