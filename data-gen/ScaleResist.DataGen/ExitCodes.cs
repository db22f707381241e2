// The exit codes of the command, the same as those of the main program.

namespace ScaleResist.DataGen;

internal static class ExitCodes
{
    public const int Done = 0;
    public const int Usage = 2;
    public const int Interrupted = 5;
    public const int CannotWrite = 6;
}
