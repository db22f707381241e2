// What a factor may cost before the search for its order is given up.

namespace ScaleResist.Solving;

/// <summary>Bounds on a factor: entries with the diagonal, and operations as the sum of its squared column lengths.</summary>
internal readonly record struct OrderLimits(long Entries, double Operations)
{
    /// <summary>No bound.</summary>
    public static OrderLimits None => new(long.MaxValue, double.PositiveInfinity);
}

/// <summary>The cost of the columns eliminated so far.</summary>
internal struct ColumnCosts
{
    /// <summary>Entries, the diagonal included.</summary>
    public long Entries;

    /// <summary>Sum of squared column lengths.</summary>
    public double Operations;

    /// <summary>Adds <paramref name="width"/> columns that end in the same <paramref name="below"/> rows: lengths below + width, ..., below + 1.</summary>
    public void Add(int width, int below)
    {
        double w = width, d = below;
        Entries += ((long)width * below) + ((long)width * (width + 1) / 2);
        Operations += (w * d * d) + (d * w * (w + 1)) + (w * (w + 1) * ((2 * w) + 1) / 6);
    }

    /// <summary>Whether these and a clique of so many nodes that is still to come are over the limits.</summary>
    public readonly bool Exceed(OrderLimits limits, int clique)
    {
        ColumnCosts bound = this;
        bound.Add(clique, 0);
        return bound.Entries > limits.Entries || bound.Operations > limits.Operations;
    }
}
