// The command from its arguments to its files and exit codes, in process.

using System.Globalization;
using System.IO.Compression;
using DuckDB.NET.Data;
using ScaleResist.DataGen;

namespace ScaleResist.Tests.DataGen;

public sealed class CommandTests : IDisposable
{
    private readonly string folder = Directory.CreateTempSubdirectory("data-gen-").FullName;

    public void Dispose() => Directory.Delete(folder, recursive: true);

    [Theory]
    [InlineData("road", "0")]
    [InlineData("preferential", "0")]
    [InlineData("powerlaw", "3")]
    [InlineData("torus", "6")]
    public async Task Every_form_holds_the_same_links(string family, string decades)
    {
        string[] forms = [".csv", ".tsv", ".csv.gz", ".tsv.zst", ".mtx", ".mtx.gz", ".parquet"];
        List<string>? first = null;
        foreach (string form in forms)
        {
            string path = Path.Combine(folder, "network" + form);
            (int code, string output, string error) = await Run(
                family, "--nodes", "2000", "--decades", decades, "--seed", "7", "--out", path);
            Assert.Equal("", error);
            Assert.Equal(0, code);
            List<string> links = form == ".parquet" ? ReadParquet(path, decades != "0") : ReadText(path);
            Assert.StartsWith($"{family}: ", output);
            Assert.Contains($" {links.Count} links; ", output);
            Assert.Contains($" {new FileInfo(path).Length} bytes in ", output);
            first ??= links;
            Assert.Equal(first, links);
        }
        Assert.Equal(forms.Length, Directory.GetFiles(folder).Length);
    }

    [Fact]
    public async Task The_seed_decides_the_bytes()
    {
        byte[] first = await Bytes("road", "5");
        Assert.Equal(first, await Bytes("road", "5"));
        Assert.NotEqual(first, await Bytes("road", "6"));

        async Task<byte[]> Bytes(string family, string seed)
        {
            string path = Path.Combine(folder, "bytes.tsv");
            Assert.Equal(0, (await Run(family, "--nodes", "1e3", "--decades", "2", "--seed", seed, "--out", path)).Code);
            return await File.ReadAllBytesAsync(path);
        }
    }

    [Fact]
    public async Task Csv_has_a_header_and_tsv_has_none()
    {
        Assert.Equal(["source,target", "0,1", "1,2"], await Lines("path", "3", ".csv", "0"));
        Assert.Equal(["0\t1", "1\t2"], await Lines("path", "3", ".tsv", "0"));
        Assert.Equal("source,target,conductance", (await Lines("path", "3", ".csv", "2"))[0]);
    }

    [Fact]
    public async Task Matrix_market_states_its_size_and_keeps_to_the_lower_triangle()
    {
        string[] lines = await Lines("cycle", "4", ".mtx", "0");
        Assert.Equal("%%MatrixMarket matrix coordinate pattern symmetric", lines[0]);
        Assert.StartsWith("% cycle network", lines[1]);
        Assert.Equal(["4 4 4", "2 1", "3 2", "4 3", "4 1"], lines[2..]);
        Assert.Equal("%%MatrixMarket matrix coordinate real symmetric", (await Lines("cycle", "4", ".mtx", "1"))[0]);
    }

    [Theory]
    [InlineData("1_000")]
    [InlineData("1e3")]
    [InlineData("1000")]
    public async Task Counts_may_be_written_in_several_ways(string nodes) =>
        Assert.Equal(999, (await Lines("star", nodes, ".tsv", "0")).Length);

    [Fact]
    public async Task A_power_law_says_how_many_nodes_have_a_link()
    {
        string path = Path.Combine(folder, "p.tsv");
        (_, string output, _) = await Run("powerlaw", "--nodes", "1024", "--links", "2000", "--out", path);
        int nodes = (await File.ReadAllLinesAsync(path)).SelectMany(line => line.Split('\t')).Distinct().Count();
        Assert.InRange(nodes, 100, 1023);
        Assert.StartsWith($"powerlaw: {nodes} nodes with a link, ids below 1024; 2000 links; ", output);
    }

    [Theory]
    [InlineData("choose one of path", "")]
    [InlineData("choose one of path", "blob --nodes 10 --out a.tsv")]
    [InlineData("--nodes 1e6", "grid --out a.tsv")]
    [InlineData("--out network.tsv", "grid --nodes 10")]
    [InlineData("write it like", "grid --nodes 1.5 --out a.tsv")]
    [InlineData("write it like", "grid --nodes -3 --out a.tsv")]
    [InlineData("write it like", "grid --nodes 1e99 --out a.tsv")]
    [InlineData(".mtx", "grid --nodes 10 --out a.txt")]
    [InlineData(".mtx", "grid --nodes 10 --out a.parquet.gz")]
    [InlineData("leave --links out", "grid --nodes 10 --links 12 --out a.tsv")]
    [InlineData("--nodes 9 or more", "torus --nodes 8 --out a.tsv")]
    [InlineData("between 0 and 12", "grid --nodes 10 --decades 40 --out a.tsv")]
    [InlineData("between 0 and 12", "grid --nodes 10 --decades NaN --out a.tsv")]
    [InlineData("ask for fewer --nodes", "complete --nodes 1e6 --out a.tsv")]
    [InlineData("at most 2147483647", "path --nodes 1e12 --out a.tsv")]
    [InlineData("--bogus", "grid --nodes 10 --bogus --out a.tsv")]
    [InlineData("--seed", "grid --nodes 10 --seed x --out a.tsv")]
    [InlineData("--out data-gen/samples", "sample")]
    public async Task A_wrong_command_line_exits_2_with_one_line_that_tells_the_mend(string mend, string line)
    {
        (int code, string output, string error) = await Run(line.Split(' ', StringSplitOptions.RemoveEmptyEntries));
        Assert.Equal(2, code);
        Assert.Equal("", output);
        Assert.Contains(mend, error);
        Assert.Equal(1, error.Count(c => c == '\n'));
    }

    [Fact]
    public async Task A_place_that_cannot_be_written_exits_6()
    {
        (int code, _, string error) = await Run("grid", "--nodes", "100", "--out", Path.Combine(folder, "missing", "a.tsv"));
        Assert.Equal(6, code);
        Assert.StartsWith("data-gen: cannot write: ", error);
        Assert.Equal(1, error.Count(c => c == '\n'));

        string taken = Directory.CreateDirectory(Path.Combine(folder, "taken.tsv")).FullName;
        Assert.Equal(6, (await Run("grid", "--nodes", "100", "--out", taken)).Code);
        Assert.Empty(Directory.GetFiles(folder));
    }

    [Theory]
    [InlineData("a.tsv")]
    [InlineData("a.csv.gz")]
    [InlineData("a.parquet")]
    public async Task An_interruption_exits_5_leaves_nothing_and_keeps_the_file_before(string name)
    {
        string path = Path.Combine(folder, name);
        Assert.Equal(0, (await Run("path", "--nodes", "10", "--out", path)).Code);
        byte[] before = await File.ReadAllBytesAsync(path);

        using CancellationTokenSource cancel = new();
        Task<(int Code, string Output, string Error)> run = Run(["path", "--nodes", "2e9", "--out", path], cancel.Token);
        while (!File.Exists(path + ".partial") && !run.IsCompleted)
            await Task.Delay(5);
        await cancel.CancelAsync();
        (int code, string output, string error) = await run;

        Assert.Equal(5, code);
        Assert.Equal("", output);
        Assert.Contains("nothing was written", error);
        Assert.Equal([path], Directory.GetFiles(folder));
        Assert.Equal(before, await File.ReadAllBytesAsync(path));
    }

    internal static Task<(int Code, string Output, string Error)> Run(params string[] args) => Run(args, CancellationToken.None);

    private static async Task<(int Code, string Output, string Error)> Run(string[] args, CancellationToken cancel)
    {
        using StringWriter output = new() { NewLine = "\n" };
        using StringWriter error = new() { NewLine = "\n" };
        int code = await DataGenCommand.RunAsync(args, output, error, cancel);
        return (code, output.ToString(), error.ToString());
    }

    private async Task<string[]> Lines(string family, string nodes, string ending, string decades)
    {
        string path = Path.Combine(folder, "lines" + ending);
        Assert.Equal(0, (await Run(family, "--nodes", nodes, "--decades", decades, "--out", path)).Code);
        return await File.ReadAllLinesAsync(path);
    }

    /// <summary>Links as "low high conductance", in file order; Matrix Market is brought back to 0-based numbers.</summary>
    private static List<string> ReadText(string path)
    {
        using Stream file = File.OpenRead(path);
        using Stream stream = Path.GetExtension(path) switch
        {
            ".gz" => new GZipStream(file, CompressionMode.Decompress),
            ".zst" => new ZstdSharp.DecompressionStream(file),
            _ => file,
        };
        bool matrix = path.Contains(".mtx");
        int header = matrix ? 3 : path.Contains(".csv") ? 1 : 0;
        int first = matrix ? 1 : 0;
        string[] lines = new StreamReader(stream).ReadToEnd().Split('\n', StringSplitOptions.RemoveEmptyEntries);
        return [.. lines.Skip(header).Select(line =>
        {
            string[] fields = line.Split(',', '\t', ' ');
            double conductance = fields.Length > 2 ? double.Parse(fields[2]) : 1;
            return Show(long.Parse(fields[0]) - first, long.Parse(fields[1]) - first, conductance);
        })];
    }

    private static List<string> ReadParquet(string path, bool weighted)
    {
        using DuckDBConnection connection = new("DataSource=:memory:");
        connection.Open();
        using DuckDBCommand command = connection.CreateCommand();
        command.CommandText = $"select source, target{(weighted ? ", conductance" : "")} from read_parquet('{path}')";
        using DuckDBDataReader reader = command.ExecuteReader();
        Assert.Equal(weighted ? 3 : 2, reader.FieldCount);
        Assert.Equal(typeof(long), reader.GetFieldType(0));
        List<string> links = [];
        while (reader.Read())
            links.Add(Show(reader.GetInt64(0), reader.GetInt64(1), weighted ? reader.GetDouble(2) : 1));
        return links;
    }

    private static string Show(long source, long target, double conductance) =>
        string.Create(CultureInfo.InvariantCulture, $"{Math.Min(source, target)} {Math.Max(source, target)} {conductance:R}");
}
