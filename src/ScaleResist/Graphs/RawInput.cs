// The bytes of an input file as they lie on disk: counted, hashed and reported while they stream past, never read twice.
// Invariant: at the end of the stream every byte of the file has gone through the hash exactly once.

using System.IO.Compression;
using System.Security.Cryptography;

namespace ScaleResist.Graphs;

/// <summary>
/// A forward-only stream over a file. For gzip it appends one more archive member with a random content, the end mark:
/// the platform's gzip reader takes a truncated archive for a finished one, but only a whole archive leads it to the mark.
/// </summary>
internal sealed class RawInput(FileStream file, bool withEndMark, Action<long>? bytesRead, CancellationToken ct) : Stream
{
    private readonly IncrementalHash hash = IncrementalHash.CreateHash(HashAlgorithmName.SHA256);
    private readonly byte[] mark = withEndMark ? Guid.NewGuid().ToByteArray() : [];
    private byte[]? markMember;
    private int markAt;
    private string? digest;

    /// <summary>Bytes of the file read so far.</summary>
    public long Bytes { get; private set; }

    /// <summary>What the decompressed end mark holds.</summary>
    public ReadOnlySpan<byte> EndMark => mark;

    /// <summary>Whether the file is read to its end and the reader has asked for more.</summary>
    public bool AtEndMark => markMember is not null;

    /// <summary>SHA-256 of the whole file in lower-case hexadecimal; call it at the end.</summary>
    public string Sha256() => digest ??= Convert.ToHexStringLower(hash.GetHashAndReset());

    public override int Read(Span<byte> buffer)
    {
        ct.ThrowIfCancellationRequested();
        if (buffer.Length == 0)
            return 0;
        int count = markMember is null ? file.Read(buffer) : 0;
        if (count > 0)
        {
            hash.AppendData(buffer[..count]);
            Bytes += count;
            bytesRead?.Invoke(Bytes);
            return count;
        }
        markMember ??= withEndMark ? Compress(mark) : [];
        count = Math.Min(buffer.Length, markMember.Length - markAt);
        markMember.AsSpan(markAt, count).CopyTo(buffer);
        markAt += count;
        return count;
    }

    public override int Read(byte[] buffer, int offset, int count) => Read(buffer.AsSpan(offset, count));

    private static byte[] Compress(byte[] content)
    {
        using MemoryStream archive = new();
        using (GZipStream gzip = new(archive, CompressionLevel.NoCompression))
            gzip.Write(content);
        return archive.ToArray();
    }

    protected override void Dispose(bool disposing)
    {
        if (disposing)
        {
            file.Dispose();
            hash.Dispose();
        }
        base.Dispose(disposing);
    }

    public override bool CanRead => true;

    public override bool CanSeek => false;

    public override bool CanWrite => false;

    public override long Length => throw new NotSupportedException();

    public override long Position
    {
        get => throw new NotSupportedException();
        set => throw new NotSupportedException();
    }

    public override void Flush()
    {
    }

    public override long Seek(long offset, SeekOrigin origin) => throw new NotSupportedException();

    public override void SetLength(long value) => throw new NotSupportedException();

    public override void Write(byte[] buffer, int offset, int count) => throw new NotSupportedException();
}
