// Doubles outside the managed heap, for factors and fronts: more than an array holds, at a fixed address.
// Invariant: the address stays fixed and 64-byte aligned until it is disposed of; the memory starts undefined.

using System.Runtime.InteropServices;

namespace ScaleResist.Kernels;

/// <summary>A block of doubles, large pages where Linux grants them.</summary>
internal sealed unsafe class NativeDoubles : SafeHandle
{
    private const nuint HugePage = 2 << 20;

    /// <summary>An undefined block.</summary>
    public NativeDoubles(long length)
        : base(0, ownsHandle: true)
    {
        Length = length;
        nuint bytes = (nuint)Math.Max(length, 8) * sizeof(double);
        bool large = bytes >= 4 * HugePage;
        void* memory = NativeMemory.AlignedAlloc(bytes, large ? HugePage : 64);
        if (large && OperatingSystem.IsLinux())
            LargePages.Ask(memory, bytes);
        SetHandle((nint)memory);
        GC.AddMemoryPressure((long)bytes);
    }

    /// <summary>The number of doubles.</summary>
    public long Length { get; }

    /// <summary>The first of them.</summary>
    public double* Pointer => (double*)handle;

    /// <inheritdoc/>
    public override bool IsInvalid => handle == 0;

    /// <inheritdoc/>
    protected override bool ReleaseHandle()
    {
        NativeMemory.AlignedFree((void*)handle);
        GC.RemoveMemoryPressure(Math.Max(Length, 8) * sizeof(double));
        return true;
    }
}
