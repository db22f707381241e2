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

    /// <summary>Adds <paramref name="width"/> columns over the same <paramref name="below"/> rows: lengths below + width, ..., below + 1.</summary>
    public void Add(int width, int below)
    {
        double w = width, d = below;
        Entries += ((long)width * below) + ((long)width * (width + 1) / 2);
        Operations += (w * d * d) + (d * w * (w + 1)) + (w * (w + 1) * ((2 * w) + 1) / 6);
    }

    /// <summary>
    /// Whether what is still to come must exceed the limits: a clique, and <paramref name="nodes"/> nodes in all that have at least as
    /// many neighbours by now. Their links, nodes x clique / 2 at least, are entries all, and the squares of N column lengths come to
    /// (their sum)^2 / N or more.
    /// </summary>
    public readonly bool Exceed(OrderLimits limits, int nodes, int clique)
    {
        ColumnCosts all = this;
        all.Add(clique, 0);
        double links = 0.5 * nodes * clique;
        return all.Entries > limits.Entries || Entries + links > limits.Entries
            || all.Operations > limits.Operations || Operations + (links * clique / 2) > limits.Operations;
    }
}
