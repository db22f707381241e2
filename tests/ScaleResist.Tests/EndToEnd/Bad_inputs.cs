// Everything a user can get wrong in a file or a lake: the contract's exit code, one line that says where and how to mend it,
// and nothing of the run in the lake.

using System.Text;
using ScaleResist.Tests.Cli;
using ScaleResist.Tests.Graphs;
using ScaleResist.Tests.Lake;

namespace ScaleResist.Tests.EndToEnd;

public sealed class Bad_inputs
{
    private static readonly string[] Conductance = ["--weights", "conductance"];

    // Many links, so that a cut archive loses more than its last check sum.
    private static readonly byte[] ManyLinks =
        Encoding.ASCII.GetBytes(string.Concat(Enumerable.Range(0, 20_000).Select(i => $"{i},{i * 7919L % 20_011}\n")));

    /// <summary>File name; content (null: no such file); options; what the line says where; what it says is wrong.</summary>
    public static TheoryData<string, byte[]?, string[], string, string> Networks => new()
    {
        { "none.csv", null, [], "none.csv: ", "no such file; check the path" },
        { "bad.csv", "1,2,0.5\n2,3,x7\n"u8.ToArray(), Conductance, "bad.csv:2: ", "'x7' is not a number; " },
        { "zero.csv", "1,2,0.5\n2,3,0\n"u8.ToArray(), Conductance, "zero.csv:2: ", "the conductance 0 is not" },
        { "minus.tsv", "1\t2\t-1\n"u8.ToArray(), Conductance, "minus.tsv:1: ", "-1 is not" },
        { "nan.csv", "a,b,w\n1,2,1\n2,3,NaN\n"u8.ToArray(), Conductance, "nan.csv:3: ", "NaN is not" },
        { "infinite.csv", "1,2,inf\n"u8.ToArray(), Conductance, "infinite.csv:1: ", "" },
        { "huge.csv", "1,2,1e400\n"u8.ToArray(), Conductance, "huge.csv:1: ", "" },
        { "ohm.csv", "1,2,1e-310\n"u8.ToArray(), ["--weights", "resistance"], "ohm.csv:1: ", "1E-310 is not within 1e-18 to" },
        { "comma.txt", "1;2;0.5\n2;3;0,5\n"u8.ToArray(), Conductance, "comma.txt:2: ", "'0,5' is not a number; " },
        { "short.csv", "source,target\n1,2\n# note\n3\n"u8.ToArray(), [], "short.csv:4: ", "" },
        { "short.mtx", "%%MatrixMarket matrix coordinate pattern general\n3 3 2\n1 2\n"u8.ToArray(), [], "short.mtx", "" },
        { "utf8.csv", [.. "a,b\nc,d\n"u8, 0xC3, 0x28, .. ",e\n"u8], [], "utf8.csv:3: ", "UTF-8" },
        { "utf16.csv", [0xFF, 0xFE, .. Encoding.Unicode.GetBytes("1,2\n")], [], "utf16.csv", "" },
        { "cut.csv.gz", Cut("cut.csv.gz", 2), [], "cut.csv.gz", "" },
        { "tail.csv.gz", Cut("tail.csv.gz", 1), [], "tail.csv.gz", "" },
        { "cut.csv.zst", Cut("cut.csv.zst", 2), [], "cut.csv.zst", "" },
        { "tail.csv.zst", Cut("tail.csv.zst", 1), [], "tail.csv.zst", "" },
        { "plain.csv.gz", "1,2\n"u8.ToArray(), [], "plain.csv.gz", "" },
        { "plain.csv.zst", "1,2\n"u8.ToArray(), [], "plain.csv.zst", "" },
        { "empty.csv", [], [], "empty.csv", "" },
        { "comments.csv", "# nothing\n\n% here\n"u8.ToArray(), [], "comments.csv", "" },
        { "header.csv", "source,target\n"u8.ToArray(), [], "header.csv", "" },
        { "loops.csv", "1,1\n2,2\n"u8.ToArray(), [], "loops.csv", "" },
        { "column.csv", "a,b\n1,2\n"u8.ToArray(), ["--columns", "a,c"], "column.csv:1: ", "'c'" },
        { "position.csv", "1,2\n"u8.ToArray(), ["--columns", "1,3"], "position.csv:1: ", "no column 3" },
        { "missing.csv", "1,2\n"u8.ToArray(), Conductance, "missing.csv:1: ", "" },
        { "text.parquet", "1,2\n"u8.ToArray(), [], "text.parquet", "" },
        { "type.parquet", Parquet(("a", new[] { 1.5 }), ("b", new[] { 2L })), [], "type.parquet", "'a' of type Double" },
        {
            "w.parquet", Parquet(("a", new[] { 1L }), ("b", new[] { 2L }), ("w", new[] { "x" })), Conductance,
            "w.parquet", "'w' of type String"
        },
        { "null.parquet", Parquet(("a", new long?[] { 1, null }), ("b", new long?[] { 2, 3 })), [], "null.parquet", "" },
        { "cut.parquet", Parquet(("a", new[] { 1L }), ("b", new[] { 2L }))[..^9], [], "cut.parquet", "" },
        { "network.xls", "1,2\n"u8.ToArray(), [], "network.xls", "" },
    };

    [Theory]
    [MemberData(nameof(Networks))]
    public void A_bad_network_is_exit_3_with_its_place_and_its_mend(
        string name, byte[]? content, string[] options, string where, string what)
    {
        using Place place = new();
        string network = Path.Combine(place.Folder, name);
        if (content is not null)
            File.WriteAllBytes(network, content);
        string line = Command.Refused(Command.Estimate(network, place.Lake, options), 3);
        Assert.StartsWith($"scaleresist: {Path.Combine(place.Folder, where)}", line);
        Assert.Contains(what, line);
        Assert.False(Directory.Exists(place.Lake));
    }

    [Fact]
    public void A_folder_without_parts_is_no_network()
    {
        using Place place = new();
        string folder = Directory.CreateDirectory(Path.Combine(place.Folder, "parts")).FullName;
        Assert.Contains(folder, Command.Refused(Command.Estimate(folder, place.Lake), 3));
        Assert.Empty(place.LakeContent());
    }

    public static TheoryData<string, string, string, string> Companions => new()
    {
        { "--pairs", "1,2\n2,9\n", ":2: ", "'9'" },
        { "--pairs", "1,2\nx,1\n", ":2: ", "'x'" },
        { "--pairs", "1\n", ":1: ", "" },
        { "--pairs", "", ": ", "" },
        { "--node-weights", "1,5\n2,6\n", ": ", "'3'" },
        { "--node-weights", "1,5\n2,6\n3,7\n9,1\n", ":4: ", "'9'" },
        { "--node-weights", "1,5\n2,6\n2,7\n3,1\n", ":3: ", "'2'" },
        { "--node-weights", "1,5\n2,-6\n3,1\n", ":2: ", "-6" },
        { "--node-weights", "1,5\n2,many\n3,1\n", ":2: ", "'many'" },
    };

    [Theory]
    [MemberData(nameof(Companions))]
    public void Bad_pairs_and_node_weights_are_exit_3_with_their_place(string option, string content, string where, string what)
    {
        using Place place = new();
        string file = Path.Combine(place.Folder, "companion.csv");
        File.WriteAllText(file, content);
        string line = Command.Refused(Command.Estimate(place.Network, place.Lake, option, file), 3);
        Assert.StartsWith($"scaleresist: {file}{where}", line);
        Assert.Contains(what, line);
        Assert.False(Directory.Exists(place.Lake));
    }

    [Theory]
    [InlineData("--pairs")]
    [InlineData("--node-weights")]
    public void A_companion_that_is_not_there_is_exit_3(string option)
    {
        using Place place = new();
        string file = Path.Combine(place.Folder, "none.csv");
        string line = Command.Refused(Command.Estimate(place.Network, place.Lake, option, file), 3);
        Assert.StartsWith($"scaleresist: {file}: no such file; ", line);
        Assert.False(Directory.Exists(place.Lake));
    }

    [Theory]
    [InlineData("")]
    [InlineData("lake")]
    [InlineData("deep/lake")]
    public void A_lake_that_is_a_file_or_lies_under_one_is_exit_6(string under)
    {
        using Place place = new();
        string file = Path.Combine(place.Folder, "file");
        File.WriteAllText(file, "mine");
        string lake = under == "" ? file : Path.Combine(file, under);
        Assert.StartsWith($"scaleresist: {lake}: ", Command.Refused(Command.Estimate(place.Network, lake), 6));
        Assert.Equal("mine", File.ReadAllText(file));
        Assert.Equal(["file", "grid.csv"], Directory.GetFileSystemEntries(place.Folder).Select(Path.GetFileName).Order());
    }

    [Fact]
    public void A_bad_input_leaves_a_lake_in_use_as_it_was()
    {
        using Place place = new();
        Command.Succeed(place.Network, place.Lake, "--run-id", "good");
        string[] before = place.LakeContent();
        File.AppendAllText(place.Network, "4\n");
        Command.Refused(Command.Estimate(place.Network, place.Lake, "--run-id", "bad"), 3);
        Assert.Equal(before, place.LakeContent());
    }

    private static byte[] Cut(string name, int part)
    {
        byte[] packed = ScratchFolder.Pack(name, ManyLinks);
        return part == 1 ? packed[..^3] : packed[..(packed.Length / part)];
    }

    private static byte[] Parquet(params (string, Array)[] columns) => ParquetFiles.Bytes(1000, columns);
}
