// Threads change the time and nothing else: the same seed gives the same bytes in every file of every table.

using ScaleResist.Tests.Cli;

namespace ScaleResist.Tests.EndToEnd;

public sealed class Thread_counts
{
    [Fact]
    public void One_and_two_threads_write_the_same_bytes_of_the_sample() =>
        SameBytes(Command.Sample("links.csv"), "index,components,nodes,links,pairs,coordinates", 6,
            "--weights", "conductance", "--pairs", Command.Sample("pairs.csv"), "--node-weights", Command.Sample("sites.csv"));

    [Fact]
    public void One_and_two_threads_write_the_same_bytes_of_the_internet()
    {
        using Place place = new();
        string pairs = Path.Combine(place.Folder, "pairs.csv");
        File.WriteAllLines(pairs, Enumerable.Range(1, 500).Select(i => $"{i},{(i * 7919) % 22963}"));
        SameBytes(TestData.Path("as-22july06.tsv"), "index,nodes,links,pairs", 5, "--pairs", pairs, "--probes", "40");
    }

    // Two threads solve panels side by side, some of them beyond the last one that is wanted.
    [Theory]
    [InlineData("0.06")]
    [InlineData("0.05")]
    [InlineData("0.04")]
    public void One_and_two_threads_write_the_same_bytes_with_a_target(string target) =>
        SameBytes(Command.Sample("links.csv"), "index,nodes,links,pairs", 5, "--route", "probe",
            "--weights", "conductance", "--pairs", Command.Sample("pairs.csv"), "--target-error", target);

    private static void SameBytes(string network, string want, int files, params string[] more)
    {
        using Place place = new();
        string[] lakes = [Path.Combine(place.Folder, "one"), Path.Combine(place.Folder, "two")];
        for (int i = 0; i < 2; i++)
        {
            Command.Succeed(network, lakes[i],
                ["--run-id", "a", "--seed", "5", "--want", want, "--threads", $"{i + 1}", .. more]);
        }
        string[] parts = [.. Directory.GetFiles(lakes[0], "*.parquet", SearchOption.AllDirectories)
            .Select(file => Path.GetRelativePath(lakes[0], file))];
        Assert.Equal(files, parts.Length);
        Assert.All(parts, part => Assert.Equal(Bytes(lakes[0], part), Bytes(lakes[1], part)));

        static byte[] Bytes(string lake, string part) => File.ReadAllBytes(Path.Combine(lake, part));
    }
}
