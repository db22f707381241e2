using System.Security.Cryptography;
using System.Text;
using ScaleResist.Graphs;

namespace ScaleResist.Tests.Graphs;

public sealed class EdgeListReaderTests : IDisposable
{
    private static readonly ReadOptions Plain = new();
    private static readonly ReadOptions Conductance = new() { Weights = WeightMeaning.Conductance };
    private readonly ScratchFolder folder = new();

    public void Dispose() => folder.Dispose();

    public static TheoryData<string, string> FormsAndPacking()
    {
        TheoryData<string, string> data = [];
        foreach (string form in (string[])["csv", "tsv", "txt", "edges", "mtx"])
        {
            foreach (string packing in (string[])["", ".gz", ".zst"])
                data.Add(form, packing);
        }
        return data;
    }

    private static string Text(string form, IEnumerable<(int, int, double)> links)
    {
        StringBuilder text = new(form == "mtx"
            ? "%%MatrixMarket matrix coordinate real general\n% made\n3000 3000 3000\n" : "# made\n");
        string separator = form switch { "csv" => ",", "tsv" => "\t", _ => "  " };
        foreach ((int u, int v, double c) in links)
            text.Append(u).Append(separator).Append(v).Append(separator).Append(FormattableString.Invariant($"{c}\n"));
        return text.ToString();
    }

    [Theory]
    [MemberData(nameof(FormsAndPacking))]
    public void Every_form_and_packing_gives_the_same_links(string form, string packing)
    {
        Random random = new(5);
        (int, int, double)[] links =
            [.. Enumerable.Range(0, 3000).Select(_ => (random.Next(1, 3000), random.Next(1, 3000), random.NextDouble() + 0.1))];
        string path = folder.Write($"net.{form}{packing}", Text(form, links));
        List<long> progress = [];

        EdgeList read = EdgeListReader.Read(path, Conductance, progress.Add);

        Assert.Equal(links.Select(l => FormattableString.Invariant($"{l.Item1}-{l.Item2}:{l.Item3}")), Links.Of(read));
        Assert.True(read.Labels.AreIntegers);
        Assert.Equal(3000, read.Facts.Rows);
        Assert.Equal(form == "mtx" ? 2 : 1, read.Facts.CommentLines);
        Assert.Equal((form is "txt" or "edges" ? "text" : form) + packing.Replace('.', '+'), read.Facts.Form);
        byte[] onDisk = File.ReadAllBytes(path);
        Assert.Equal(onDisk.Length, read.Facts.Bytes);
        Assert.Equal(onDisk.Length, progress[^1]);
        Assert.Equal(Convert.ToHexStringLower(SHA256.HashData(onDisk)), read.Facts.Sha256);
        Assert.Null(read.Facts.Header);
        Assert.Equal(["1", "2", "3"], read.Facts.Columns);
    }

    [Theory]
    [InlineData(".gz")]
    [InlineData(".zst")]
    public void Concatenated_archive_members_read_as_one_file(string packing)
    {
        byte[] one = ScratchFolder.Pack(packing, "1\t2\n2"u8.ToArray());
        byte[] two = ScratchFolder.Pack(packing, "\t3\n"u8.ToArray());
        string path = folder.WriteRaw("net.tsv" + packing, [.. one, .. two]);
        Assert.Equal(["1-2", "2-3"], Links.Of(EdgeListReader.Read(path, Plain)));
    }

    [Theory]
    [InlineData("csv", "1,2\n2,3\n")]
    [InlineData("csv", "\ufeff1,2\r\n\r\n# note\r\n2 , 3")]
    [InlineData("csv", "% note\n1,2\n\n   \n# another, note with \" and more\n2,3\n")]
    [InlineData("tsv", "1\t2\n2\t3")]
    [InlineData("tsv", "1\t2\r\n #indented\r\n2\t3\r\n")]
    [InlineData("txt", "  1 2 \n2\t \t3\n\t\n")]
    [InlineData("txt", "1, 2\n2, 3\n")]
    [InlineData("txt", "1;2\n2;3\n")]
    [InlineData("edges", "# a\n# b\n1\t2\n%c\n2 3\n")]
    public void Comments_blank_lines_marks_and_line_ends_do_not_matter(string form, string text)
    {
        Assert.Equal(["1-2", "2-3"], Links.Of(EdgeListReader.Read(folder.Write("net." + form, text), Plain)));
    }

    [Theory]
    [InlineData("csv", "\"a, b\",\"say \"\"x\"\"\"\n c d , \" e \"\n")]
    [InlineData("tsv", "\"a, b\"\t\"say \"\"x\"\"\"\nc d\t\" e \"\n")]
    [InlineData("txt", "\"a, b\"   \"say \"\"x\"\"\"\n\"c d\" \" e \"\n")]
    public void Quoted_labels_keep_separators_quotes_and_blanks(string form, string text)
    {
        EdgeList read = EdgeListReader.Read(folder.Write("net." + form, text), Plain);
        Assert.Equal(["a, b", "say \"x\"", "c d", " e "], read.Labels.Texts.ToArray());
    }

    [Fact]
    public void A_label_that_is_no_canonical_integer_makes_all_labels_strings_as_they_stood()
    {
        EdgeList read = EdgeListReader.Read(folder.Write("net.csv", "7,8\n007,9\n+1,-1\nÅ,日本\n"), Plain);
        Assert.Equal(["7", "8", "007", "9", "+1", "-1", "Å", "日本"], read.Labels.Texts.ToArray());
    }

    [Fact]
    public void Integers_over_the_whole_int64_range_stay_integers()
    {
        EdgeList read = EdgeListReader.Read(folder.Write("net.txt", $"{long.MinValue} {long.MaxValue}\n0 -5\n"), Plain);
        Assert.Equal([long.MinValue, long.MaxValue, 0, -5], read.Labels.Integers.ToArray());
    }

    [Theory]
    [InlineData("source,target\nx,y\n", "x-y", true)]
    [InlineData("From,TO\n1,2\n", "1-2", true)]
    [InlineData("station,next\n1,2\n", "1-2", true)]
    [InlineData("station,next\nx,y\n", "station-next x-y", false)]
    [InlineData("1,2\n3,4\n", "1-2 3-4", false)]
    public void A_header_is_told_by_well_known_names_or_by_integers_below(string text, string links, bool header)
    {
        EdgeList read = EdgeListReader.Read(folder.Write("net.csv", text), Plain);
        Assert.Equal(links.Split(' '), Links.Of(read));
        Assert.Equal(header ? text[..text.IndexOf('\n')].Split(',') : null, read.Facts.Header);
    }

    [Theory]
    [InlineData("here,there,km\nx,y,2\n", true)]
    [InlineData("x,y,2\ny,z,4\n", false)]
    public void A_weighted_file_has_a_header_where_a_name_stands_above_a_number(string text, bool header)
    {
        EdgeList read = EdgeListReader.Read(folder.Write("net.csv", text), Conductance);
        Assert.Equal(header, read.Facts.Header is not null);
        Assert.Equal(header ? 1 : 2, read.Links.Count);
    }

    [Fact]
    public void A_first_link_that_looks_like_a_header_and_names_a_node_below_is_refused()
    {
        InputException e = Assert.Throws<InputException>(() =>
            EdgeListReader.Read(folder.Write("net.csv", "a,b\nb,c\nc,a\n"), Plain));
        Assert.Equal(1, e.Line);
        Assert.Contains("source,target", e.Mend, StringComparison.Ordinal);
        Assert.Equal(["a-b", "b-c"], Links.Of(EdgeListReader.Read(folder.Write("net2.csv", "source,target\na,b\nb,c\n"), Plain)));
    }

    [Fact]
    public void Columns_are_chosen_by_name_or_position()
    {
        string path = folder.Write("net.csv", "km,to,from,ohm\n9,2,1,0.5\n9,3,2,0.25\n");
        ReadOptions byName = new() { Weights = WeightMeaning.Resistance, Columns = ["from", "TO", "ohm"] };
        ReadOptions byPosition = new() { Weights = WeightMeaning.Resistance, Columns = ["3", "2", "4"] };
        EdgeList named = EdgeListReader.Read(path, byName);
        Assert.Equal(["1-2:2", "2-3:4"], Links.Of(named));
        Assert.Equal(["from", "to", "ohm"], named.Facts.Columns);
        Assert.Equal(["1-2:2", "2-3:4"], Links.Of(EdgeListReader.Read(path, byPosition)));
        Assert.Equal(["1-2", "2-3"], Links.Of(EdgeListReader.Read(path, new ReadOptions { Columns = ["from", "to"] })));
        ReadOptions ignored = new() { Weights = WeightMeaning.None, Columns = ["from", "to", "km"] };
        Assert.Equal(["1-2", "2-3"], Links.Of(EdgeListReader.Read(path, ignored)));
    }

    [Fact]
    public void The_third_column_means_what_the_options_say()
    {
        string path = folder.Write("net.tsv", "1\t2\t4\tx\n2\t3\t0.5\ty\n");
        Assert.Equal(["1-2:4", "2-3:0.5"], Links.Of(EdgeListReader.Read(path, Conductance)));
        Assert.Equal(["1-2:0.25", "2-3:2"],
            Links.Of(EdgeListReader.Read(path, new ReadOptions { Weights = WeightMeaning.Resistance })));
        Assert.Equal(["1-2", "2-3"], Links.Of(EdgeListReader.Read(path, new ReadOptions { Weights = WeightMeaning.None })));
    }

    [Theory]
    [InlineData(WeightMeaning.Conductance)]
    [InlineData(WeightMeaning.Resistance)]
    public void Weights_at_both_ends_of_the_range_are_read(WeightMeaning weights)
    {
        string path = folder.Write("net.csv", "1,2,1e-18\n2,3,1e18\n");
        EdgeList read = EdgeListReader.Read(path, new ReadOptions { Weights = weights });
        double[] expected = weights == WeightMeaning.Conductance ? [1e-18, 1e18] : [1e18, 1e-18];
        Assert.All(expected, (c, i) => Assert.Equal(1, read.Weights![i] / c, 1e-15));
    }

    [Fact]
    public void Line_numbers_stay_true_over_many_blocks_and_kinds_of_lines()
    {
        StringBuilder text = new();
        for (int line = 1; line < 100_000; line++)
            text.Append((line % 7) switch { 0 => "# comment\r\n", 1 => "\n", _ => $"{line}\t{line + 1}\r\n" });
        text.Append("1\n2\t3\n");
        foreach (string name in (string[])["net.tsv", "net.txt", "net.tsv.gz", "net.txt.zst"])
        {
            InputException e = Assert.Throws<InputException>(() =>
                EdgeListReader.Read(folder.Write(name, text.ToString()), Plain));
            Assert.Equal(100_000, e.Line);
        }
    }

    [Fact]
    public void Reading_stops_when_cancelled()
    {
        string path = folder.Write("net.tsv", string.Concat(Enumerable.Range(0, 50_000).Select(i => $"{i}\t{i + 1}\n")));
        using CancellationTokenSource source = new();
        Assert.Throws<OperationCanceledException>(() => EdgeListReader.Read(path, Plain, _ => source.Cancel(), source.Token));
    }
}
