// Generates a network into a file of any form. Invariant: the form never changes which links there are, nor their conductances.

using System.IO.Compression;
using ScaleResist.DataGen.Networks;
using ZstdSharp;

namespace ScaleResist.DataGen.Files;

/// <summary>What was written: ids below <paramref name="IdRange"/>, of which <paramref name="Nodes"/> have a link.</summary>
internal readonly record struct WrittenFile(long IdRange, long Nodes, long Links, long Bytes);

internal static class LinkFile
{
    private const int ZstandardLevel = 3;

    /// <exception cref="OperationCanceledException">Cancelled; nothing is left behind.</exception>
    /// <exception cref="IOException">It cannot be written; nothing is left behind.</exception>
    /// <exception cref="UnauthorizedAccessException">There is no permission to write it.</exception>
    public static WrittenFile Write(FamilyPlan plan, LinkForm form, string path, CancellationToken cancel)
    {
        if (!plan.TrySize(out NetworkSize size, out string? problem))
            throw new ArgumentException(problem, nameof(plan));
        using PartialFile file = new(path);
        // Only a power law leaves numbers without a link.
        NodeCounter? counter = plan.Family == Family.PowerLaw ? new NodeCounter(size.Nodes) : null;
        bool weighted = plan.Decades > 0;
        if (form.Layout == LinkLayout.Parquet)
        {
            using ParquetLinkSink sink = new(file.Stream, weighted);
            Generate(plan, sink, counter, cancel);
            sink.Finish();
        }
        else
        {
            using Stream? packed = Pack(file.Stream, form.Packing);
            TextLinkSink sink = new(packed ?? file.Stream, form.Layout, weighted);
            sink.Header(plan, size);
            Generate(plan, sink, counter, cancel);
            sink.Flush();
        }
        return new WrittenFile(size.Nodes, counter?.Count ?? size.Nodes, size.Links, file.Commit());
    }

    private static void Generate(FamilyPlan plan, ILinkSink sink, NodeCounter? counter, CancellationToken cancel)
    {
        if (counter is not null)
        {
            counter.Next = sink;
            sink = counter;
        }
        NetworkGenerator.Generate(plan, sink, cancel);
    }

    private static Stream? Pack(Stream stream, LinkPacking packing) => packing switch
    {
        LinkPacking.Gzip => new GZipStream(stream, CompressionLevel.Fastest, leaveOpen: true),
        LinkPacking.Zstandard => new CompressionStream(stream, ZstandardLevel, leaveOpen: true),
        _ => null,
    };
}
