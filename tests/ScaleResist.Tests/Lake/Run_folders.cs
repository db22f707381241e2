// Publication and claims: what a reader may see, and who may write.

using System.Diagnostics;
using ScaleResist.Cli.Lake;
using ScaleResist.Tests.Cli;

namespace ScaleResist.Tests.Lake;

public sealed class Run_folders
{
    [Theory]
    [InlineData("a", true)]
    [InlineData("2026-12-01.night_3", true)]
    [InlineData("", false)]
    [InlineData(".", false)]
    [InlineData("..", false)]
    [InlineData("-a", false)]
    [InlineData("_staging", false)]
    [InlineData("a/b", false)]
    [InlineData("a\\b", false)]
    [InlineData("a b", false)]
    [InlineData("a\n", false)]
    [InlineData("é", false)]
    public void A_run_id_is_a_plain_name(string id, bool good) => Assert.Equal(good, RunFolder.IsRunId(id));

    [Fact]
    public void A_run_id_has_at_most_a_hundred_characters()
    {
        Assert.True(RunFolder.IsRunId(new string('x', 100)));
        Assert.False(RunFolder.IsRunId(new string('x', 101)));
    }

    [Theory]
    [InlineData("data/power.tsv", "power-20261201T040506Z")]
    [InlineData("my roads (new).csv.gz", "my-roads-new-20261201T040506Z")]
    [InlineData("parts/", "parts-20261201T040506Z")]
    [InlineData("网络.csv", "run-20261201T040506Z")]
    [InlineData("-x.csv", "x-20261201T040506Z")]
    public void The_default_run_id_is_the_files_stem_and_the_time(string network, string id)
    {
        Assert.Equal(id, RunFolder.DefaultRunId(network, new DateTimeOffset(2026, 12, 1, 4, 5, 6, TimeSpan.Zero)));
        Assert.True(RunFolder.IsRunId(id));
        Assert.True(RunFolder.IsRunId(RunFolder.DefaultRunId(new string('n', 300) + ".csv", DateTimeOffset.UtcNow)));
    }

    [Fact]
    public void A_run_appears_complete_and_leaves_no_staging()
    {
        using Place place = new();
        RunFolder folder = new(place.Lake, "a");
        using (StagedRun staged = folder.Begin())
        {
            File.WriteAllText(Path.Combine(staged.Path, "x"), "1");
            Assert.False(Directory.Exists(folder.Published));
            staged.Publish("{}"u8);
        }
        Assert.True(folder.IsPublished);
        Assert.Equal(["run=a", "run=a/_SUCCESS", "run=a/run.json", "run=a/x"], place.LakeContent());
    }

    [Fact]
    public void An_unpublished_run_leaves_nothing_not_even_the_lake_it_made()
    {
        using Place place = new();
        using (StagedRun staged = new RunFolder(place.Lake, "a").Begin())
            File.WriteAllText(Path.Combine(staged.Path, "x"), "1");
        Assert.False(Directory.Exists(place.Lake));
    }

    [Fact]
    public void What_a_crashed_run_left_is_discarded()
    {
        using Place place = new();
        RunFolder folder = new(place.Lake, "a");
        Directory.CreateDirectory(Path.Combine(folder.Staging, "links"));
        File.WriteAllText(Path.Combine(folder.Staging, "links", "part-00000.parquet"), "half");
        using StagedRun staged = folder.Begin();
        Assert.Empty(Directory.GetFileSystemEntries(staged.Path));
    }

    [Fact]
    public void A_foreign_folder_of_the_runs_name_is_not_overwritten()
    {
        using Place place = new();
        RunFolder folder = new(place.Lake, "a");
        StagedRun staged = folder.Begin();
        Directory.CreateDirectory(folder.Published);
        File.WriteAllText(Path.Combine(folder.Published, "mine"), "1");
        Assert.Contains("no finished run", Assert.Throws<LakeException>(() => staged.Publish("{}"u8)).Message);
        staged.Dispose();
        Assert.Contains("no finished run", Assert.Throws<LakeException>(folder.Begin).Message);
        Assert.Equal(["run=a", "run=a/mine"], place.LakeContent());
    }

    [Fact]
    public void A_second_writer_is_told_who_holds_the_run()
    {
        using Place place = new();
        RunFolder folder = new(place.Lake, "a");
        using StagedRun first = folder.Begin();
        LakeException error = Assert.Throws<LakeException>(folder.Begin);
        Assert.Contains($"process {Environment.ProcessId} on {Environment.MachineName}", error.Message);
        Assert.True(Directory.Exists(first.Path));
        using StagedRun other = new RunFolder(place.Lake, "b").Begin();
    }

    [Fact]
    public void The_claim_of_a_dead_process_is_taken_over()
    {
        using Place place = new();
        RunFolder folder = new(place.Lake, "a");
        using Process dead = Process.Start("true")!;
        dead.WaitForExit();
        WriteClaim(folder, dead.Id, Environment.MachineName, "1");
        folder.Begin().Dispose();
        Assert.False(File.Exists(folder.ClaimFile));
    }

    [Fact]
    public void A_reused_process_id_does_not_keep_a_claim_alive()
    {
        using Place place = new();
        RunFolder folder = new(place.Lake, "a");
        WriteClaim(folder, Environment.ProcessId, Environment.MachineName, "1");
        folder.Begin().Dispose();
    }

    [Fact]
    public void A_claim_of_another_host_is_respected()
    {
        using Place place = new();
        RunFolder folder = new(place.Lake, "a");
        WriteClaim(folder, 1, "another-host", "1");
        LakeException error = Assert.Throws<LakeException>(folder.Begin);
        Assert.Contains("process 1 on another-host", error.Message);
        Assert.Contains(folder.ClaimFile, error.Message);
        Assert.True(File.Exists(folder.ClaimFile));
    }

    [Fact]
    public void A_claim_whose_writer_died_before_filling_it_is_taken_over()
    {
        using Place place = new();
        RunFolder folder = new(place.Lake, "a");
        Directory.CreateDirectory(Path.GetDirectoryName(folder.ClaimFile)!);
        File.WriteAllText(folder.ClaimFile, "");
        folder.Begin().Dispose();
    }

    [Theory]
    [InlineData(false)]
    [InlineData(true)]
    public async Task Of_many_claimants_at_once_exactly_one_holds_the_run(bool stale)
    {
        using Place place = new();
        for (int round = 0; round < 20; round++)
        {
            RunFolder folder = new(place.Lake, "r" + round);
            if (stale)
                WriteClaim(folder, Environment.ProcessId, Environment.MachineName, "1");
            using Barrier barrier = new(8);
            StagedRun?[] held = await Task.WhenAll(Enumerable.Range(0, 8).Select(_ => Task.Factory.StartNew(() =>
            {
                barrier.SignalAndWait();
                try
                {
                    return folder.Begin();
                }
                catch (LakeException)
                {
                    return null;
                }
            }, TaskCreationOptions.LongRunning)));
            Assert.Single(held, h => h is not null);
            held.Single(h => h is not null)!.Dispose();
        }
    }

    private static void WriteClaim(RunFolder folder, int process, string host, string start)
    {
        Directory.CreateDirectory(Path.GetDirectoryName(folder.ClaimFile)!);
        File.WriteAllText(folder.ClaimFile, $$"""
            {"Process":{{process}},"Host":"{{host}}","ProcessStart":"{{start}}","Since":"2026-01-01T00:00:00Z","Token":"t"}
            """);
    }
}
