// What the command line needs of the world, so that tests can run it inside their own process.

using System.Diagnostics;
using ScaleResist.Cli.Commands;

namespace ScaleResist.Cli;

/// <summary>Streams, terminal, clock and engine of one invocation.</summary>
internal sealed record CliHost
{
    /// <summary>Results: the summary, help, the version.</summary>
    public required TextWriter Out { get; init; }

    /// <summary>Messages and progress.</summary>
    public required TextWriter Error { get; init; }

    /// <summary>What estimates.</summary>
    public required IEstimateEngine Engine { get; init; }

    /// <summary>Whether <see cref="Error"/> is a terminal that takes a live bar.</summary>
    public bool LiveProgress { get; init; }

    /// <summary>Whether faults show their stack.</summary>
    public bool Trace { get; init; }

    /// <summary>Seconds since this process began, where it has this one invocation; else 0.</summary>
    public Func<double> SecondsBefore { get; init; } = () => 0;

    public TimeProvider Time { get; init; } = TimeProvider.System;

    /// <summary>The host of a real process.</summary>
    public static CliHost ForProcess(IEstimateEngine engine) => new()
    {
        Out = Console.Out,
        Error = Console.Error,
        Engine = engine,
        LiveProgress = !Console.IsErrorRedirected && Environment.GetEnvironmentVariable("TERM") is not "dumb",
        SecondsBefore = () => (DateTime.Now - Process.GetCurrentProcess().StartTime).TotalSeconds,
        Trace = Environment.GetEnvironmentVariable("SCALERESIST_TRACE") == "1",
    };
}
