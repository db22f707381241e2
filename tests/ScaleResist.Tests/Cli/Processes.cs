// The command as a true process: signals, exit codes, limits of the system, and two processes over one run id.

using System.Diagnostics;

namespace ScaleResist.Tests.Cli;

public sealed class Processes
{
    [Theory]
    [InlineData("INT")]
    [InlineData("TERM")]
    [InlineData("HUP")]
    public void A_signal_ends_the_run_with_exit_5_and_leaves_nothing(string signal)
    {
        using Place place = new();
        Directory.CreateDirectory(place.Lake);
        Process process = CliRun.Start(fake: true, place.Estimate(), links: 1_000_000, pause: 50);
        WaitFor(() => Directory.Exists(Path.Combine(place.Lake, "_staging", "run=a", "links")));
        Process.Start("kill", [$"-{signal}", process.Id.ToString()])!.WaitForExit();
        CliResult result = CliRun.Finish(process);
        Assert.Equal(5, result.Exit);
        Assert.Contains("interrupted: nothing was published", Assert.Single(result.Messages));
        Assert.Empty(place.LakeContent());
    }

    [Fact]
    public void A_killed_run_is_invisible_and_the_same_command_works_again()
    {
        using Place place = new();
        Process process = CliRun.Start(fake: true, place.Estimate(), links: 1_000_000, pause: 50);
        WaitFor(() => Directory.Exists(Path.Combine(place.Lake, "_staging", "run=a", "links")));
        process.Kill();
        CliRun.Finish(process);
        Assert.Contains("_staging/run=a.claim", place.LakeContent());
        Assert.Empty(Directory.GetDirectories(place.Lake, "run=*"));
        Assert.Equal(0, CliRun.InProcess(new FakeEngine(), place.Estimate()).Exit);
        Assert.Equal(["run=a"], Directory.GetFileSystemEntries(place.Lake).Select(Path.GetFileName));
    }

    [Fact]
    public void Of_two_processes_with_one_run_id_exactly_one_works()
    {
        using Place place = new();
        Process[] both =
            [.. Enumerable.Range(0, 2).Select(_ => CliRun.Start(fake: true, place.Estimate(), links: 40_000, pause: 50))];
        CliResult[] results = [.. both.Select(CliRun.Finish)];
        Assert.Equal([0, 6], results.Select(r => r.Exit).Order());
        CliResult refused = results.Single(r => r.Exit == 6);
        Assert.Matches(@"run 'a' is being written by process \d+ on", Assert.Single(refused.ErrorLines));
    }

    [Fact]
    public void A_write_that_the_system_refuses_is_exit_6_and_leaves_nothing()
    {
        using Place place = new();
        Directory.CreateDirectory(place.Lake);
        // A limit of 64 KiB a file; the runtime's own double-mapped code would need more, hence the switch.
        Process process = CliRun.Start(fake: true, place.Estimate(), links: 300_000,
            shell: "export DOTNET_EnableWriteXorExecute=0; trap '' XFSZ; ulimit -f 128");
        CliResult result = CliRun.Finish(process);
        Assert.True(result.Exit == 6, result.Error);
        Assert.Contains("part-00000.parquet: ", Assert.Single(result.Messages));
        Assert.Empty(place.LakeContent());
    }

    [Fact]
    public void The_true_program_answers_a_wrong_line_with_exit_2()
    {
        CliResult result = CliRun.Finish(CliRun.Start(fake: false, ["estimate", "n.csv", "--lake", "l", "--probes", "2"]));
        Assert.Equal(2, result.Exit);
        Assert.Equal("scaleresist: --probes '2' is not a number from 4 to 4096", Assert.Single(result.ErrorLines));
        Assert.Empty(result.Out);
    }

    private static void WaitFor(Func<bool> condition)
    {
        Stopwatch watch = Stopwatch.StartNew();
        while (!condition())
        {
            Assert.True(watch.Elapsed < TimeSpan.FromSeconds(30), "it did not happen within 30 s");
            Thread.Sleep(10);
        }
    }
}
