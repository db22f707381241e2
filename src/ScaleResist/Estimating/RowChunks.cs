// Ranges of nodes of about equal work, for passes that several threads share.
// Invariant: the ranges depend on the network alone, so sums by range do not depend on the number of threads.

using ScaleResist.Graphs;

namespace ScaleResist.Estimating;

/// <summary>Consecutive ranges of nodes that together cover the network.</summary>
internal static class RowChunks
{
    private const long WorkPerChunk = 1 << 18;

    /// <summary>Ranges of about 2^18 arcs and nodes together.</summary>
    public static List<(int Start, int End)> Of(Network network)
    {
        List<(int, int)> chunks = [];
        int start = 0;
        while (start < network.NodeCount)
        {
            int end = start;
            long limit = network.RowStart[start] + start + WorkPerChunk;
            while (end < network.NodeCount && (end == start || network.RowStart[end + 1] + end + 1 <= limit))
                end++;
            chunks.Add((start, end));
            start = end;
        }
        return chunks;
    }
}
