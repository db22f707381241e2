// Numbers of columns as types: the compiler makes one body of a register tile per number, and the tests on Count vanish.

namespace ScaleResist.Kernels;

/// <summary>One to eight columns.</summary>
internal interface IColumns
{
    /// <summary>The number.</summary>
    static abstract int Count { get; }
}

internal readonly struct Columns1 : IColumns
{
    public static int Count => 1;
}

internal readonly struct Columns2 : IColumns
{
    public static int Count => 2;
}

internal readonly struct Columns3 : IColumns
{
    public static int Count => 3;
}

internal readonly struct Columns4 : IColumns
{
    public static int Count => 4;
}

internal readonly struct Columns5 : IColumns
{
    public static int Count => 5;
}

internal readonly struct Columns6 : IColumns
{
    public static int Count => 6;
}

internal readonly struct Columns7 : IColumns
{
    public static int Count => 7;
}

internal readonly struct Columns8 : IColumns
{
    public static int Count => 8;
}
