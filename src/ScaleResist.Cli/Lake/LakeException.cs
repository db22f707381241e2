// The one error type for a lake that cannot be written: it always names the path and how to mend it.

namespace ScaleResist.Cli.Lake;

/// <summary>The lake cannot be written. The message is one line: <c>path: what is wrong; how to mend it</c>.</summary>
internal sealed class LakeException : Exception
{
    // errno values of Linux and the low words of Windows' HRESULTs.
    private const int NoSpaceLeft = 28;
    private const int ReadOnlyFileSystem = 30;
    private const int QuotaExceeded = 122;
    private const int WindowsDiskFull = unchecked((int)0x80070070);

    public LakeException(string path, string problem, string mend, Exception? inner = null)
        : base($"{path}: {problem}; {mend}".ReplaceLineEndings(" "), inner)
    {
    }

    /// <summary>Whether an error comes from the file system, so that <see cref="From"/> can name its mend.</summary>
    public static bool IsFileSystemError(Exception error) => error is IOException or UnauthorizedAccessException
        || IsFileTooLarge(error);

    /// <summary>Says what a file system error means for the lake.</summary>
    public static LakeException From(string path, Exception error) => error switch
    {
        UnauthorizedAccessException => new(path, "no permission to write here",
            "choose another --lake or have its permissions changed", error),
        IOException { HResult: NoSpaceLeft or WindowsDiskFull } => new(path, "the disk is full",
            "free some space or choose another --lake, then start the same command again", error),
        IOException { HResult: QuotaExceeded } => new(path, "the disk quota is used up",
            "free some space or choose another --lake, then start the same command again", error),
        _ when IsFileTooLarge(error) => new(path, "the file would be larger than the limit set for this process",
            "raise the limit (ulimit -f), then start the same command again", error),
        IOException { HResult: ReadOnlyFileSystem } => new(path, "the file system is read-only",
            "choose another --lake", error),
        DirectoryNotFoundException or FileNotFoundException => new(path,
            "the folder is not there or was removed while it was written",
            "check --lake, then start the same command again", error),
        _ => new(path, $"writing failed ({error.Message.TrimEnd('.')})",
            "check the disk and --lake, then start the same command again", error),
    };

    // .NET turns EFBIG into this odd exception.
    private static bool IsFileTooLarge(Exception error) =>
        error is ArgumentOutOfRangeException { ParamName: "value", Source: "System.Private.CoreLib" };
}
