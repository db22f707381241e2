// Two stacks of doubles for the blocks of fronts, by the parity of their depth. Invariant: blocks are popped in reverse order of their pushes.

using ScaleResist.Kernels;

namespace ScaleResist.Solving;

/// <summary>Room for one pass over fronts.</summary>
internal sealed unsafe class FrontStacks(FrontSpace space) : IDisposable
{
    private readonly NativeDoubles even = new(space.Even), odd = new(space.Odd);
    private long evenTop, oddTop;

    /// <summary>An undefined block.</summary>
    public double* Push(bool onOdd, long doubles)
    {
        ref long top = ref onOdd ? ref oddTop : ref evenTop;
        NativeDoubles stack = onOdd ? odd : even;
        double* block = stack.Pointer + top;
        top += doubles;
        return top <= Math.Max(stack.Length, 8) ? block : throw new InvalidOperationException("A stack of fronts was foreseen too small.");
    }

    /// <summary>Gives the last block back.</summary>
    public void Pop(bool onOdd, long doubles)
    {
        ref long top = ref onOdd ? ref oddTop : ref evenTop;
        top -= doubles;
    }

    /// <inheritdoc/>
    public void Dispose()
    {
        even.Dispose();
        odd.Dispose();
    }
}
