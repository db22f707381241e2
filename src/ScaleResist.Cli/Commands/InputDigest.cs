// SHA-256 of an input without reading it as a network: how a finished run is known again.

using System.Security.Cryptography;
using ScaleResist.Graphs;

namespace ScaleResist.Cli.Commands;

/// <summary>Digests of input files.</summary>
internal static class InputDigest
{
    /// <summary>
    /// SHA-256 in lower-case hexadecimal of a file's bytes; of a folder, over its <c>.parquet</c> parts in order of their names.
    /// </summary>
    /// <exception cref="InputException">The file cannot be read.</exception>
    public static string Sha256(string path, CancellationToken interrupted)
    {
        try
        {
            using IncrementalHash hash = IncrementalHash.CreateHash(HashAlgorithmName.SHA256);
            byte[] buffer = new byte[1 << 20];
            foreach (string part in Parts(path))
            {
                using FileStream file = new(part, FileMode.Open, FileAccess.Read, FileShare.Read, bufferSize: 0);
                for (int read; (read = file.Read(buffer)) > 0;)
                {
                    interrupted.ThrowIfCancellationRequested();
                    hash.AppendData(buffer, 0, read);
                }
            }
            return Convert.ToHexStringLower(hash.GetHashAndReset());
        }
        catch (Exception error) when (error is FileNotFoundException or DirectoryNotFoundException)
        {
            throw new InputException(path, null, "no such file", "check the path", error);
        }
        catch (Exception error) when (error is IOException or UnauthorizedAccessException)
        {
            throw new InputException(
                path, null, $"cannot be read ({error.Message.TrimEnd('.')})", "check its permissions", error);
        }
    }

    // The same parts, in the same order, as the Parquet reader takes.
    private static IEnumerable<string> Parts(string path) => Directory.Exists(path)
        ? Directory.EnumerateFiles(path)
            .Where(file => file.EndsWith(".parquet", StringComparison.OrdinalIgnoreCase)
                && Path.GetFileName(file)[0] is not ('_' or '.'))
            .Order(StringComparer.Ordinal)
        : [path];
}
