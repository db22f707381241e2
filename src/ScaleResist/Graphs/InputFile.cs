// An input file opened for one pass: picks the form by the name's ending, unpacks gzip and Zstandard while streaming.
// Invariant: whatever the file system or an archive does wrong comes out as an InputException, and a truncated archive never
// passes for a whole one.

using System.IO.Compression;
using ZstdSharp;

namespace ScaleResist.Graphs;

/// <summary>The unpacked content of an input file, read forward once.</summary>
internal sealed class InputFile : IDisposable
{
    private static readonly string[] Forms = [".csv", ".tsv", ".txt", ".edges", ".mtx"];

    private const string Fetch = "fetch or make the file again";
    private readonly RawInput raw;
    private readonly Stream content;

    private InputFile(string path, string ending, string archive, RawInput raw)
    {
        Path = path;
        Ending = ending;
        Archive = archive;
        this.raw = raw;
        content = archive switch
        {
            ".gz" => new GZipStream(raw, CompressionMode.Decompress),
            ".zst" => new DecompressionStream(raw, checkEndOfStream: true, leaveOpen: false),
            _ => raw,
        };
    }

    /// <summary>The path as the user named it.</summary>
    public string Path { get; }

    /// <summary>The ending that names the form, lower case: <c>.csv .tsv .txt .edges .mtx</c>.</summary>
    public string Ending { get; }

    /// <summary><c>.gz</c>, <c>.zst</c> or empty.</summary>
    public string Archive { get; }

    /// <summary>Bytes on disk; complete at the end.</summary>
    public long Bytes => raw.Bytes;

    /// <summary>SHA-256 of the bytes on disk; call it at the end.</summary>
    public string Sha256 => raw.Sha256();

    /// <summary>Opens a file; throws <see cref="InputException"/> where that is not possible.</summary>
    public static InputFile Open(string path, Action<long>? bytesRead, CancellationToken ct)
    {
        string ending = System.IO.Path.GetExtension(path).ToLowerInvariant();
        string archive = ending is ".gz" or ".zst" ? ending : "";
        if (archive.Length > 0)
            ending = System.IO.Path.GetExtension(path[..^archive.Length]).ToLowerInvariant();
        if (Directory.Exists(path))
            throw new InputException(path, null, "is a folder, not a file", "name a file in it");
        if (Array.IndexOf(Forms, ending) < 0)
        {
            throw new InputException(path, null,
                $"the ending '{InputException.Show(ending + archive)}' names no form that can be read",
                "rename it to end in .csv, .tsv, .txt, .edges or .mtx, each also with .gz or .zst");
        }
        FileStream file = OpenStream(path, 0);
        return new InputFile(path, ending, archive, new RawInput(file, archive == ".gz", bytesRead, ct));
    }

    /// <summary>Opens a file stream; throws <see cref="InputException"/> where that is not possible.</summary>
    public static FileStream OpenStream(string path, int bufferSize)
    {
        try
        {
            return new FileStream(path, FileMode.Open, FileAccess.Read, FileShare.Read, bufferSize, FileOptions.SequentialScan);
        }
        catch (Exception e) when (e is FileNotFoundException or DirectoryNotFoundException)
        {
            throw new InputException(path, null, "there is no such file", "check the path", e);
        }
        catch (UnauthorizedAccessException e)
        {
            throw new InputException(path, null, "no permission to read the file", "ask for read permission (chmod +r)", e);
        }
        catch (Exception e) when (e is IOException or ArgumentException or NotSupportedException)
        {
            throw new InputException(path, null, $"cannot be opened ({e.Message})", "check the path", e);
        }
    }

    /// <summary>Reads unpacked bytes; 0 at the end.</summary>
    /// <param name="buffer">Where the bytes go.</param>
    /// <param name="line">The line that the bytes belong to, for errors.</param>
    public int Read(Span<byte> buffer, long line)
    {
        try
        {
            int count = content.Read(buffer);
            return Archive == ".gz" && (count == 0 || raw.AtEndMark) ? CheckEnd(buffer, count, line) : count;
        }
        catch (EndOfStreamException e)
        {
            throw Truncated(line, e);
        }
        catch (InvalidDataException e)
        {
            throw raw.AtEndMark ? Truncated(line, e) : Corrupted(line, "is corrupted", e);
        }
        catch (ZstdException e)
        {
            throw Corrupted(line, $"is corrupted ({e.Message})", e);
        }
        catch (IOException e)
        {
            throw new InputException(Path, line, $"cannot be read on ({e.Message})", "check the disk or network share", e);
        }
    }

    public void Dispose() => content.Dispose();

    // The decompressor asks for more input only when it has handed out everything before; so once the mark has been served,
    // what comes out is the mark, or the archive was cut off.
    private int CheckEnd(Span<byte> buffer, int count, long line)
    {
        if (!raw.AtEndMark)
            throw Corrupted(line, "is followed by bytes that are no gzip", null);
        Span<byte> tail = stackalloc byte[raw.EndMark.Length + 1];
        int length = Math.Min(count, tail.Length);
        buffer[..length].CopyTo(tail);
        int more;
        while (length < tail.Length && (more = content.Read(tail[length..])) > 0)
            length += more;
        return tail[..length].SequenceEqual(raw.EndMark) ? 0 : throw Truncated(line, null);
    }

    private InputException Truncated(long line, Exception? inner) =>
        new(Path, line, $"the {ArchiveName} archive is truncated", Fetch, inner);

    private InputException Corrupted(long line, string what, Exception? inner) =>
        new(Path, line, $"the {ArchiveName} archive {what}", Fetch, inner);

    private string ArchiveName => Archive == ".gz" ? "gzip" : "zstd";
}
