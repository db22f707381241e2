// Makes files and folders survive a power cut. A rename is only as good as the flush of what it names.

using System.Runtime.InteropServices;

namespace ScaleResist.Cli.Lake;

/// <summary>Flushes files and folders to the disk.</summary>
internal static partial class Durable
{
    /// <summary>Writes a new small file and flushes it.</summary>
    public static void WriteNew(string path, ReadOnlySpan<byte> content)
    {
        using FileStream file = new(path, FileMode.CreateNew, FileAccess.Write);
        file.Write(content);
        file.Flush(flushToDisk: true);
    }

    /// <summary>Flushes a folder's entries. Windows keeps no such thing, and there it does nothing.</summary>
    public static void FlushFolder(string path)
    {
        if (OperatingSystem.IsWindows())
            return;
        // .NET does not open folders, so this goes to the C library.
        int descriptor = Open(path, 0);
        if (descriptor < 0)
            throw Failure(path);
        try
        {
            // EINVAL (22): a file system that cannot flush folders; it promises nothing, and there is nothing to mend.
            if (Flush(descriptor) != 0 && Marshal.GetLastPInvokeError() != 22)
                throw Failure(path);
        }
        finally
        {
            _ = Close(descriptor);
        }
    }

    private static IOException Failure(string path)
    {
        int error = Marshal.GetLastPInvokeError();
        return new IOException($"{path}: {Marshal.GetPInvokeErrorMessage(error)}", error);
    }

    [LibraryImport("libc", EntryPoint = "open", SetLastError = true, StringMarshalling = StringMarshalling.Utf8)]
    private static partial int Open(string path, int flags);

    [LibraryImport("libc", EntryPoint = "fsync", SetLastError = true)]
    private static partial int Flush(int descriptor);

    [LibraryImport("libc", EntryPoint = "close", SetLastError = true)]
    private static partial int Close(int descriptor);
}
