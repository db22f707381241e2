// Sixteen columns in doubles, as many as a panel of floats has: two panels of eight, side by side.

using System.Runtime.InteropServices;

namespace ScaleResist.Kernels;

/// <summary>n x 16 doubles: columns 0 to 7 in the first panel, 8 to 15 in the second.</summary>
/// <param name="rows">The number of nodes.</param>
public sealed class PanelPair(int rows) : IDisposable
{
    /// <summary>Columns of a pair.</summary>
    public const int Width = 16;

    /// <summary>Columns of each half.</summary>
    public const int Half = 8;

    /// <summary>Columns 0 to 7.</summary>
    public Panel<double> First { get; } = new(rows);

    /// <summary>Columns 8 to 15.</summary>
    public Panel<double> Second { get; } = new(rows);

    /// <summary>The number of nodes.</summary>
    public int Rows => First.Rows;

    /// <summary>The panel of columns 8 half to 8 half + 7.</summary>
    public Panel<double> this[int half] => half == 0 ? First : Second;

    /// <summary>One value.</summary>
    public ref double At(int node, int column) => ref this[column / Half].Row(node)[column % Half];

    /// <summary>Sets rows to zero.</summary>
    public unsafe void Clear(int start, int end)
    {
        foreach (Panel<double> half in (ReadOnlySpan<Panel<double>>)[First, Second])
            NativeMemory.Clear(half.Pointer + ((long)start * Half), (nuint)(end - start) * 64);
    }

    /// <inheritdoc/>
    public void Dispose()
    {
        First.Dispose();
        Second.Dispose();
    }
}
