using System.Security.Cryptography;
using CsCheck;
using DuckDB.NET.Data;
using ScaleResist.Cli.Lake;
using ScaleResist.Graphs;
using ScaleResist.Tests.Graphs;

namespace ScaleResist.Tests.Lake;

public sealed class ParquetInputTests : IDisposable
{
    private static readonly ReadOptions Plain = new();
    private static readonly ReadOptions Conductance = new() { Weights = WeightMeaning.Conductance };
    private readonly ScratchFolder folder = new();

    public void Dispose() => folder.Dispose();

    private string Write(string name, params (string, Array)[] columns) => ParquetFiles.Write(folder.Path(name), 3, columns);

    private static void Refused(string path, ReadOptions options, string file, long? line, string problem, string mend)
    {
        InputException e = Assert.Throws<InputException>(() => NetworkInput.Read(path, options));
        Assert.Equal((file, line), (e.File, e.Line));
        Assert.Contains(problem, e.Problem, StringComparison.Ordinal);
        Assert.Contains(mend, e.Mend, StringComparison.Ordinal);
        Assert.DoesNotContain('\n', e.Message);
    }

    public static TheoryData<Array, Array> IntegerColumns() => new()
    {
        { new long[] { 1, 2, 3, 4 }, new long[] { 2, 3, 4, 1 } },
        { new long?[] { 1, 2, 3, 4 }, new int?[] { 2, 3, 4, 1 } },
        { new int[] { 1, 2, 3, 4 }, new uint[] { 2, 3, 4, 1 } },
        { new short[] { 1, 2, 3, 4 }, new ushort[] { 2, 3, 4, 1 } },
        { new sbyte[] { 1, 2, 3, 4 }, new byte[] { 2, 3, 4, 1 } },
        { new ulong[] { 1, 2, 3, 4 }, new long[] { 2, 3, 4, 1 } },
    };

    [Theory]
    [MemberData(nameof(IntegerColumns))]
    public void Integer_columns_of_every_width_give_integer_labels(Array source, Array target)
    {
        EdgeList read = NetworkInput.Read(Write("net.parquet", ("a", source), ("b", target)), Plain);
        Assert.True(read.Labels.AreIntegers);
        Assert.Equal(["1-2", "2-3", "3-4", "4-1"], Links.Of(read));
    }

    [Fact]
    public void Unsigned_and_signed_extremes_fit_or_are_refused_with_their_row()
    {
        string path = Write("a.parquet", ("a", new ulong[] { 1, 1, 1, long.MaxValue }),
            ("b", new long[] { 2, 2, 2, long.MinValue }));
        Assert.Equal([1, 2, long.MaxValue, long.MinValue], NetworkInput.Read(path, Plain).Labels.Integers.ToArray());
        path = Write("b.parquet", ("a", new ulong[] { 1, 1, 1, 1UL + long.MaxValue }), ("b", new long[] { 2, 2, 2, 2 }));
        Refused(path, Plain, path, 4, "does not fit into int64", "VARCHAR");
    }

    [Fact]
    public void String_and_mixed_columns_give_string_labels()
    {
        EdgeList read = NetworkInput.Read(Write("a.parquet", ("s", new[] { "x", "y", "x", "Ω" }),
            ("t", new[] { "y", "z", "z", "x" })), Plain);
        Assert.Equal(["x", "y", "z", "Ω"], read.Labels.Texts.ToArray());
        read = NetworkInput.Read(Write("b.parquet", ("s", new[] { 1L, 2L }), ("t", new[] { "y", "1" })), Plain);
        Assert.Equal(["1-y", "2-1"], Links.Of(read));
    }

    public static TheoryData<Array> NumberColumns() => new()
    {
        new double[] { 1, 2, 4, 8 }, new float[] { 1, 2, 4, 8 }, new int[] { 1, 2, 4, 8 }, new double?[] { 1, 2, 4, 8 },
        new ulong[] { 1, 2, 4, 8 }, new decimal[] { 1, 2, 4, 8 },
    };

    [Theory]
    [MemberData(nameof(NumberColumns))]
    public void Weights_may_be_floating_or_whole_and_mean_what_the_options_say(Array weights)
    {
        string path = Write("net.parquet", ("a", new[] { 1, 2, 3, 4 }), ("b", new[] { 2, 3, 4, 1 }), ("w", weights));
        Assert.Equal(["1-2:1", "2-3:2", "3-4:4", "4-1:8"], Links.Of(NetworkInput.Read(path, Conductance)));
        Assert.Equal(["1-2:1", "2-3:0.5", "3-4:0.25", "4-1:0.125"],
            Links.Of(NetworkInput.Read(path, new ReadOptions { Weights = WeightMeaning.Resistance })));
        Assert.Equal(["1-2", "2-3", "3-4", "4-1"],
            Links.Of(NetworkInput.Read(path, new ReadOptions { Weights = WeightMeaning.None })));
        Refused(path, Plain, path, null, "a third column", "--weights conductance");
    }

    [Fact]
    public void Columns_are_chosen_by_name()
    {
        string path = Write("net.parquet", ("km", new[] { 5.5 }), ("To", new[] { 2 }), ("from", new[] { 1 }));
        EdgeList read = NetworkInput.Read(path,
            new ReadOptions { Weights = WeightMeaning.Conductance, Columns = ["from", "to", "km"] });
        Assert.Equal(["1-2:5.5"], Links.Of(read));
        Assert.Equal(["from", "To", "km"], read.Facts.Columns);
        Assert.Equal(["km", "To", "from"], read.Facts.Header);
        Assert.Equal(["1-2"], Links.Of(NetworkInput.Read(path, new ReadOptions { Columns = ["from", "to"] })));
        Refused(path, new ReadOptions { Columns = ["from", "x"] }, path, null, "no column 'x'; it has km, To, from",
            "that the file has");
        Refused(path, Conductance, path, null, "'km' of type Double cannot be read as node ids", "BIGINT or VARCHAR");
    }

    [Fact]
    public void A_folder_is_read_in_the_order_of_names_and_hidden_parts_are_passed_over()
    {
        string parts = Directory.CreateDirectory(folder.Path("net")).FullName;
        foreach ((string name, int first) in ((string, int)[])[("part-2", 9), ("part-1", 1), ("part-10", 5), ("_half", 90),
            (".hidden", 91)])
        {
            int[] source = [first, first + 1, first + 2, first + 3];
            ParquetFiles.Write(Path.Combine(parts, name + ".parquet"), 3, ("a", source), ("b", source));
        }
        File.WriteAllText(Path.Combine(parts, "_SUCCESS"), "");
        List<long> progress = [];
        EdgeList read = NetworkInput.Read(parts, Plain, progress.Add);
        Assert.Equal(Enumerable.Range(1, 12).Select(i => (long)i), read.Labels.Integers.ToArray());
        byte[] all = [.. ((string[])["part-1", "part-10", "part-2"]).SelectMany(name =>
            File.ReadAllBytes(Path.Combine(parts, name + ".parquet")))];
        Assert.Equal(Convert.ToHexStringLower(SHA256.HashData(all)), read.Facts.Sha256);
        Assert.Equal((all.Length, 12, "parquet"), (read.Facts.Bytes, read.Facts.Rows, read.Facts.Form));
        Assert.Equal(all.Length, progress[^1]);

        string odd = ParquetFiles.Write(Path.Combine(parts, "part-3.parquet"), 3, ("a", new[] { 1L }), ("b", new[] { 2L }));
        Refused(parts, Plain, odd, null, "its columns differ from those of part-1.parquet", "same columns");
    }

    [Fact]
    public void Nulls_and_bad_weights_are_refused_with_part_and_row()
    {
        string path = Write("a.parquet", ("a", new long?[] { 1, 1, 1, 1, null }), ("b", new long?[] { 2, 2, 2, 2, 2 }));
        Refused(path, Plain, path, 5, "the column 'a' is null", "drop the row");
        path = Write("b.parquet", ("a", new[] { "x", "x", "x", "x" }), ("b", new string?[] { "y", "y", "y", null }));
        Refused(path, Plain, path, 4, "the column 'b' is null", "drop the row");
        path = Write("c.parquet", ("a", new[] { 1L }), ("b", new[] { 1L }), ("w", new double?[] { null }));
        Refused(path, Conductance, path, 1, "the column 'w' is null", "drop the row");
        path = Write("d.parquet", ("a", new[] { 1, 1, 1, 1 }), ("b", new[] { 2, 2, 2, 2 }), ("w", new[] { 1, 1, 1, double.NaN }));
        Refused(path, Conductance, path, 4, "NaN", "above zero");
        double[] weights = [1, 1e18, 1e-18, 2e18];
        path = Write("f.parquet", ("a", new[] { 1, 2, 3, 4 }), ("b", new[] { 2, 3, 4, 5 }), ("w", weights));
        Refused(path, Conductance, path, 4, "the conductance 2E+18 is not within 1e-18 to 1e18", "larger unit");
        path = Write("e.parquet", ("a", new[] { "x", "" }), ("b", new[] { "y", "y" }));
        Refused(path, Plain, path, 2, "has 0 characters", "1 to 1000");
    }

    [Fact]
    public void Columns_of_a_wrong_type_are_refused()
    {
        string path = Write("a.parquet", ("a", new[] { 1.0 }), ("b", new[] { 2.0 }));
        Refused(path, Plain, path, null, "the column 'a' of type Double cannot be read as node ids", "BIGINT or VARCHAR");
        path = Write("b.parquet", ("a", new[] { 1L }), ("b", new[] { true }));
        Refused(path, Plain, path, null, "the column 'b' of type Boolean", "BIGINT or VARCHAR");
        path = Write("c.parquet", ("a", new[] { 1L }), ("b", new[] { 2L }), ("w", new[] { "5" }));
        Refused(path, Conductance, path, null, "the column 'w' of type String cannot be read as a number", "DOUBLE");
        path = Write("d.parquet", ("a", new[] { 1L }));
        Refused(path, Plain, path, null, "has 1 of 2 columns", "columns needed");
        path = Write("e.parquet", ("a", new[] { 1L }), ("b", new[] { 2L }));
        Refused(path, Conductance, path, null, "no third column", "--weights none");
    }

    [Fact]
    public void Files_that_are_no_whole_Parquet_are_refused()
    {
        byte[] bytes = ParquetFiles.Bytes(3, ("a", new[] { 1L, 2L }), ("b", new[] { 2L, 3L }));
        string path = folder.WriteRaw("cut.parquet", bytes[..(bytes.Length / 2)]);
        Refused(path, Plain, path, null, "cannot be read as Parquet", "write it again");
        path = folder.Write("text.parquet", "1,2\n2,3\n3,4\n4,5\n");
        Refused(path, Plain, path, null, "cannot be read as Parquet", "another form");
        path = folder.Write("empty.parquet", "");
        Refused(path, Plain, path, null, "cannot be read as Parquet", "truncated");
        path = Write("norows.parquet", ("a", Array.Empty<long>()), ("b", Array.Empty<long>()));
        Refused(path, Plain, path, null, "no data rows", "at least one row");
        path = folder.Path("missing.parquet");
        Refused(path, Plain, path, null, "no such file", "check the path");
        path = Directory.CreateDirectory(folder.Path("bare")).FullName;
        Refused(path, Plain, path, null, "without .parquet files", "holds the parts");
    }

    [Fact]
    public void Pairs_and_node_weights_come_from_Parquet_too()
    {
        NodeLabels labels = new([10L, 20L]);
        string pairs = Write("pairs.parquet", ("u", new[] { 10, 20 }), ("v", new[] { 20, 20 }));
        Assert.Equal([(0, 1), (1, 1)], NetworkInput.ReadPairs(pairs, labels));
        string weights = Write("weights.parquet", ("node", new[] { 20, 10 }), ("w", new[] { 0.5, 3 }));
        Assert.Equal([3, 0.5], NetworkInput.ReadNodeWeights(weights, labels));
        InputException e = Assert.Throws<InputException>(() => NetworkInput.ReadPairs(pairs, new NodeLabels([10L])));
        Assert.Equal((1L, true), (e.Line, e.Problem.Contains("'20'", StringComparison.Ordinal)));
        e = Assert.Throws<InputException>(() => NetworkInput.ReadNodeWeights(weights, new NodeLabels([10L, 20L, 30L])));
        Assert.Contains("'30'", e.Problem, StringComparison.Ordinal);
    }

    // Written by another program: nullable columns, dictionaries, Snappy and zstd, several row groups.
    [Theory]
    [InlineData("snappy", "i", "j")]
    [InlineData("zstd", "printf('site %d', i)", "printf('Ω%d', j)")]
    [InlineData("zstd", "i::UTINYINT", "printf('Ω%d', j)")]
    [InlineData("gzip", "i::SMALLINT", "j::UBIGINT")]
    public void Files_of_DuckDB_read_row_by_row_as_DuckDB_reads_them(string codec, string source, string target)
    {
        string path = folder.Path("duck.parquet");
        using DuckDBConnection connection = new("Data Source=:memory:");
        connection.Open();
        using DuckDBCommand command = connection.CreateCommand();
        command.CommandText = "CREATE TABLE t AS SELECT " + source + " AS u, " + target + " AS v, (i + 1) / 8.0 AS w FROM "
            + "(SELECT k * 7919 % 250 AS i, k * k % 9973 AS j FROM range(12000) r(k)); COPY t TO '" + path
            + $"' (FORMAT parquet, CODEC '{codec}', ROW_GROUP_SIZE 2048)";
        command.ExecuteNonQuery();
        command.CommandText = $"SELECT u::VARCHAR || '-' || v::VARCHAR || ':' || w::VARCHAR FROM '{path}'";
        List<string> expected = [];
        using (DuckDBDataReader reader = command.ExecuteReader())
        {
            while (reader.Read())
                expected.Add(reader.GetString(0));
        }
        string[] read = Links.Of(NetworkInput.Read(path, Conductance));
        Assert.Equal(12000, expected.Count);
        Assert.Equal(expected.Select(row => row.EndsWith(".0", StringComparison.Ordinal) ? row[..^2] : row), read);
    }

    [Fact]
    public void Text_goes_through_the_same_door()
    {
        Assert.Equal(["1-2"], Links.Of(NetworkInput.Read(folder.Write("net.csv.gz", "1,2\n"), Plain)));
    }

    [Fact]
    public void Mutated_Parquet_gives_an_edge_list_or_an_input_error()
    {
        byte[][] valid =
        [
            ParquetFiles.Bytes(20, ("a", Enumerable.Range(0, 50).ToArray()), ("b", Enumerable.Range(1, 50).ToArray()),
                ("w", new double[50])),
            ParquetFiles.Bytes(20, ("a", Enumerable.Range(0, 50).Select(i => $"n{i}").ToArray()),
                ("b", new string[50].Select(_ => "x").ToArray())),
            ParquetFiles.Bytes(20, ("a", new long?[50].Select((_, i) => (long?)i).ToArray()),
                ("b", new long?[50].Select((_, i) => (long?)(i * i)).ToArray())),
        ];
        int files = 0;
        Gen.Select(Gen.Int[0, 2], ReaderFuzzTests.Mutation.Array[1, 3], Gen.Int[0, 2]).Sample(
            (which, mutations, weights) =>
            {
                byte[] bytes = mutations.Aggregate(valid[which], (b, mutate) => mutate(b));
                string path = folder.WriteRaw($"{Interlocked.Increment(ref files)}.parquet", bytes);
                try
                {
                    EdgeList list = NetworkInput.Read(path, new ReadOptions { Weights = (WeightMeaning)weights });
                    Assert.Equal(list.Facts.Rows, list.Links.Count);
                }
                catch (InputException e)
                {
                    Assert.DoesNotContain('\n', e.Message);
                }
                finally
                {
                    File.Delete(path);
                }
            },
            seed: "0000KDr5Vc5n", iter: 500);
    }
}
