// What the exact route will take, from the counts of the symbolic analysis, and what it may take.
// The rates are those of one processor (bench/results/exact.md); a forecast within a factor of two is what they are for.

using System.Globalization;
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
    internal const double SecondsPerOperation = 2.9e-11; // on two threads
    internal const double SecondsPerEntry = 20e-9;
    private const double SecondsPerEntryWithLosses = 50e-9;
    private const double FixedSeconds = 0.48; // the first rows of every table: most of a small run
    private const double SecondsPerNode = 0.4e-6;
    private const double SecondsPerLink = 0.1e-6;
    private const double BaseBytes = 75e6; // the runtime
    private const double BytesPerNode = 300; // blocks, labels and rows on their way to the tables
    private const double BytesPerLink = 120;

    internal static ExactForecast Of(Network network, SymbolicCholesky symbolic, EstimatePlan plan)
    {
        // The loss of links: slopes of the factor and of the inverse, each twice the work of what they belong to.
        bool losses = plan.Want.HasFlag(Want.Links);
        double operations = ((double)symbolic.Operations + symbolic.InversionOperations) * (losses ? 3 : 1);
        double seconds = FixedSeconds + (network.NodeCount * SecondsPerNode) + (network.LinkCount * SecondsPerLink)
            + (symbolic.StoredEntries * (losses ? SecondsPerEntryWithLosses : SecondsPerEntry)) + (operations * SecondsPerOperation) + RunCost.WritingSeconds(network, plan);
        double bytes = BaseBytes + RunCost.NetworkBytes(network) + (network.NodeCount * BytesPerNode)
            + (network.LinkCount * BytesPerLink) + symbolic.PeakBytes(plan.Threads, losses);
        return new ExactForecast(symbolic.Entries, operations, seconds, (long)bytes);
    }
}

/// <summary>Bounds of the exact route.</summary>
/// <param name="Seconds">Time it may be foreseen to take.</param>
/// <param name="Bytes">Memory it may be foreseen to need.</param>
internal sealed record ExactBudget(double Seconds, double Bytes)
{
    private const double ShareOfMemory = 0.75;

    /// <summary>Bounds on the order that are worth no closer look.</summary>
    public OrderLimits Limits { get; private init; }

    // The search for an order that does not exist costs the more the more entries are allowed: for large networks so many a node.
    private static double WorthOrdering(Network network) => Math.Max(5e7, 100.0 * network.NodeCount);

    public static ExactBudget Of(EstimatePlan plan, Network network)
    {
        double seconds = Math.Min(
            plan.TimeBudget?.TotalSeconds ?? double.PositiveInfinity, plan.Route == Route.Exact ? double.PositiveInfinity : plan.AffordableSeconds);
        double bytes = plan.MemoryBudget ?? (ShareOfMemory * GC.GetGCMemoryInfo().TotalAvailableMemoryBytes);
        double room = Math.Max(0, bytes - RunCost.NetworkBytes(network));
        return new ExactBudget(seconds, bytes)
        {
            // A factor of so many entries takes 8 bytes each; 2 of its operations count as one squared length.
            Limits = new OrderLimits(
                (long)Math.Min(Math.Min(room / 8, seconds / ExactForecast.SecondsPerEntry), plan.Route == Route.Exact ? double.MaxValue : WorthOrdering(network)),
                seconds / ExactForecast.SecondsPerOperation),
        };
    }

    public bool Holds(ExactForecast forecast) => forecast.Seconds <= Seconds && forecast.Bytes <= Bytes;

    /// <summary>Says why the exact route is refused, with the figures.</summary>
    public BudgetException Refusal(ExactForecast? forecast)
    {
        CultureInfo plain = CultureInfo.InvariantCulture;
        string wants = forecast is null
            ? string.Create(plain, $"a factor of more than {Limits.Entries:N0} entries or {Limits.Operations * 2 / 1e9:N0} Gflop")
            : string.Create(plain, $"about {forecast.Seconds:N0} s and {forecast.Bytes / 1e9:0.0} GB ({forecast.Entries:N0} entries)");
        string has = double.IsInfinity(Seconds)
            ? string.Create(plain, $"{Bytes / 1e9:0.0} GB")
            : string.Create(plain, $"{Seconds:N0} s and {Bytes / 1e9:0.0} GB");
        return new BudgetException(
            $"the exact route would take {wants}, and the budget is {has}; use --route probe, or a larger --time-budget or --memory-budget");
    }
}
