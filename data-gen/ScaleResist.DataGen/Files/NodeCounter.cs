// Counts the nodes that have a link, one bit a node.

using System.Numerics;
using ScaleResist.DataGen.Networks;

namespace ScaleResist.DataGen.Files;

internal sealed class NodeCounter(long range) : ILinkSink
{
    private readonly ulong[] seen = new ulong[(range + 63) / 64];

    public ILinkSink? Next { get; set; }

    public long Count => seen.Sum(word => (long)BitOperations.PopCount(word));

    public void Link(long source, long target, double conductance)
    {
        seen[source >> 6] |= 1UL << (int)(source & 63);
        seen[target >> 6] |= 1UL << (int)(target & 63);
        Next!.Link(source, target, conductance);
    }
}
