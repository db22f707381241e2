// Every wrong command line gives exit 2 and one line that says how to mend it, and touches nothing.

using CsCheck;
using ScaleResist.Cli.Commands;

namespace ScaleResist.Tests.Cli;

public sealed class Command_lines_that_are_wrong
{
    [Theory]
    [InlineData("", "scaleresist estimate NETWORK --lake DIR")]
    [InlineData("estmate n.csv --lake l", "did you mean estimate?")]
    [InlineData("servey n.csv", "did you mean survey?")]
    [InlineData("merge n.csv", "not in this version; it has: estimate, survey, tune")]
    [InlineData("tune", "no network is named; give its file: scaleresist tune NETWORK")]
    [InlineData("tune n.csv m.csv", "a tuning takes one network")]
    [InlineData("tune n.csv --run-id a", "say which: --lake DIR")]
    [InlineData("tune n.csv --lake l --run-id ../x", "not a plain name")]
    [InlineData("tune n.csv --probes 64", "unknown option '--probes'; see scaleresist tune --help")]
    [InlineData("tune n.csv --want pairs", "leave pairs out")]
    [InlineData("tune n.csv --want components", "add index, nodes or links")]
    [InlineData("tune n.csv --want node", "did you mean nodes?")]
    [InlineData("tune n.csv --weights length", "choose none, conductance or resistance")]
    [InlineData("tune n.csv --confidence 95", "between 0 and 1")]
    [InlineData("survey", "no network is named; give its file: scaleresist survey NETWORK")]
    [InlineData("survey n.csv --lake l", "unknown option '--lake'; see scaleresist survey --help")]
    [InlineData("survey n.csv m.csv", "a survey takes one network")]
    [InlineData("survey n.csv --memory-budget 16", "16GiB or 500MB")]
    [InlineData("survey n.csv --weights length", "choose none, conductance or resistance")]
    [InlineData("impact", "no network is named; give its file: scaleresist impact NETWORK --changes FILE --lake DIR")]
    [InlineData("impact n.csv --lake l", "name a table of cases with --changes FILE, or ask for additions with --suggest N")]
    [InlineData("impact n.csv --lake l --changes c.csv --suggest 3", "two jobs")]
    [InlineData("impact n.csv --lake l --changes c.csv --candidates d.csv", "--candidates serves --suggest")]
    [InlineData("impact n.csv --lake l --changes c.csv --budget 3", "--budget serves --suggest")]
    [InlineData("impact n.csv --lake l --suggest 0", "from 1 to 1000")]
    [InlineData("impact n.csv --lake l --suggest 3 --pairs p.csv", "--pairs serves --changes")]
    [InlineData("impact n.csv --lake l --suggest 3 --budget 4", "--budget needs costs")]
    [InlineData("impact n.csv --lake l --suggest 3 --candidates c.csv --budget 0", "not a number above zero")]
    [InlineData("impact n.csv --lake l --changes c.csv --probes 64", "unknown option '--probes'")]
    [InlineData("impact n.csv --lake l --changes c.csv --confidence 1", "between 0 and 1")]
    [InlineData("impact n.csv --changes c.csv", "--lake DIR")]
    [InlineData("distances", "no network is named; give its file: scaleresist distances NETWORK --lake DIR")]
    [InlineData("distances n.csv", "--lake DIR")]
    [InlineData("distances n.csv --lake l --want pairs", "--pairs FILE")]
    [InlineData("distances n.csv --lake l --want eccentricities", "did you mean eccentricity?")]
    [InlineData("distances n.csv --lake l --beside r", "--pairs FILE")]
    [InlineData("distances n.csv --lake l --beside ../r --pairs p.csv", "not the name of a run")]
    [InlineData("distances n.csv --lake l --columns a,b,km", "add --lengths")]
    [InlineData("distances n.csv --lake l --columns a,b --lengths", "--columns a,b,W")]
    [InlineData("distances n.csv --lake l --target-error 2", "not a number between 0 and 1")]
    [InlineData("distances n.csv --lake l --weights resistance", "unknown option '--weights'")]
    [InlineData("distances n.csv --lake l --sources s.csv --pairs p.csv --want pairs", "--sources serves")]
    [InlineData("frobnicate", "unknown verb 'frobnicate'")]
    [InlineData("--lake l estimate n.csv", "before the verb")]
    [InlineData("estimate", "no network is named")]
    [InlineData("estimate n.csv", "--lake DIR")]
    [InlineData("estimate --lake l", "no network is named")]
    [InlineData("estimate n.csv --lake", "--lake needs a value")]
    [InlineData("estimate n.csv m.csv --lake l", "'m.csv' is one word too many")]
    [InlineData("estimate n.csv --lake l --prob 16", "did you mean --probes?")]
    [InlineData("estimate --porbes 16 n.csv --lake l", "did you mean --probes?")]
    [InlineData("estimate n.csv --lake l --porbes=16", "did you mean --probes?")]
    [InlineData("estimate n.csv --lake l --frobnicate", "unknown option '--frobnicate'; see scaleresist estimate --help")]
    [InlineData("estimate n.csv --lake l -x", "unknown option '-x'")]
    [InlineData("estimate n.csv --lake l --probes", "--probes needs a value")]
    [InlineData("estimate n.csv --lake l --probes --seed 1", "--probes needs a value")]
    [InlineData("estimate n.csv --lake l --probes 8 --probes 9", "--probes is given more than once")]
    [InlineData("estimate n.csv --lake l --probes 3", "from 4 to 4096")]
    [InlineData("estimate n.csv --lake l --probes 4097", "from 4 to 4096")]
    [InlineData("estimate n.csv --lake l --probes 16.0", "'16.0'")]
    [InlineData("estimate n.csv --lake l --probes many", "'many'")]
    [InlineData("estimate n.csv --lake l --threads 0", "from 1 to 256")]
    [InlineData("estimate n.csv --lake l --threads 257", "from 1 to 256")]
    [InlineData("estimate n.csv --lake l --confidence 0", "between 0 and 1")]
    [InlineData("estimate n.csv --lake l --confidence 1", "between 0 and 1")]
    [InlineData("estimate n.csv --lake l --confidence 95", "between 0 and 1")]
    [InlineData("estimate n.csv --lake l --confidence NaN", "between 0 and 1")]
    [InlineData("estimate n.csv --lake l --seed -1", "'-1' is not a whole number")]
    [InlineData("estimate n.csv --lake l --seed 18446744073709551616", "18446744073709551615")]
    [InlineData("estimate n.csv --lake l --want links,node", "did you mean nodes?")]
    [InlineData("estimate n.csv --lake l --want everything", "choose from index,components,nodes,links,pairs,coordinates")]
    [InlineData("estimate n.csv --lake l --want index,", "'' is not a table")]
    [InlineData("estimate n.csv --lake l --want pairs", "--pairs FILE")]
    [InlineData("estimate n.csv --lake l --want links --node-weights w.csv", "add index to --want")]
    [InlineData("estimate n.csv --lake l --weights length", "choose none, conductance or resistance")]
    [InlineData("estimate n.csv --lake l --columns a", "SRC,DST")]
    [InlineData("estimate n.csv --lake l --columns a,b,c,d", "SRC,DST")]
    [InlineData("estimate n.csv --lake l --columns a,,c", "SRC,DST")]
    [InlineData("estimate n.csv --lake l --columns a,b,km", "--weights conductance or --weights resistance")]
    [InlineData("estimate n.csv --lake l --columns a,b --weights resistance", "--columns a,b,W")]
    [InlineData("estimate n.csv --lake l --run-id ../x", "not a plain name")]
    [InlineData("estimate n.csv --lake l --run-id _staging", "not a plain name")]
    [InlineData("estimate n.csv --lake l --route fast", "choose auto, exact or probe")]
    [InlineData("estimate n.csv --lake l --target-error 0.01 --probes 64", "choose one")]
    [InlineData("estimate n.csv --lake l --target-error 0", "not a number between 0 and 1")]
    [InlineData("estimate n.csv --lake l --target-error 1", "not a number between 0 and 1")]
    [InlineData("estimate n.csv --lake l --target-error 1%", "not a number between 0 and 1")]
    [InlineData("estimate n.csv --lake l --time-budget 4", "4h, 90m or 30s")]
    [InlineData("estimate n.csv --lake l --memory-budget 16", "16GiB or 500MB")]
    [InlineData("estimate n.csv --lake l --shard 1/4", "--shard is not in this version")]
    [InlineData("estimate n.csv --lake l --terminals t.csv --want links", "--terminals serves the nodes table")]
    public void Exit_2_and_one_line_with_the_mend(string line, string part)
    {
        FakeEngine engine = new();
        CliResult result = CliRun.InProcess(engine, line.Split(' ', StringSplitOptions.RemoveEmptyEntries));
        Assert.Equal(2, result.Exit);
        string message = Assert.Single(result.ErrorLines);
        Assert.StartsWith("scaleresist: ", message);
        Assert.Contains(part, message);
        Assert.True(message.Length <= 220, message);
        Assert.Empty(result.Out);
        Assert.Equal(0, engine.Runs);
        Assert.False(Directory.Exists("l"));
    }

    [Theory]
    [InlineData("--pairs")]
    [InlineData("--node-weights")]
    public void A_file_without_a_name_is_refused(string option)
    {
        CliResult result = CliRun.InProcess(new FakeEngine(), ["estimate", "n.csv", "--lake", "l", option, ""]);
        Assert.Equal(2, result.Exit);
        Assert.Equal($"scaleresist: {option} names no file; give its path", Assert.Single(result.ErrorLines));
    }

    [Fact]
    public void No_command_line_is_a_fault()
    {
        using Place place = new();
        string lake = "--lake=" + place.Lake; // In one word, so that no other word becomes a folder's name.
        string[] words = ["estimate", "estimate", "estimate", place.Network, place.Network, lake, lake, lake, "--run-id", "r",
            "--want", "index,pairs", "--probes", "--threads=2", "--seed", "7", "-1", "--weights", "none", "--columns", "a,b",
            "--pairs", "--restart", "--verbose", "--confidence", "0.5", "--route", "exact", "--help", "--version", "--", "-", "",
            "@x", "=", "--=", "--lake=", "\"", "'", "é\n", "[diagram]", "--shard", "1/2"];
        Gen.Int[0, words.Length - 1].Select(i => words[i]).Array[0, 9].Sample(args =>
        {
            CliResult result = CliRun.InProcess(new FakeEngine { Links = 3, Nodes = 3 }, args);
            Assert.True(result.Exit is 0 or 2 or 3, $"{string.Join(' ', args)}: exit {result.Exit}, {result.Error}");
            if (result.Exit != 0)
                Assert.StartsWith("scaleresist: ", result.Messages[0]);
            if (Directory.Exists(place.Lake))
                Directory.Delete(place.Lake, recursive: true);
        }, iter: 2000, seed: "0000000000000", threads: 1);
    }

    [Theory]
    [InlineData("4h", 14400)]
    [InlineData("90m", 5400)]
    [InlineData("30s", 30)]
    [InlineData("1.5H", 5400)]
    [InlineData("0s", null)]
    [InlineData("-1s", null)]
    [InlineData("4", null)]
    [InlineData("h", null)]
    [InlineData("4 h", null)]
    [InlineData("1e400h", null)]
    public void Durations_have_units(string text, int? seconds)
    {
        Assert.Equal(seconds is not null, Units.TryDuration(text, out TimeSpan duration));
        Assert.Equal(seconds ?? 0, duration.TotalSeconds);
    }

    [Theory]
    [InlineData("16GiB", 17179869184L)]
    [InlineData("500MB", 500000000L)]
    [InlineData("1.5kib", 1536L)]
    [InlineData("16", null)]
    [InlineData("16G", null)]
    [InlineData("0MB", null)]
    [InlineData("99999999TiB", null)]
    public void Sizes_have_units(string text, long? bytes)
    {
        Assert.Equal(bytes is not null, Units.TrySize(text, out long size));
        Assert.Equal(bytes ?? 0, size);
    }

    [Theory]
    [InlineData("--help")]
    [InlineData("estimate --help")]
    [InlineData("survey --help")]
    [InlineData("distances --help")]
    [InlineData("survey n.csv -h")]
    [InlineData("impact --help")]
    [InlineData("tune --help")]
    [InlineData("estimate n.csv --frobnicate -h")]
    public void Help_fits_a_screen_and_has_one_example(string line)
    {
        CliResult result = CliRun.InProcess(new FakeEngine(), line.Split(' '));
        Assert.Equal(0, result.Exit);
        Assert.Empty(result.Error);
        Assert.InRange(result.Out.Split('\n').Length, 5, 40);
        Assert.All(result.OutLines, l => Assert.True(l.Length <= 80, l));
        Assert.Equal(2, result.Out.Split("Example: ").Length);
    }

    [Fact]
    public void The_version_is_one_line()
    {
        CliResult result = CliRun.InProcess(new FakeEngine(), ["--version"]);
        Assert.Equal(0, result.Exit);
        Assert.Matches(@"^scaleresist \d+\.\d+\.\d+\S*( \([0-9a-f]+\))?\n$", result.Out);
    }
}
