// A file that appears complete or not at all: written as FILE.partial beside its place, flushed to disk, then renamed.
// Invariant: after Dispose without Commit neither name holds anything of ours.

namespace ScaleResist.DataGen.Files;

/// <summary>An output file in the making.</summary>
internal sealed class PartialFile : IDisposable
{
    private readonly string path;
    private readonly string partial;
    private readonly FileStream stream;
    private bool committed;

    /// <exception cref="IOException">The file cannot be made there.</exception>
    /// <exception cref="UnauthorizedAccessException">There is no permission to.</exception>
    public PartialFile(string path)
    {
        if (Directory.Exists(path))
            throw new IOException($"{path} is a folder.");
        this.path = path;
        partial = path + ".partial";
        stream = new FileStream(partial, FileMode.Create, FileAccess.Write, FileShare.None, bufferSize: 0);
    }

    public Stream Stream => stream;

    /// <summary>Gives the file its name, in place of any before it.</summary>
    /// <returns>Its size in bytes.</returns>
    public long Commit()
    {
        stream.Flush(flushToDisk: true);
        long bytes = stream.Length;
        stream.Dispose();
        File.Move(partial, path, overwrite: true);
        committed = true;
        return bytes;
    }

    public void Dispose()
    {
        if (committed)
            return;
        stream.Dispose();
        File.Delete(partial);
    }
}
