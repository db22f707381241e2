// Reads a lake the way users do: DuckDB, by glob over runs.

using DuckDB.NET.Data;

namespace ScaleResist.Tests.Lake;

internal static class DuckLake
{
    public static List<object?[]> Query(string sql)
    {
        using DuckDBConnection connection = new("DataSource=:memory:");
        connection.Open();
        using DuckDBCommand command = connection.CreateCommand();
        command.CommandText = sql;
        using System.Data.Common.DbDataReader reader = command.ExecuteReader();
        List<object?[]> rows = [];
        while (reader.Read())
            rows.Add([.. Enumerable.Range(0, reader.FieldCount).Select(i => reader.IsDBNull(i) ? null : reader.GetValue(i))]);
        return rows;
    }

    /// <summary>A table over all runs of a lake.</summary>
    public static string Table(string lake, string table) =>
        $"read_parquet('{lake}/run=*/{table}/*.parquet', hive_partitioning = true, hive_types_autocast = false)";
}
