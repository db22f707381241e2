// Rows of a Parquet file, or of a folder of Parquet parts in the order of their names, one row group in memory at a time.
// Invariant: all parts have the same columns; whatever the Parquet library throws at a broken file comes out as an
// InputException.

using System.Globalization;
using System.Security.Cryptography;
using Parquet;
using Parquet.Schema;
using ScaleResist.Graphs;

namespace ScaleResist.Cli.Lake;

/// <summary>Rows of Parquet input. Positions in errors are 1-based rows of the part named.</summary>
internal sealed class ParquetRows : IRowSource
{
    private const int LargestRowGroup = 1 << 27;
    private readonly string path;
    private readonly RowRequest request;
    private readonly Action<long>? bytesRead;
    private readonly CancellationToken ct;
    private readonly string[] parts;
    private readonly IncrementalHash hash = IncrementalHash.CreateHash(HashAlgorithmName.SHA256);
    private int part = -1;
    private ParquetReader? reader;
    private (string Name, Type? Type)[]? schema;
    private ParquetColumn[] columns = [];
    private string[] names = [];
    private int group;
    private int groupRows;
    private int row = -1;
    private long rowsBefore;
    private long rows;
    private long bytes;
    private long bytesBefore;
    private string? digest;

    private ParquetRows(string path, RowRequest request, Action<long>? bytesRead, CancellationToken ct)
    {
        this.path = path;
        this.request = request;
        this.bytesRead = bytesRead;
        this.ct = ct;
        parts = Directory.Exists(path) ? Parts(path) : [path];
    }

    /// <inheritdoc/>
    public long? GuessedHeaderLine => null;

    /// <inheritdoc/>
    public InputFacts Facts => new()
    {
        Path = path,
        Form = "parquet",
        Bytes = bytes,
        Sha256 = digest ??= Convert.ToHexStringLower(hash.GetHashAndReset()),
        Rows = rows,
        Header = [.. (schema ?? []).Select(column => column.Name)],
        Columns = names,
    };

    /// <summary>Opens a <c>.parquet</c> file or a folder of them; names that begin with <c>_</c> or <c>.</c> are passed
    /// over.</summary>
    /// <exception cref="InputException">The input cannot be used.</exception>
    public static IRowSource Open(string path, RowRequest request, Action<long>? bytesRead = null, CancellationToken ct = default)
    {
        request.Check(path);
        ParquetRows source = new(path, request, bytesRead, ct);
        try
        {
            if (!source.NextGroup())
                throw new InputException(path, null, "has no data rows", "give at least one row");
            return source;
        }
        catch
        {
            source.Dispose();
            throw;
        }
    }

    /// <inheritdoc/>
    public bool Read(out Row result)
    {
        result = default;
        if (row + 1 == groupRows && !NextGroup())
            return false;
        row++;
        rows++;
        ParquetColumn first = columns[0];
        ParquetColumn second = columns[request.Labels - 1];
        if (first.IsInteger && second.IsInteger)
        {
            result.AreIntegers = true;
            result.FirstInteger = first.Integers[row];
            result.SecondInteger = request.Labels == 2 ? second.Integers[row] : 0;
        }
        else
        {
            result.First = Text(first);
            result.Second = request.Labels == 2 ? Text(second) : default;
        }
        if (request.Number == NumberColumn.Required)
            result.Number = columns[^1].Numbers[row];
        return true;
    }

    /// <inheritdoc/>
    public InputException Fault(string problem, string mend) => new(parts[part], rowsBefore + row + 1, problem, mend);

    /// <inheritdoc/>
    public void Dispose()
    {
        ClosePart();
        hash.Dispose();
    }

    private ReadOnlySpan<char> Text(ParquetColumn column) =>
        column.IsInteger ? column.Integers[row].ToString(CultureInfo.InvariantCulture) : column.Texts[row].Span;

    private static string[] Parts(string folder)
    {
        try
        {
            string[] parts = [.. Directory.EnumerateFiles(folder)
                .Where(file => file.EndsWith(".parquet", StringComparison.OrdinalIgnoreCase)
                    && Path.GetFileName(file)[0] is not ('_' or '.'))
                .Order(StringComparer.Ordinal)];
            return parts.Length > 0
                ? parts
                : throw new InputException(folder, null, "is a folder without .parquet files",
                    "name the folder that holds the parts");
        }
        catch (Exception e) when (e is IOException or UnauthorizedAccessException)
        {
            throw new InputException(folder, null, $"the folder cannot be listed ({e.Message})",
                "ask for permission to read it", e);
        }
    }

    /// <summary>Loads the next row group that has rows; false after the last.</summary>
    private bool NextGroup()
    {
        rowsBefore += groupRows;
        groupRows = 0;
        row = -1;
        while (true)
        {
            ct.ThrowIfCancellationRequested();
            while (reader is null || group == reader.RowGroupCount)
            {
                ClosePart();
                if (part + 1 == parts.Length)
                    return false;
                part++;
                OpenPart(parts[part]);
            }
            Guard(async () =>
            {
                using ParquetRowGroupReader open = reader.OpenRowGroupReader(group);
                long count = open.RowCount;
                if (count is < 0 or > LargestRowGroup)
                    throw new InputException(parts[part], null, $"a row group of {count} rows",
                        "write row groups of about a million rows");
                foreach (ParquetColumn column in columns)
                    await column.Load(open, (int)count, ct).ConfigureAwait(false);
                groupRows = (int)count;
                return 0;
            });
            group++;
            bytesRead?.Invoke(bytesBefore + ((bytes - bytesBefore) * group / reader.RowGroupCount));
            if (groupRows > 0)
                return true;
        }
    }

    private void OpenPart(string file)
    {
        if (Directory.Exists(file))
            throw new InputException(file, null, "is a folder", "name the folder that holds the parts");
        group = 0;
        rowsBefore = 0;
        bytesBefore = bytes;
        FileStream stream = TextRows.OpenFile(file);
        try
        {
            byte[] buffer = new byte[1 << 16];
            for (int count; (count = stream.Read(buffer)) > 0; bytes += count)
                hash.AppendData(buffer.AsSpan(0, count));
            stream.Position = 0;
            reader = Guard(() => ParquetReader.CreateAsync(stream, null, leaveStreamOpen: false, ct));
        }
        catch (Exception e)
        {
            stream.Dispose();
            if (e is IOException)
                throw new InputException(file, null, $"cannot be read ({e.Message})", "check the disk or network share", e);
            throw;
        }
        Field[] fields = Guard(() => Task.FromResult(reader.Schema.Fields.ToArray()));
        (string, Type?)[] found = Array.ConvertAll(fields, field => (field.Name, (field as DataField)?.ClrType));
        if (schema is not null && !schema.SequenceEqual(found))
        {
            throw new InputException(file, null, $"its columns differ from those of {Path.GetFileName(parts[0])}",
                "give all parts of a folder the same columns");
        }
        schema = found;
        columns = SelectColumns(file, fields);
    }

    private ParquetColumn[] SelectColumns(string file, Field[] fields)
    {
        if (request is { Number: NumberColumn.Refused } && fields.Length > request.Labels)
            throw RowRequest.WeightUnsaid(file, null);
        ParquetColumn[] selected = new ParquetColumn[request.ColumnsUsed];
        names = new string[selected.Length];
        for (int i = 0; i < selected.Length; i++)
        {
            bool isNumber = i >= request.Labels;
            if (request.Columns is null && i >= fields.Length)
            {
                throw isNumber ? request.NumberMissing(file, null)
                    : new InputException(file, null, $"has {fields.Length} of {request.ColumnsUsed} columns",
                        "give it the columns needed");
            }
            Field field = request.Columns is null ? fields[i] : Find(file, fields, request.Columns[i]);
            if (ParquetColumn.Unusable(field, isNumber) is { } problem)
                throw new InputException(file, null, problem.Problem, problem.Mend);
            names[i] = field.Name;
            selected[i] = new ParquetColumn((DataField)field, isNumber,
                (index, what, mend) => new InputException(file, rowsBefore + index + 1, what, mend));
        }
        return selected;
    }

    private static Field Find(string file, Field[] fields, string name)
    {
        if (int.TryParse(name, NumberStyles.None, CultureInfo.InvariantCulture, out int position)
            && position >= 1 && position <= fields.Length)
        {
            return fields[position - 1];
        }
        Field[] found = [.. fields.Where(field => field.Name == name)];
        if (found.Length == 0)
            found = [.. fields.Where(field => string.Equals(field.Name, name, StringComparison.OrdinalIgnoreCase))];
        return found.Length == 1 ? found[0] : throw new InputException(file, null,
            $"there is {(found.Length == 0 ? "no" : "more than one")} column '{InputException.Show(name)}'; it has "
            + string.Join(", ", fields.Take(20).Select(field => InputException.Show(field.Name))),
            "name columns that the file has");
    }

    private void ClosePart()
    {
        if (reader is null)
            return;
        reader.DisposeAsync().AsTask().GetAwaiter().GetResult();
        reader = null;
    }

    // A broken file makes the library throw whatever its innermost loop stumbles over, out of range to out of memory.
    private T Guard<T>(Func<Task<T>> action)
    {
        try
        {
            return action().GetAwaiter().GetResult();
        }
        catch (Exception e) when (e is not (InputException or OperationCanceledException))
        {
            throw new InputException(parts[part], null, $"cannot be read as Parquet ({e.Message})",
                "the file is truncated, corrupted or in another form: write it again", e);
        }
    }
}
