// A sink that keeps what a run writes, for tests.

using ScaleResist.Runs;

namespace ScaleResist.Tests.Runs;

internal sealed class MemorySink : ITableSink
{
    public Dictionary<string, MemoryTable> Tables { get; } = [];

    public MemoryTable this[string table] => Tables[table];

    public ITableWriter Open(TableDefinition table)
    {
        MemoryTable kept = new(table);
        Tables.Add(table.Name, kept);
        return kept;
    }
}

internal sealed class MemoryTable(TableDefinition definition) : ITableWriter
{
    private readonly List<RowBatch> batches = [];

    public TableDefinition Definition => definition;

    public void Write(RowBatch batch)
    {
        Assert.Equal(definition.Columns.Count, batch.Columns.Count);
        batches.Add(batch);
    }

    public long Complete() => batches.Sum(batch => (long)batch.Count);

    /// <summary>All values of a column; a float list column gives the flat values.</summary>
    public T[] Column<T>(string name)
    {
        int at = definition.Columns.ToList().FindIndex(column => column.Name == name);
        return [.. batches.SelectMany(batch => (T[])batch.Columns[at])];
    }
}

internal sealed class SilentObserver : IRunObserver
{
    public void Begin(string phase, double? total, string unit)
    {
    }

    public void Report(double done)
    {
    }

    public void End()
    {
    }
}
