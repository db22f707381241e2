// What the process returns: a contract that scripts and schedulers stand on.

namespace ScaleResist.Cli;

/// <summary>Exit codes.</summary>
internal static class ExitCode
{
    public const int Done = 0;
    public const int Fault = 1;
    public const int CommandLine = 2;
    public const int Input = 3;
    public const int Budget = 4;
    public const int Interrupted = 5;
    public const int Writing = 6;
}
