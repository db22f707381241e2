// Small Parquet files for tests.

using Parquet;
using Parquet.Schema;

namespace ScaleResist.Tests.Lake;

internal static class ParquetFiles
{
    /// <summary>Writes columns of equal length (arrays of structs, of nullable structs, or of strings) in row groups.</summary>
    public static string Write(string path, int rowsInGroup, params (string Name, Array Values)[] columns)
    {
        File.WriteAllBytes(path, Bytes(rowsInGroup, columns));
        return path;
    }

    public static byte[] Bytes(int rowsInGroup, params (string Name, Array Values)[] columns) =>
        BytesAsync(rowsInGroup, columns).GetAwaiter().GetResult();

    private static async Task<byte[]> BytesAsync(int rowsInGroup, (string Name, Array Values)[] columns)
    {
        DataField[] fields = Array.ConvertAll(columns, column =>
            new DataField(column.Name, column.Values.GetType().GetElementType()!));
        using MemoryStream stream = new();
        await using (ParquetWriter writer = await ParquetWriter.CreateAsync(new ParquetSchema(fields), stream))
        {
            for (int start = 0; start < columns[0].Values.Length; start += rowsInGroup)
            {
                using ParquetRowGroupWriter group = writer.CreateRowGroup();
                int rows = Math.Min(rowsInGroup, columns[0].Values.Length - start);
                for (int i = 0; i < fields.Length; i++)
                    await Write(group, fields[i], columns[i].Values, start, rows);
                group.CompleteValidate();
            }
        }
        return stream.ToArray();
    }

    private static Task Write(ParquetRowGroupWriter group, DataField field, Array values, int start, int rows)
    {
        // By exact type: to a pattern, an array of ulong is an array of long too.
        Type type = values.GetType().GetElementType()!;
        return type == typeof(string)
            ? group.WriteAsync(field, (IReadOnlyCollection<string>)((string[])values)[start..(start + rows)])
            : type == typeof(long) ? One<long>() : type == typeof(ulong) ? One<ulong>()
            : type == typeof(int) ? One<int>() : type == typeof(uint) ? One<uint>()
            : type == typeof(short) ? One<short>() : type == typeof(ushort) ? One<ushort>()
            : type == typeof(sbyte) ? One<sbyte>() : type == typeof(byte) ? One<byte>()
            : type == typeof(double) ? One<double>() : type == typeof(float) ? One<float>()
            : type == typeof(decimal) ? One<decimal>() : type == typeof(bool) ? One<bool>()
            : type == typeof(long?) ? Nullable<long>() : type == typeof(int?) ? Nullable<int>()
            : type == typeof(double?) ? Nullable<double>() : throw new NotSupportedException(type.Name);

        Task One<T>()
            where T : struct => group.WriteAsync<T>(field, ((T[])values).AsMemory(start, rows));

        Task Nullable<T>()
            where T : struct => group.WriteAsync<T>(field, ((T?[])values).AsMemory(start, rows));
    }
}
