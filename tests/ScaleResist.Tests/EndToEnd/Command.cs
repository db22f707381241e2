// The command `estimate` with the true engine, in process, as every test of this folder runs it.
// Invariant: each call gets a fresh output; nothing is shared but the lake that the test names.

using System.Runtime.CompilerServices;
using ScaleResist.Cli;
using ScaleResist.Tests.Cli;

namespace ScaleResist.Tests.EndToEnd;

internal static class Command
{
    public static CliResult Estimate(string network, string lake, params string[] more) =>
        CliRun.InProcess(new LibraryEngine(), ["estimate", network, "--lake", lake, .. more]);

    /// <summary>Runs and expects exit 0 and no message.</summary>
    public static CliResult Succeed(string network, string lake, params string[] more)
    {
        CliResult result = Estimate(network, lake, more);
        Assert.True(result.Exit == 0, result.Error);
        Assert.Empty(result.Messages);
        return result;
    }

    /// <summary>A file of the sample scenario.</summary>
    public static string Sample(string name, [CallerFilePath] string here = "") =>
        Path.GetFullPath(Path.Combine(Path.GetDirectoryName(here)!, "..", "..", "..", "data-gen", "samples", name));

    /// <summary>
    /// What a refusal owes its user: the code, one line with what to mend after a semicolon, no stack trace, no result.
    /// </summary>
    public static string Refused(CliResult result, int exit)
    {
        Assert.True(result.Exit == exit, $"exit {result.Exit}, not {exit}: {result.Error}");
        string line = Assert.Single(result.Messages);
        Assert.StartsWith("scaleresist: ", line);
        Assert.Matches(@"; \w", line);
        Assert.DoesNotContain("   at ", result.Error);
        Assert.DoesNotContain("Exception", result.Error);
        Assert.Empty(result.Out);
        return line;
    }
}
