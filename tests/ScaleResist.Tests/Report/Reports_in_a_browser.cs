// Reports in headless Chromium: tests/browser/check.mjs says what it checks, and tests/browser/install, which the test runs where that has not been
// done, installs what it needs.

using System.Diagnostics;
using System.Runtime.CompilerServices;
using ScaleResist.Tests.Cli;
using ScaleResist.Tests.EndToEnd;

namespace ScaleResist.Tests.Report;

public sealed class Reports_in_a_browser
{
    [Fact]
    [Trait("Category", "Slow")]
    [Trait("Category", "Browser")]
    public void Reports_are_whole_readable_and_silent_on_phone_desk_and_paper()
    {
        using Place place = new();
        Command.Succeed(Command.Sample("links.csv"), place.Lake, "--run-id", "sample", "--weights", "conductance");
        Command.Succeed(TestData.Path("power.tsv"), place.Lake, "--run-id", "probed", "--route", "probe");
        Command.Succeed(TestData.Path("netscience.tsv"), place.Lake, "--run-id", "pieces", "--weights", "none");
        string long1 = new('w', 1000), long2 = string.Concat(Enumerable.Repeat("日本", 300));
        File.WriteAllText(place.Network, $"from,to\n<script>alert(1)</script>,{long1}\n{long1},{long2}\n{long2},<script>alert(1)</script>\n"
            + $"{long2},\"\"\"q\"\" & 'r'\"\nשלום עולם,{long2}\n");
        Command.Succeed(place.Network, place.Lake, "--run-id", "odd");
        if (!Directory.Exists(Path.Combine(Folder(), "node_modules", "axe-core")))
            RunIn(Folder(), "bash", "install");
        Assert.Empty(RunIn(Folder(), "node", ["check.mjs", .. new[] { "sample", "probed", "pieces", "odd" }.Select(run => Path.Combine(place.Run(run), "report.html"))]));
    }

    private static string RunIn(string folder, string program, params string[] arguments)
    {
        ProcessStartInfo info = new(program, arguments) { WorkingDirectory = folder, RedirectStandardOutput = true, RedirectStandardError = true };
        using Process process = Process.Start(info)!;
        Task<string> error = process.StandardError.ReadToEndAsync();
        string output = process.StandardOutput.ReadToEnd();
        process.WaitForExit();
        Assert.True(process.ExitCode == 0, output + error.Result);
        return output;
    }

    private static string Folder([CallerFilePath] string here = "") =>
        Path.GetFullPath(Path.Combine(Path.GetDirectoryName(here)!, "..", "..", "browser"));
}
