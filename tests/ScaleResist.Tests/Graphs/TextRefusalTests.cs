using System.Text;
using ScaleResist.Graphs;

namespace ScaleResist.Tests.Graphs;

public sealed class TextRefusalTests : IDisposable
{
    private readonly ScratchFolder folder = new();

    public void Dispose() => folder.Dispose();

    private static InputException Refusal(string path, WeightMeaning weights = WeightMeaning.Unsaid, params string[] columns)
    {
        ReadOptions options = new() { Weights = weights, Columns = columns.Length == 0 ? null : columns };
        InputException e = Assert.Throws<InputException>(() => EdgeListReader.Read(path, options));
        Assert.StartsWith(e.Line is null ? $"{path}: " : $"{path}:{e.Line}: ", e.Message, StringComparison.Ordinal);
        Assert.DoesNotContain('\n', e.Message);
        return e;
    }

    private static void Check(InputException e, long? line, string problem, string mend)
    {
        Assert.Equal(line, e.Line);
        Assert.Contains(problem, e.Problem, StringComparison.Ordinal);
        Assert.Contains(mend, e.Mend, StringComparison.Ordinal);
    }

    [Theory]
    [InlineData("net.csv", "1,2\n\n# x\n3\n", 4, "the row is short: it has 1 of 2", "separated by commas")]
    [InlineData("net.tsv", "1\t2\n3,4\n", 2, "the row is short", "separated by tabs")]
    [InlineData("net.txt", "1 2\n3 4\n5\n", 3, "the row is short", "separated by blanks")]
    [InlineData("net.csv", "1,2\n3,\n", 2, "a node id is empty", "source and target")]
    [InlineData("net.csv", "1,2\n\"\",5\n", 2, "a node id is empty", "source and target")]
    [InlineData("net.tsv", "1\t2\n\t4\n", 2, "a node id is empty", "source and target")]
    [InlineData("net.csv", "1,2\n3,\"x\n4,5\n", 2, "a quote is opened and not closed", "close the quote")]
    [InlineData("net.txt", "1 2\n\"x 5\n", 2, "a quote is opened and not closed", "close the quote")]
    [InlineData("net.csv", "1,2\n3,4\0\n", 2, "control character 0x00", "text file")]
    [InlineData("net.csv", "1,2\r3,4\r", 1, "a carriage return inside the line", "LF or CRLF")]
    [InlineData("net.csv", "1,2\n3,4,5\n", 2, "a third column", "--weights conductance")]
    [InlineData("net.csv", "1,2,5\n", 1, "a third column", "--weights resistance")]
    [InlineData("net.txt", "1 2 5\n", 1, "a third column", "--weights none")]
    [InlineData("net.csv", "source,target,km\n1,2,5\n", 1, "a third column", "larger number is a weaker link")]
    [InlineData("net.csv", "", null, "is empty", "at least one row")]
    [InlineData("net.tsv", "# only\n\n% comments\n", null, "has no data rows", "at least one row")]
    [InlineData("net.csv", "source,target\n", null, "has no data rows", "at least one row")]
    [InlineData("net.csv.gz", "", null, "is empty", "at least one row")]
    [InlineData("net.csv.zst", "", null, "is empty", "at least one row")]
    public void A_bad_row_is_refused_with_its_line(string name, string text, int? line, string problem, string mend)
    {
        Check(Refusal(folder.Write(name, text)), line, problem, mend);
    }

    [Theory]
    [InlineData("nan", "NaN")]
    [InlineData("Infinity", "Infinity")]
    [InlineData("0", "0")]
    [InlineData("-0.0", "-0")]
    [InlineData("-3", "-3")]
    [InlineData("1e999", "Infinity")]
    [InlineData("heavy", "'heavy' is not a number")]
    [InlineData("\"1,5\"", "'1,5' is not a number")]
    [InlineData("1 2", "'1 2' is not a number")]
    [InlineData("0x10", "'0x10' is not a number")]
    [InlineData("", "the number is empty")]
    public void A_weight_that_is_no_finite_positive_number_is_refused(string value, string shown)
    {
        string path = folder.Write("net.csv", $"1,2,1\n2,3,1\n# comment\n3,4,{value}\n");
        InputException asConductance = Refusal(path, WeightMeaning.Conductance);
        Check(asConductance, 4, shown, "give a");
        Check(Refusal(path, WeightMeaning.Resistance), 4, shown, "give a");
    }

    [Theory]
    [InlineData("1e-320", "1E-320", "smaller unit")]
    [InlineData("9.99e-19", "9.99E-19", "smaller unit")]
    [InlineData("1.01e18", "1.01E+18", "larger unit")]
    [InlineData("1e308", "1E+308", "larger unit")]
    public void A_weight_beyond_1e18_or_its_reciprocal_is_refused(string value, string shown, string mend)
    {
        string path = folder.Write("net.csv", $"1,2,1\n3,4,{value}\n");
        Check(Refusal(path, WeightMeaning.Conductance), 2, $"the conductance {shown} is not within 1e-18 to 1e18", mend);
        Check(Refusal(path, WeightMeaning.Resistance), 2, $"the resistance {shown} is not within 1e-18 to 1e18", mend);
        Assert.Equal(2, EdgeListReader.Read(path, new ReadOptions { Weights = WeightMeaning.None }).Links.Count);
    }

    [Theory]
    [InlineData("net.csv", "1;2;0,5\n2;3;1,5\n", WeightMeaning.Conductance)]
    [InlineData("net.txt", "1;2;0,5\n2;3;1,5\n", WeightMeaning.Unsaid)]
    [InlineData("net.txt", "# km\nNord;Süd;0,5;0,7\n", WeightMeaning.None)]
    public void Decimal_commas_between_semicolons_are_not_taken_for_separators(string name, string text, WeightMeaning weights)
    {
        int line = text.StartsWith('#') ? 2 : 1;
        Check(Refusal(folder.Write(name, text), weights), line, ";0,5", "points into numbers");
    }

    [Fact]
    public void Weights_without_a_weight_column_are_refused()
    {
        Check(Refusal(folder.Write("a.csv", "1,2\n"), WeightMeaning.Conductance), 1, "no third column", "--weights none");
        Check(Refusal(folder.Write("b.csv", "1,2,1\n2,3\n"), WeightMeaning.Conductance), 2, "the row is short",
            "source, target and weight");
        Check(Refusal(folder.Write("c.csv", "u,v,w\n1,2,3\n"), WeightMeaning.Resistance, "u", "v"), null, "no weight column",
            "--columns");
        Check(Refusal(folder.Write("d.csv", "u,v,w\n1,2,3\n"), WeightMeaning.Unsaid, "u", "v", "w"), null, "third column",
            "--weights");
    }

    [Theory]
    [InlineData("no column 'x'", "u", "x")]
    [InlineData("no column 9", "1", "9")]
    [InlineData("1 columns are named", "u")]
    [InlineData("named twice", "u", "u")]
    [InlineData("named twice", "u", "1")]
    [InlineData("stands twice", "u", "d")]
    public void Columns_that_the_file_does_not_have_are_refused(string problem, params string[] columns)
    {
        InputException e = Refusal(folder.Write("net.csv", "u,v,d,d\n1,2,3,4\n"), WeightMeaning.Unsaid, columns);
        Assert.Contains(problem, e.Problem, StringComparison.Ordinal);
        Assert.Contains("name", e.Mend, StringComparison.Ordinal);
    }

    [Theory]
    [InlineData("net.csv")]
    [InlineData("net.txt")]
    [InlineData("net.tsv.gz")]
    [InlineData("net.edges.zst")]
    public void Bytes_that_are_not_UTF_8_are_refused_with_their_line(string name)
    {
        string separator = name.Contains("csv", StringComparison.Ordinal) ? "," : "\t";
        byte[] text = Encoding.Latin1.GetBytes($"# no harm\na{separator}b\n\nb{separator}caf\u00e9\n");
        InputException e = Refusal(folder.WriteRaw(name, ScratchFolder.Pack(name, text)));
        Check(e, 4, "byte 0xe9 is not UTF-8", "UTF-8");
    }

    [Theory]
    [InlineData(1000, true)]
    [InlineData(1001, false)]
    public void A_label_may_have_1000_characters_and_no_more(int length, bool fits)
    {
        string path = folder.Write("net.csv", $"1,2\n3,{new string('é', length)}\n");
        if (fits)
            Assert.Equal(2, EdgeListReader.Read(path, new ReadOptions()).Links.Count);
        else
            Check(Refusal(path), 2, "1001 characters", "within 1000");
    }

    [Fact]
    public void A_line_without_end_is_refused_before_it_fills_the_memory()
    {
        string name = "net.csv.gz";
        Check(Refusal(folder.Write(name, "1,2\n" + new string('7', 40_000_000))), 2, "longer than 1 MiB", "one link a line");
        Check(Refusal(folder.Write("many.csv", "1,2\n" + new string(',', 1_000_000) + "\n"), WeightMeaning.None), 2, "empty",
            "source");
    }

    // Each cut, down to the last byte of the checksum, in the first member or the second.
    [Theory]
    [InlineData(".gz", "gzip")]
    [InlineData(".zst", "zstd")]
    public void An_archive_cut_anywhere_is_refused(string packing, string archive)
    {
        Random random = new(2);
        string text = string.Concat(Enumerable.Range(0, 40).Select(i => $"{i}\t{random.Next(1000)}\n"));
        byte[] whole = ScratchFolder.Pack(packing, Encoding.ASCII.GetBytes(text));
        for (int length = 1; length < whole.Length; length++)
        {
            InputException e = Refusal(folder.WriteRaw("cut.tsv" + packing, whole[..length]));
            Check(e, e.Line, $"the {archive} archive is", "again");
            Assert.InRange(e.Line!.Value, 1, 41);
            e = Refusal(folder.WriteRaw("cut.tsv" + packing, [.. whole, .. whole[..length]]));
            Check(e, e.Line, $"the {archive} archive is", "again");
        }
    }

    [Theory]
    [InlineData(".gz")]
    [InlineData(".zst")]
    public void A_truncated_archive_is_called_truncated_and_names_the_line_reached(string packing)
    {
        Random random = new(2);
        string text = string.Concat(Enumerable.Range(0, 200_000).Select(i => $"{i}\t{random.Next(1_000_000)}\n"));
        byte[] whole = ScratchFolder.Pack(packing, Encoding.ASCII.GetBytes(text));
        InputException e = Refusal(folder.WriteRaw("cut.tsv" + packing, whole[..(whole.Length / 2)]));
        Check(e, e.Line, "archive is truncated", "again");
        Assert.InRange(e.Line!.Value, 50_000, 150_000);
    }

    [Theory]
    [InlineData(".gz")]
    [InlineData(".zst")]
    public void A_damaged_archive_or_one_with_bytes_behind_it_is_refused(string packing)
    {
        byte[] whole = ScratchFolder.Pack(packing,
            Encoding.ASCII.GetBytes(string.Concat(Enumerable.Range(0, 999).Select(i => $"{i}\t{i * 7}\n"))));
        byte[] damaged = [.. whole];
        damaged[^2] ^= 0x10;
        Check(Refusal(folder.WriteRaw("a.tsv" + packing, damaged)), 1, "archive is corrupted", "again");
        InputException e = Refusal(folder.WriteRaw("b.tsv" + packing, [.. whole, .. "and something else"u8]));
        Check(e, e.Line, "archive is", "again");
    }

    [Fact]
    public void An_archive_under_a_plain_name_is_recognised()
    {
        Check(Refusal(folder.WriteRaw("net.csv", ScratchFolder.Pack(".gz", "1,2\n"u8.ToArray()))), 1, "gzip archive", ".gz");
        Check(Refusal(folder.WriteRaw("net.txt", ScratchFolder.Pack(".zst", "1,2\n"u8.ToArray()))), 1, "zstd archive", ".zst");
    }

    [Fact]
    public void A_path_that_cannot_be_read_is_refused()
    {
        Check(Refusal(folder.Path("missing.csv")), null, "no such file", "check the path");
        Check(Refusal(folder.Path("none/missing.csv")), null, "no such file", "check the path");
        Check(Refusal(folder.Write("net.json", "[]")), null, "'.json' names no form", ".csv, .tsv");
        Check(Refusal(folder.Write("net.gz", "1 2\n")), null, "'.gz' names no form", ".mtx");
        Check(Refusal(folder.Write("net", "1 2\n")), null, "names no form", ".edges");
        Directory.CreateDirectory(folder.Path("folder.csv"));
        Check(Refusal(folder.Path("folder.csv")), null, "is a folder", "name a file");
    }

    [Fact]
    public void A_file_without_read_permission_is_refused()
    {
        if (OperatingSystem.IsWindows())
            return;
        string path = folder.Write("net.csv", "1,2\n");
        if (Environment.IsPrivilegedProcess && File.Exists("/proc/sys/vm/compact_memory"))
        {
            // The superuser may read any file but the kernel's write-only ones.
            File.Delete(path);
            File.CreateSymbolicLink(path, "/proc/sys/vm/compact_memory");
        }
        else
        {
            File.SetUnixFileMode(path, UnixFileMode.UserWrite);
        }
        Check(Refusal(path), null, "no permission", "read permission");
    }
}
