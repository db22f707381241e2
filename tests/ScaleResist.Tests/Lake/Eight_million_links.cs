// The writer at the size of the main job. Prints what it took; the bound only catches a writer that became hopeless.

using System.Diagnostics;
using ScaleResist.Cli.Lake;
using ScaleResist.Runs;
using ScaleResist.Tests.Cli;
using Xunit.Abstractions;

namespace ScaleResist.Tests.Lake;

public sealed class Eight_million_links(ITestOutputHelper output)
{
    private const int Rows = 8_000_000;

    [Theory]
    [Trait("Category", "Slow")]
    [InlineData(1, false)]
    [InlineData(2, false)]
    [InlineData(2, true)]
    public void Are_written_in_seconds(int encoders, bool texts)
    {
        using Place place = new();
        RowBatch[] batches = [.. Enumerable.Range(0, 4).Select(seed => Batch(250_000, seed, texts))];
        TimeSpan processor = Environment.CpuUsage.TotalTime;
        long before = GC.GetTotalAllocatedBytes();
        Stopwatch watch = Stopwatch.StartNew();
        ParquetTableSink sink = new(place.Lake, new Dictionary<string, string>(), encoders);
        ITableWriter writer = sink.Open(Tables.Links(texts ? ColumnKind.Text : ColumnKind.Int64));
        for (int i = 0; i < Rows / 250_000; i++)
            writer.Write(batches[i % batches.Length]);
        Assert.Equal(Rows, writer.Complete());
        watch.Stop();
        long bytes = Directory.GetFiles(Path.Combine(place.Lake, "links")).Sum(f => new FileInfo(f).Length);
        processor = Environment.CpuUsage.TotalTime - processor;
        output.WriteLine($"{encoders} encoders, {(texts ? "texts" : "integers")}: {watch.Elapsed.TotalSeconds:0.00} s "
            + $"({processor.TotalSeconds:0.00} s of processor), {bytes / 1e6:0} MB, "
            + $"{(GC.GetTotalAllocatedBytes() - before) / 1e6:0} MB allocated");
        Assert.Equal((long)Rows,
            DuckLake.Query($"SELECT count(*) FROM '{place.Lake}/links/*.parquet' WHERE resistance > 0")[0][0]);
        Assert.True(watch.Elapsed < TimeSpan.FromSeconds(60));
    }

    private static RowBatch Batch(int rows, int seed, bool texts)
    {
        Random random = new(seed);
        long[] source = [.. Enumerable.Range(0, rows).Select(i => (long)((seed * rows) + i) / 8)];
        long[] target = [.. source.Select(_ => random.NextInt64(1_000_000))];
        double[] resistance = [.. source.Select(_ => 0.01 + random.NextDouble())];
        bool[] bridge = [.. source.Select(_ => random.Next(50) == 0)];
        return new RowBatch(rows,
        [
            texts ? Array.ConvertAll(source, s => $"word-{s}") : source,
            texts ? Array.ConvertAll(target, s => $"word-{s}") : target,
            new long[rows],
            Array.ConvertAll(resistance, _ => 1.0),
            resistance,
            Array.ConvertAll(resistance, r => r * random.NextDouble() * 0.1),
            Array.ConvertAll(resistance, r => r * (1 - (random.NextDouble() * 0.1))),
            Array.ConvertAll(resistance, r => r * (1 + (random.NextDouble() * 0.1))),
            resistance,
            bridge,
            Array.ConvertAll(bridge, b => b ? random.NextInt64(1000) : (long?)null),
            new double?[rows],
            new double?[rows],
            Array.ConvertAll(bridge, b => b ? "bridge" : "probe"),
        ]);
    }
}
