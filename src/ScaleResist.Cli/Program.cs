// Entry point: options to action, errors to exit codes. Invariant: whatever happens, the user sees one line that says what
// is wrong and how to mend it, and a stack trace only on request.

using ScaleResist.Cli.Commands;
using ScaleResist.Cli.Lake;
using ScaleResist.Graphs;
using ScaleResist.Runs;

namespace ScaleResist.Cli;

/// <summary>The command <c>scaleresist</c>.</summary>
internal static class Program
{
    private static int Main(string[] args) => RunProcess(args, new LibraryEngine());

    /// <summary>Runs with the console and the signals of this process.</summary>
    internal static int RunProcess(string[] args, IEstimateEngine engine)
    {
        using Interruption interruption = new();
        return Run(args, CliHost.ForProcess(engine), interruption.Token);
    }

    /// <summary>Runs a command line.</summary>
    /// <returns>The exit code.</returns>
    internal static int Run(string[] args, CliHost host, CancellationToken interrupted)
    {
        bool trace = host.Trace || args.Contains("--verbose");
        try
        {
            return CommandLine.Run(args, host, interrupted);
        }
        catch (Exception error)
        {
            return Explain(Cause(error), error, host, trace, interrupted);
        }
    }

    // Parallel work wraps errors; the one that a user can mend is the one to show.
    private static Exception Cause(Exception error) => error is AggregateException many
        ? many.Flatten().InnerExceptions.MinBy(e => e switch
        {
            InputException or LakeException or BudgetException => 0,
            OperationCanceledException => 2,
            _ => 1,
        }) ?? error
        : error;

    private static int Explain(Exception cause, Exception error, CliHost host, bool trace, CancellationToken interrupted)
    {
        (int code, string line) = cause switch
        {
            InputException => (ExitCode.Input, cause.Message),
            LakeException => (ExitCode.Writing, cause.Message),
            BudgetException => (ExitCode.Budget, cause.Message),
            OperationCanceledException when interrupted.IsCancellationRequested =>
                (ExitCode.Interrupted, "interrupted: nothing was published; the same command starts the run again"),
            OutOfMemoryException => (ExitCode.Budget,
                "not enough memory for this plan; ask for fewer --probes, --threads or tables, or use a larger machine"),
            _ => (ExitCode.Fault, $"a fault of ours ({cause.GetType().Name}): {cause.Message.ReplaceLineEndings(" ")}; "
                + "nothing was published. Please report it with the output of the same command with --verbose"),
        };
        host.Error.WriteLine($"scaleresist: {line}");
        if (trace)
            host.Error.WriteLine(error);
        return code;
    }
}
