// Memory of a panel: one 64-byte row a node (16 floats or 8 doubles), aligned so that a row is one cache line.
// Invariant: the memory is zero when new, and its address stays fixed until it is disposed of.

using System.Runtime.InteropServices;

namespace ScaleResist.Kernels;

/// <summary>
/// n x W values, row-major, W = 64 bytes / size of T; column j of all rows is the j-th vector of a block of right-hand sides.
/// </summary>
/// <typeparam name="T"><see cref="float"/> or <see cref="double"/>.</typeparam>
public sealed unsafe class Panel<T> : SafeHandle
    where T : unmanaged
{
    /// <summary>The number of columns W.</summary>
    public static readonly int Width = 64 / sizeof(T);

    private const nuint HugePage = 2 << 20;

    /// <summary>A panel of zeros.</summary>
    /// <param name="rows">The number of nodes.</param>
    public Panel(int rows)
        : base(0, ownsHandle: true)
    {
        Rows = rows;
        nuint bytes = Math.Max((nuint)rows, 1) * 64;
        bool large = bytes >= 4 * HugePage;
        void* memory = NativeMemory.AlignedAlloc(bytes, large ? HugePage : 64);
        if (large && OperatingSystem.IsLinux())
            LargePages.Ask(memory, bytes);
        NativeMemory.Clear(memory, bytes);
        SetHandle((nint)memory);
        GC.AddMemoryPressure((long)bytes);
    }

    /// <summary>The number of nodes.</summary>
    public int Rows { get; }

    /// <summary>The first value of the first row.</summary>
    public T* Pointer => (T*)handle;

    /// <inheritdoc/>
    public override bool IsInvalid => handle == 0;

    /// <summary>The W values of a node.</summary>
    public Span<T> Row(int node) => new(Pointer + ((long)node * Width), Width);

    /// <inheritdoc/>
    protected override bool ReleaseHandle()
    {
        NativeMemory.AlignedFree((void*)handle);
        GC.RemoveMemoryPressure(Math.Max(Rows, 1) * 64L);
        return true;
    }
}

/// <summary>
/// Asks Linux for large pages, so that gathers miss the translation cache less. A hint: a refusal costs speed alone.
/// </summary>
internal static unsafe partial class LargePages
{
    private const int Advice = 14; // MADV_HUGEPAGE

    public static void Ask(void* address, nuint bytes) => _ = AdviseMemory(address, bytes, Advice);

    [LibraryImport("libc", EntryPoint = "madvise")]
    private static partial int AdviseMemory(void* address, nuint length, int advice);
}
