// Runs the command inside the test's process, or as a process of its own.

using System.Diagnostics;
using ScaleResist.Cli;
using ScaleResist.Cli.Commands;

namespace ScaleResist.Tests.Cli;

internal sealed record CliResult(int Exit, string Out, string Error)
{
    public string[] ErrorLines => Error.Split('\n', StringSplitOptions.RemoveEmptyEntries);

    public string[] OutLines => Out.Split('\n', StringSplitOptions.RemoveEmptyEntries);

    /// <summary>The lines of standard error that are no progress.</summary>
    public string[] Messages => [.. ErrorLines.Where(l => !l.StartsWith('['))];
}

internal static class CliRun
{
    public static CliResult InProcess(IEstimateEngine engine, string[] args, CancellationToken interrupted = default,
        bool trace = false)
    {
        StringWriter output = new() { NewLine = "\n" };
        StringWriter error = new() { NewLine = "\n" };
        int exit = ScaleResist.Cli.Program.Run(args,
            new CliHost { Out = output, Error = error, Engine = engine, Trace = trace }, interrupted);
        return new CliResult(exit, output.ToString(), error.ToString());
    }

    /// <summary>Starts the command as a process: with the fake engine, or the program as users get it.</summary>
    public static Process Start(bool fake, string[] args, int links = 1, int pause = 0, string? shell = null)
    {
        string program = (fake ? typeof(FakeEngineProgram) : typeof(ScaleResist.Cli.Program)).Assembly.Location;
        ProcessStartInfo info =
            new(shell is null ? "dotnet" : "/bin/sh") { RedirectStandardOutput = true, RedirectStandardError = true };
        if (shell is not null)
        {
            info.ArgumentList.Add("-c");
            info.ArgumentList.Add(shell + "; exec dotnet \"$@\"");
            info.ArgumentList.Add("sh");
        }
        info.ArgumentList.Add(program);
        foreach (string arg in args)
            info.ArgumentList.Add(arg);
        info.Environment["SCALERESIST_TEST_LINKS"] = links.ToString();
        info.Environment["SCALERESIST_TEST_PAUSE"] = pause.ToString();
        return Process.Start(info)!;
    }

    public static CliResult Finish(Process process)
    {
        using (process)
        {
            Task<string> output = process.StandardOutput.ReadToEndAsync();
            Task<string> error = process.StandardError.ReadToEndAsync();
            Assert.True(process.WaitForExit(TimeSpan.FromSeconds(60)), "the process did not end");
            return new CliResult(process.ExitCode, output.Result, error.Result);
        }
    }
}

/// <summary>A folder for one test, with a small network in it.</summary>
internal sealed class Place : IDisposable
{
    public Place()
    {
        Folder = Directory.CreateTempSubdirectory("scaleresist-test-").FullName;
        Network = Path.Combine(Folder, "grid.csv");
        File.WriteAllText(Network, "from,to\n1,2\n2,3\n");
    }

    public string Folder { get; }

    public string Network { get; }

    public string Lake => Path.Combine(Folder, "lake");

    public string Run(string id) => Path.Combine(Lake, "run=" + id);

    /// <summary>Every file and folder under the lake, relative; empty where there is no lake.</summary>
    public string[] LakeContent() => Directory.Exists(Lake)
        ? [.. Directory.EnumerateFileSystemEntries(Lake, "*", SearchOption.AllDirectories)
            .Select(p => Path.GetRelativePath(Lake, p)).Order()]
        : [];

    public string[] Estimate(string? id = "a", params string[] more) =>
        ["estimate", Network, "--lake", Lake, .. id is null ? (string[])[] : ["--run-id", id], .. more];

    public void Dispose() => Directory.Delete(Folder, recursive: true);
}
