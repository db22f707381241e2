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
        DataField[] fields = Array.ConvertAll(columns, column => new DataField(column.Name, column.Values.GetType().GetElementType()!));
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
        return values switch
        {
            long[] a => One(a),
            long?[] a => Nullable(a),
            ulong[] a when a.GetType() == typeof(ulong[]) => One(a),
            int[] a when a.GetType() == typeof(int[]) => One(a),
            uint[] a => One(a),
            short[] a when a.GetType() == typeof(short[]) => One(a),
            ushort[] a => One(a),
            sbyte[] a when a.GetType() == typeof(sbyte[]) => One(a),
            byte[] a => One(a),
            int?[] a => Nullable(a),
            double[] a => One(a),
            double?[] a => Nullable(a),
            float[] a => One(a),
            decimal[] a => One(a),
            bool[] a => One(a),
            string?[] a => group.WriteAsync(field, (IReadOnlyCollection<string>)a[start..(start + rows)]!, null),
            _ => throw new NotSupportedException(values.GetType().Name),
        };

        Task One<T>(T[] a)
            where T : struct => group.WriteAsync<T>(field, a.AsMemory(start, rows));

        Task Nullable<T>(T?[] a)
            where T : struct => group.WriteAsync<T>(field, a.AsMemory(start, rows));
    }
}
