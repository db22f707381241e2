// Whatever a file holds, the command ends with an answer or a refusal; it never faults, and only an answer reaches the lake.

using System.Globalization;
using System.Text;
using CsCheck;
using ScaleResist.Tests.Cli;
using ScaleResist.Tests.Graphs;

namespace ScaleResist.Tests.EndToEnd;

public sealed class Mutated_inputs : IDisposable
{
    private static readonly string[] Forms = ["csv", "tsv", "txt", "edges", "mtx", "csv.gz", "tsv.zst"];
    private static readonly string[] Meanings = ["conductance", "resistance", "none", ""];

    private readonly ScratchFolder folder = new();
    private int runs;
    private int answers;
    private int refusals;

    public void Dispose() => folder.Dispose();

    [Fact]
    public void Three_hundred_mutated_files_are_answered_or_refused()
    {
        Gen.Select(Gen.Int[0, Forms.Length - 1], Gen.Int[1, 30], Gen.Int[0, 7], Gen.Int[0, Meanings.Length - 1],
            ReaderFuzzTests.Mutation.Array[0, 2], ReaderFuzzTests.Mutation.Array[0, 1])
            .Sample(
                (form, rows, kind, meaning, before, after) =>
                {
                    byte[] text = Valid(Forms[form], rows, weighted: kind % 2 == 0, texts: kind > 5);
                    text = before.Aggregate(text, (bytes, mutate) => mutate(bytes));
                    // Half of the files are hurt after packing, too.
                    byte[] packed = ScratchFolder.Pack(Forms[form], text);
                    if (kind >= 4)
                        packed = after.Aggregate(packed, (bytes, mutate) => mutate(bytes));
                    Run(Forms[form], packed, Meanings[meaning]);
                },
                seed: "0000KDr5Vc5n", iter: 300);
        // The property means little unless both ends of it are met often.
        Assert.InRange(answers, 60, 240);
        Assert.InRange(refusals, 60, 240);
    }

    private void Run(string form, byte[] bytes, string meaning)
    {
        int number = Interlocked.Increment(ref runs);
        string network = folder.WriteRaw($"{number}.{form}", bytes);
        string lake = folder.Path($"lake-{number}");
        string[] weights = meaning == "" ? [] : ["--weights", meaning];
        CliResult result = Command.Estimate(network, lake, ["--run-id", "a", "--probes", "4", "--threads", "1", .. weights]);
        if (result.Exit == 0)
        {
            Interlocked.Increment(ref answers);
            Assert.Empty(result.Messages);
            Assert.Equal(["run=a"], Directory.GetFileSystemEntries(lake).Select(Path.GetFileName));
            string[] entries = Directory.GetFileSystemEntries(Path.Combine(lake, "run=a"));
            // An audit is there where anything but bridges was probed.
            Assert.Equal(["_SUCCESS", "components", "index", "links", "nodes", "report.html", "run.json"],
                entries.Select(Path.GetFileName).Where(name => name != "audit").Order(StringComparer.Ordinal));
        }
        else
        {
            Interlocked.Increment(ref refusals);
            Assert.Contains(network, Command.Refused(result, 3));
            Assert.False(Directory.Exists(lake));
        }
        File.Delete(network);
    }

    private static byte[] Valid(string form, int rows, bool weighted, bool texts)
    {
        string separator = form[..3] switch { "csv" => ",", "tsv" => "\t", _ => " " };
        StringBuilder text = new(form == "mtx"
            ? $"%%MatrixMarket matrix coordinate {(weighted ? "real" : "pattern")} general\n{rows + 2} {rows + 2} {rows}\n"
            : "# note\nsource" + separator + "target" + (weighted ? separator + "weight" : "") + "\n");
        for (int i = 1; i <= rows; i++)
        {
            string from = texts && form != "mtx" ? $"\"é \"\"{i}\"" : $"{i}";
            string weight = weighted ? separator + (i * 0.25).ToString(CultureInfo.InvariantCulture) : "";
            text.Append(from).Append(separator).Append((i * 5 % rows) + 2).Append(weight).Append(i % 5 == 0 ? "\r\n" : "\n");
        }
        return Encoding.UTF8.GetBytes(text.ToString());
    }
}
