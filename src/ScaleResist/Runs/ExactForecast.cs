// What the exact route will take, from the counts of the symbolic analysis, and what it may take.
// The rates are those of one processor (bench/results/exact.md); a forecast within a factor of two is what they are for.

using ScaleResist.Graphs;
using ScaleResist.Solving;

namespace ScaleResist.Runs;

/// <summary>Time and memory foreseen for an exact run, of reading and building nothing but the network's own memory.</summary>
/// <param name="Entries">Entries of the factor.</param>
/// <param name="Operations">Floating-point operations of factorisation and selected inversion.</param>
/// <param name="Seconds">Of the whole run after reading.</param>
/// <param name="Bytes">Peak resident memory.</param>
public sealed record ExactForecast(long Entries, double Operations, double Seconds, long Bytes)
{
    internal const double SecondsPerOperation = 1 / 6e9;
    internal const double SecondsPerEntry = 60e-9;
    internal const double SecondsPerRow = 1e-6; // written
    internal const double BaseBytes = 150e6;

    internal static ExactForecast Of(Network network, SymbolicCholesky symbolic, EstimatePlan plan)
    {
        double operations = (double)symbolic.Operations + symbolic.InversionOperations;
        double rows = (plan.Want.HasFlag(Want.Links) ? network.LinkCount : 0) + (plan.Want.HasFlag(Want.Nodes) ? network.NodeCount : 0);
        double seconds = (operations * SecondsPerOperation) + (symbolic.StoredEntries * SecondsPerEntry) + (rows * SecondsPerRow);
        double bytes = BaseBytes + NetworkBytes(network) + symbolic.PeakBytes;
        return new ExactForecast(symbolic.Entries, operations, seconds, (long)bytes);
    }

    internal static double NetworkBytes(Network network) =>
        (2.0 * network.LinkCount * (network.Conductances is null ? 4 : 12)) + (80.0 * network.NodeCount);
}

/// <summary>Bounds of the exact route.</summary>
/// <param name="Seconds">Time it may be foreseen to take.</param>
/// <param name="Bytes">Memory it may be foreseen to need.</param>
internal sealed record ExactBudget(double Seconds, double Bytes)
{
    // Where nobody names a budget, the automatic route takes the truth for up to two minutes.
    private const double AffordableSeconds = 120;
    private const double ShareOfMemory = 0.75;

    /// <summary>Bounds on the order that are worth no closer look.</summary>
    public OrderLimits Limits { get; private init; }

    public static ExactBudget Of(EstimatePlan plan, Network network)
    {
        double seconds = plan.TimeBudget?.TotalSeconds ?? (plan.Route == Route.Exact ? double.PositiveInfinity : AffordableSeconds);
        double bytes = plan.MemoryBudget ?? (ShareOfMemory * GC.GetGCMemoryInfo().TotalAvailableMemoryBytes);
        double room = Math.Max(0, bytes - ExactForecast.NetworkBytes(network));
        return new ExactBudget(seconds, bytes)
        {
            // A factor of so many entries takes 8 bytes each; 2 of its operations count as one squared length.
            Limits = new OrderLimits((long)Math.Min(room / 8, seconds / ExactForecast.SecondsPerEntry),
                seconds / ExactForecast.SecondsPerOperation),
        };
    }

    public bool Holds(ExactForecast forecast) => forecast.Seconds <= Seconds && forecast.Bytes <= Bytes;

    public BudgetException Refusal(ExactForecast? forecast) => throw new NotImplementedException();
}
