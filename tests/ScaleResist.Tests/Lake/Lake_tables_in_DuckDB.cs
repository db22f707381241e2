// The contract's tables as DuckDB sees them: names, types, values, nulls, lists, over two runs and several parts.

using ScaleResist.Cli.Commands;
using ScaleResist.Cli.Lake;
using ScaleResist.Runs;
using ScaleResist.Tests.Cli;

namespace ScaleResist.Tests.Lake;

public sealed class Lake_tables_in_DuckDB
{
    private static readonly Dictionary<ColumnKind, string> Types = new()
    {
        [ColumnKind.Int64] = "BIGINT",
        [ColumnKind.Double] = "DOUBLE",
        [ColumnKind.Boolean] = "BOOLEAN",
        [ColumnKind.Text] = "VARCHAR",
        [ColumnKind.FloatList] = "FLOAT[]",
    };

    public static TheoryData<bool> Labels => [false, true];

    private static TableDefinition[] All(ColumnKind label) =>
        [Tables.Index, Tables.Components(label), Tables.Nodes(label), Tables.Links(label), Tables.Pairs(label),
            Tables.Coordinates(label), Tables.Audit(label)];

    [Theory]
    [MemberData(nameof(Labels))]
    public void Every_table_of_two_runs_has_the_contracts_names_and_types(bool texts)
    {
        using Place place = new();
        string pairs = Path.Combine(place.Folder, "pairs.csv");
        File.WriteAllText(pairs, "1,2\n");
        FakeEngine engine = new() { TextLabels = texts, Audit = FakeEngine.AuditOf(16, null) };
        foreach (string run in (string[])["a", "b-2"])
        {
            CliResult result = CliRun.InProcess(engine,
                place.Estimate(run, "--want", "index,components,nodes,links,coordinates", "--pairs", pairs));
            Assert.True(result.Exit == 0, result.Error);
        }
        foreach (TableDefinition table in All(texts ? ColumnKind.Text : ColumnKind.Int64))
        {
            string source = DuckLake.Table(place.Lake, table.Name);
            List<object?[]> described = DuckLake.Query($"DESCRIBE SELECT * FROM {source}");
            Assert.Equal([.. table.Columns.Select(c => (c.Name, Types[c.Kind])), ("run", "VARCHAR")],
                described.Select(d => ((string)d[0]!, (string)d[1]!)));
            List<object?[]> runs = DuckLake.Query($"SELECT run, count(*) FROM {source} GROUP BY run ORDER BY run");
            long rows = table.Name switch { "index" => 2, "pairs" => 3, "audit" => 16, "links" => engine.Links, _ => engine.Nodes };
            Assert.Equal([("a", rows), ("b-2", rows)], runs.Select(r => ((string)r[0]!, (long)r[1]!)));
        }
    }

    [Theory]
    [MemberData(nameof(Labels))]
    public void Values_come_back_row_by_row_over_several_parts(bool texts)
    {
        using Place place = new();
        FakeEngine engine = new() { TextLabels = texts };
        ColumnKind label = texts ? ColumnKind.Text : ColumnKind.Int64;
        foreach (TableDefinition table in All(label))
        {
            string folder = Path.Combine(place.Folder, "staging");
            // Parts of 64 rows from batches of 100 and 150: parts span batches, and batches span parts.
            ParquetTableSink sink = new(folder, new Dictionary<string, string>(), encoders: 2, rowsPerPart: 64);
            ITableWriter writer = sink.Open(table);
            writer.Write(engine.Batch(table, 0, 100));
            writer.Write(engine.Batch(table, 100, 150));
            Assert.Equal(250, writer.Complete());
            Assert.Equal(["part-00000.parquet", "part-00001.parquet", "part-00002.parquet", "part-00003.parquet"],
                Directory.GetFiles(Path.Combine(folder, table.Name)).Select(Path.GetFileName).Order());

            List<object?[]> rows = DuckLake.Query($"SELECT * FROM read_parquet('{folder}/{table.Name}/*.parquet')");
            RowBatch wanted = engine.Batch(table, 0, 250);
            Assert.Equal(250, rows.Count);
            for (int i = 0; i < rows.Count; i++)
            {
                for (int c = 0; c < table.Columns.Count; c++)
                {
                    object? value = table.Columns[c].Kind == ColumnKind.FloatList
                        ? ((float[])wanted.Columns[c])[(i * engine.Coordinates)..((i + 1) * engine.Coordinates)]
                        : wanted.Columns[c].GetValue(i);
                    Assert.Equal(value, rows[i][c]);
                }
            }
        }
    }

    [Fact]
    public void Extreme_numbers_and_texts_survive()
    {
        using Place place = new();
        Random random = new(5);
        long[] whole = [long.MinValue, long.MaxValue, 0, -1, 1,
            .. Enumerable.Range(0, 2000).Select(_ => random.NextInt64(long.MinValue, long.MaxValue))];
        int n = whole.Length;
        double[] real = new double[n];
        for (int i = 0; i < n; i++)
            real[i] = BitConverter.Int64BitsToDouble(whole[n - 1 - i]);
        (real[0], real[1], real[2], real[3], real[4]) =
            (double.PositiveInfinity, double.NegativeInfinity, -0.0, double.Epsilon, double.MaxValue);
        real = [.. real.Select(r => double.IsNaN(r) ? 1 : r)];
        real[5] = double.NaN;
        string[] text = [.. whole.Select(
            (w, i) => i switch { 0 => "", 1 => "a\nb", 2 => "\u0000", 3 => "😀,\"'", _ => w.ToString() })];
        TableDefinition table = new("t", [new("id", ColumnKind.Int64), new("x", ColumnKind.Double), new("s", ColumnKind.Text),
            new("nid", ColumnKind.Int64, Nullable: true), new("nx", ColumnKind.Double, Nullable: true)]);
        ParquetTableSink sink = new(place.Lake, new Dictionary<string, string>(), 1);
        ITableWriter writer = sink.Open(table);
        long?[] someWhole = [.. whole.Select((w, i) => i % 7 == 0 ? w : (long?)null)];
        double?[] none = new double?[n];
        writer.Write(new RowBatch(n, [whole, real, text, someWhole, none]));
        writer.Complete();
        List<object?[]> rows = DuckLake.Query($"SELECT * FROM '{place.Lake}/t/*.parquet'");
        Assert.Equal(whole, rows.Select(r => (long)r[0]!));
        Assert.Equal(real.Select(BitConverter.DoubleToInt64Bits),
            rows.Select(r => BitConverter.DoubleToInt64Bits((double)r[1]!)));
        Assert.Equal(text, rows.Select(r => (string)r[2]!));
        Assert.Equal(someWhole, rows.Select(r => (long?)r[3]));
        Assert.All(rows, r => Assert.Null(r[4]));
    }

    [Fact]
    public void A_table_without_rows_still_has_its_columns()
    {
        using Place place = new();
        ParquetTableSink sink = new(place.Lake, new Dictionary<string, string>(), 1);
        foreach (TableDefinition table in All(ColumnKind.Text))
        {
            Assert.Equal(0, sink.Open(table).Complete());
            Assert.Equal(table.Columns.Select(c => c.Name),
                DuckLake.Query($"DESCRIBE SELECT * FROM '{place.Lake}/{table.Name}/*.parquet'").Select(d => (string)d[0]!));
            Assert.Empty(DuckLake.Query($"SELECT * FROM '{place.Lake}/{table.Name}/*.parquet'"));
        }
    }

    [Theory]
    [MemberData(nameof(Labels))]
    public void Columns_that_people_filter_on_keep_their_minimum_and_maximum(bool texts)
    {
        using Place place = new();
        Assert.Equal(0, CliRun.InProcess(new FakeEngine { TextLabels = texts }, place.Estimate()).Exit);
        List<object?[]> statistics = DuckLake.Query(
            $"SELECT path_in_schema, stats_min_value, stats_max_value FROM parquet_metadata('{place.Run("a")}/links/*.parquet')");
        foreach (string column in (string[])["source", "target", "component_id", "nodes_cut_off"])
            Assert.Contains(statistics, s => (string)s[0]! == column && s[1] is not null && s[2] is not null);
    }

    [Fact]
    public void Every_part_says_where_its_rows_come_from()
    {
        using Place place = new();
        Assert.Equal(0, CliRun.InProcess(new FakeEngine(), place.Estimate("a", "--seed", "77")).Exit);
        Dictionary<string, string> metadata = DuckLake.Query(
            $"SELECT decode(key), decode(value) FROM parquet_kv_metadata('{place.Run("a")}/nodes/*.parquet')")
            .ToDictionary(r => (string)r[0]!, r => (string)r[1]!);
        Assert.Equal("nodes", metadata["scaleresist.table"]);
        Assert.Equal("1", metadata["scaleresist.schema_version"]);
        Assert.Equal("a", metadata["scaleresist.run_id"]);
        Assert.Equal("77", metadata["scaleresist.seed"]);
        Assert.Equal(InputDigest.Sha256(place.Network, default), metadata["scaleresist.input_sha256"]);
        Assert.NotEmpty(metadata["scaleresist.program_version"]);
    }

    [Fact]
    public void Bytes_depend_neither_on_encoders_nor_on_batch_sizes()
    {
        using Place place = new();
        FakeEngine engine = new() { TextLabels = true };
        string[] folders = [.. new[] { (1, 1000), (2, 1000), (8, 37), (3, 250) }.Select(how =>
        {
            (int encoders, int batch) = how;
            string folder = Path.Combine(place.Folder, $"{encoders}-{batch}");
            ParquetTableSink sink = new(folder, new Dictionary<string, string> { ["k"] = "v" }, encoders, rowsPerPart: 100);
            foreach (TableDefinition table in All(ColumnKind.Text))
            {
                ITableWriter writer = sink.Open(table);
                for (int from = 0; from < 1000; from += batch)
                    writer.Write(engine.Batch(table, from, Math.Min(batch, 1000 - from)));
                writer.Complete();
            }
            return folder;
        })];
        string[] files = [.. Directory.GetFiles(folders[0], "*", SearchOption.AllDirectories)
            .Select(f => Path.GetRelativePath(folders[0], f))];
        Assert.Equal(70, files.Length);
        foreach (string file in files)
        {
            byte[] wanted = File.ReadAllBytes(Path.Combine(folders[0], file));
            Assert.All(folders[1..], folder => Assert.Equal(wanted, File.ReadAllBytes(Path.Combine(folder, file))));
        }
    }

    [Theory]
    [InlineData(4, 1 << 20)]
    [InlineData(16, 1 << 19)]
    [InlineData(64, 1 << 17)]
    [InlineData(100, 1 << 16)]
    [InlineData(4096, 1 << 11)]
    public void Wide_lists_make_short_parts(int width, int rows) => Assert.Equal(rows, PartEncoder.RowsPerPart(width));

    [Fact]
    public void A_batch_that_does_not_fit_its_table_is_refused()
    {
        using Place place = new();
        ParquetTableSink sink = new(place.Lake, new Dictionary<string, string>(), 1);
        ITableWriter writer = sink.Open(new TableDefinition("t", [new("a", ColumnKind.Int64), new("r", ColumnKind.FloatList)]));
        Assert.Throws<ArgumentException>(() => writer.Write(new RowBatch(1, [new long[1]])));
        Assert.Throws<ArgumentException>(() => writer.Write(new RowBatch(1, [new long?[1], new float[2]])));
        Assert.Throws<ArgumentException>(() => writer.Write(new RowBatch(2, [new long[1], new float[2]])));
        Assert.Throws<ArgumentException>(() => writer.Write(new RowBatch(2, [new long[2], new float[3]])));
        writer.Write(new RowBatch(2, [new long[2], new float[4]]));
        Assert.Throws<ArgumentException>(() => writer.Write(new RowBatch(2, [new long[2], new float[6]])));
    }
}
