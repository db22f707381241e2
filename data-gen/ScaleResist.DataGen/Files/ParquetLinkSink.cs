// Links as Parquet: source and target int64, conductance double where there is one; row groups of a million rows.

using Parquet;
using Parquet.Schema;
using ScaleResist.DataGen.Networks;

namespace ScaleResist.DataGen.Files;

internal sealed class ParquetLinkSink : ILinkSink, IDisposable
{
    private const int RowsPerGroup = 1 << 20;
    private readonly DataField[] fields;
    private readonly ParquetWriter writer;
    private readonly long[] sources = new long[RowsPerGroup];
    private readonly long[] targets = new long[RowsPerGroup];
    private readonly double[]? conductances;
    private int filled;
    private bool finished;

    public ParquetLinkSink(Stream stream, bool weighted)
    {
        List<DataField> columns = [new DataField<long>("source"), new DataField<long>("target")];
        if (weighted)
        {
            columns.Add(new DataField<double>("conductance"));
            conductances = new double[RowsPerGroup];
        }
        fields = [.. columns];
        ParquetOptions options = new() { CompressionMethod = CompressionMethod.Zstd };
        writer = ParquetWriter.CreateAsync(new ParquetSchema(fields), stream, options).GetAwaiter().GetResult();
    }

    public void Link(long source, long target, double conductance)
    {
        sources[filled] = source;
        targets[filled] = target;
        if (conductances is not null)
            conductances[filled] = conductance;
        if (++filled == RowsPerGroup)
            WriteGroup().GetAwaiter().GetResult();
    }

    /// <summary>Writes the last rows and the footer.</summary>
    public void Finish()
    {
        if (filled > 0)
            WriteGroup().GetAwaiter().GetResult();
        finished = true;
        writer.DisposeAsync().AsTask().GetAwaiter().GetResult();
    }

    public void Dispose()
    {
        if (!finished)
            writer.DisposeAsync().AsTask().GetAwaiter().GetResult();
    }

    private async Task WriteGroup()
    {
        using ParquetRowGroupWriter group = writer.CreateRowGroup();
        await group.WriteAsync<long>(fields[0], sources.AsMemory(0, filled));
        await group.WriteAsync<long>(fields[1], targets.AsMemory(0, filled));
        if (conductances is not null)
            await group.WriteAsync<double>(fields[2], conductances.AsMemory(0, filled));
        group.CompleteValidate();
        filled = 0;
    }
}
