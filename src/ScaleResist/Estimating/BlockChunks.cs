// How the blocks are shared out among threads: fixed pieces of similar size, summed in order.
// Invariant: the pieces depend on the network alone, so sums do not depend on threads.

using ScaleResist.Graphs;

namespace ScaleResist.Estimating;

/// <summary>The blocks <c>First .. End-1</c> as a whole, or, where Pieces is more than 1, the members <c>From .. To-1</c> of the block First.</summary>
internal readonly record struct BlockChunk(int First, int End, int Pieces, int From, int To);

/// <summary>Chunks of the components that several threads share, and runs of small components that one thread takes whole.</summary>
internal sealed class BlockChunks
{
    private const int MembersPerChunk = 1 << 12;

    /// <summary>Cuts up the blocks of a network.</summary>
    public BlockChunks(Blocks blocks)
    {
        IReadOnlyList<Component> components = blocks.Network.Components;
        List<BlockChunk[]> shared = [];
        while (shared.Count < components.Count && components[shared.Count].Nodes > MembersPerChunk)
            shared.Add([.. Of(blocks, shared.Count)]);
        OfShared = [.. shared];
        List<(int First, int End)> small = [];
        for (int c = shared.Count; c < components.Count && components[c].Nodes > 1;)
        {
            int start = c, size = 0;
            while (c < components.Count && components[c].Nodes > 1 && size < MembersPerChunk)
                size += components[c++].Nodes;
            small.Add((start, c));
        }
        SmallComponents = [.. small];
    }

    /// <summary>Chunks of each of the first components, which are the largest.</summary>
    public BlockChunk[][] OfShared { get; }

    /// <summary>Runs of the other components but single nodes.</summary>
    public (int First, int End)[] SmallComponents { get; }

    private static IEnumerable<BlockChunk> Of(Blocks blocks, int component)
    {
        (int first, int end) = blocks.OfComponent(component);
        for (int b = first; b < end;)
        {
            int size = blocks.NodesOf(b) - 1, start = b++;
            if (size > MembersPerChunk)
            {
                int pieces = (size + MembersPerChunk - 1) / MembersPerChunk;
                for (int i = 0; i < pieces; i++)
                    yield return new BlockChunk(start, b, pieces, i * MembersPerChunk, Math.Min(size, (i + 1) * MembersPerChunk));
                continue;
            }
            while (b < end && size + blocks.NodesOf(b) - 1 <= MembersPerChunk)
                size += blocks.NodesOf(b++) - 1;
            yield return new BlockChunk(start, b, 1, 0, 0);
        }
    }
}
