// Nested dissection of a grid by its coordinates (George 1973), for tests of what follows an order.

using ScaleResist.Graphs;

namespace ScaleResist.Tests.Solving;

internal static class DissectedGrid
{
    /// <summary>An order of elimination of a side x side grid or torus with labels row * side + column.</summary>
    public static int[] Order(Network network, int side, bool closed = false)
    {
        List<long> labels = [];
        int low = closed ? 1 : 0;
        Stack<(int Left, int Right, int Top, int Bottom, bool Halved)> open = new([(low, side, low, side, false)]);
        while (open.TryPop(out (int Left, int Right, int Top, int Bottom, bool Halved) box))
        {
            (int left, int right, int top, int bottom, bool halved) = box;
            bool wide = right - left >= bottom - top;
            int middle = wide ? (left + right) / 2 : (top + bottom) / 2;
            if (right - left <= 0 || bottom - top <= 0)
                continue;
            if ((right - left) * (bottom - top) <= 4)
                Box(left, right, top, bottom);
            else if (halved && wide)
                Box(middle, middle + 1, top, bottom);
            else if (halved)
                Box(left, right, middle, middle + 1);
            else
            {
                open.Push(box with { Halved = true });
                open.Push(wide ? (middle + 1, right, top, bottom, false) : (left, right, middle + 1, bottom, false));
                open.Push(wide ? (left, middle, top, bottom, false) : (left, right, top, middle, false));
            }
        }
        if (closed)
        {
            Box(0, side, 0, 1);
            Box(0, 1, 1, side);
        }
        return [.. labels.Select(network.Node)];

        void Box(int left, int right, int top, int bottom)
        {
            for (int row = top; row < bottom; row++)
            {
                for (int column = left; column < right; column++)
                    labels.Add(((long)row * side) + column);
            }
        }
    }
}
