// A folder of files for one test, gone at its end.
// Invariant: what is written is packed as the file's name says.

using System.IO.Compression;
using System.Text;
using ZstdSharp;

namespace ScaleResist.Tests.Graphs;

internal sealed class ScratchFolder : IDisposable
{
    private readonly string folder = Directory.CreateTempSubdirectory("scaleresist-").FullName;

    public string Path(string name) => System.IO.Path.Combine(folder, name);

    /// <summary>Writes text as UTF-8, packed where the name ends in .gz or .zst.</summary>
    public string Write(string name, string text) => WriteRaw(name, Pack(name, Encoding.UTF8.GetBytes(text)));

    public string WriteRaw(string name, byte[] bytes)
    {
        File.WriteAllBytes(Path(name), bytes);
        return Path(name);
    }

    public static byte[] Pack(string name, byte[] bytes)
    {
        if (name.EndsWith(".gz", StringComparison.Ordinal))
        {
            using MemoryStream packed = new();
            using (GZipStream gzip = new(packed, CompressionLevel.Fastest))
                gzip.Write(bytes);
            return packed.ToArray();
        }
        if (!name.EndsWith(".zst", StringComparison.Ordinal))
            return bytes;
        using Compressor compressor = new();
        compressor.SetParameter(ZstdSharp.Unsafe.ZSTD_cParameter.ZSTD_c_checksumFlag, 1);
        return compressor.Wrap(bytes).ToArray();
    }

    public void Dispose() => Directory.Delete(folder, recursive: true);
}
