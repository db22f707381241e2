// An append-only list in blocks: growing never copies, so the peak is the content and not twice the content.

namespace ScaleResist.Graphs;

/// <summary>An append-only sequence of values, kept in blocks of 2^20.</summary>
/// <typeparam name="T">The value type.</typeparam>
public sealed class AppendBuffer<T>
    where T : unmanaged
{
    private const int BlockBits = 20;
    private const int BlockSize = 1 << BlockBits;
    private readonly List<T[]> blocks = [];
    private T[] tail = [];
    private int tailCount;

    /// <summary>How many values were added.</summary>
    public long Count => blocks.Count == 0 ? 0 : ((long)(blocks.Count - 1) << BlockBits) + tailCount;

    /// <summary>The number of blocks that <see cref="Block"/> serves.</summary>
    public int BlockCount => blocks.Count;

    /// <summary>The value at an index.</summary>
    public ref T this[long index] => ref blocks[(int)(index >> BlockBits)][(int)(index & (BlockSize - 1))];

    /// <summary>Adds a value at the end.</summary>
    public void Add(T value)
    {
        if (tailCount == tail.Length || blocks.Count == 0)
            Grow();
        tail[tailCount++] = value;
    }

    /// <summary>The filled part of a block.</summary>
    public Span<T> Block(int number) =>
        number == blocks.Count - 1 ? blocks[number].AsSpan(0, tailCount) : blocks[number].AsSpan();

    private void Grow()
    {
        if (blocks.Count == 0)
        {
            // The first block starts small and doubles, so that a small file costs little.
            tail = new T[1024];
            blocks.Add(tail);
        }
        else if (tail.Length < BlockSize)
        {
            Array.Resize(ref tail, tail.Length * 2);
            blocks[^1] = tail;
        }
        else
        {
            tail = new T[BlockSize];
            blocks.Add(tail);
            tailCount = 0;
        }
    }
}
