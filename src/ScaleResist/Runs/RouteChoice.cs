// Which blocks are treated exactly: all, where a factor is affordable, else all but the largest ones.
// Invariant: the choice depends on the network, the plan and the budgets alone, never on clocks, and is made before a number is computed.

using ScaleResist.Estimating;
using ScaleResist.Graphs;
using ScaleResist.Solving;

namespace ScaleResist.Runs;

/// <summary>The exact part of a run, ready to be factorised, or none.</summary>
internal sealed class RouteChoice
{
    private RouteChoice(bool[] probed) => Probed = probed;

    /// <summary>By block, whether it is left to the probes; a bridge never is.</summary>
    public bool[] Probed { get; }

    /// <summary>Whether nothing is left to the probes.</summary>
    public bool AllExact => !Probed.Contains(true);

    /// <summary>The exact part, or null where nothing but bridges is exact.</summary>
    public ExactPart? Part { get; private init; }

    /// <summary>Its Laplacian.</summary>
    public Laplacian? Laplacian { get; private init; }

    /// <summary>The structure of its factor.</summary>
    public SymbolicCholesky? Symbolic { get; private init; }

    /// <summary>What it will take.</summary>
    public ExactForecast? Forecast { get; private init; }

    /// <summary>Chooses.</summary>
    /// <exception cref="BudgetException">The exact route is asked for and does not fit.</exception>
    public static RouteChoice Of(Blocks blocks, EstimatePlan plan, CancellationToken cancel)
    {
        bool[] probed = new bool[blocks.Count];
        if (plan.Route == Route.Probe)
            return new RouteChoice(Unaffordable(blocks, probed, 1));
        ExactBudget budget = ExactBudget.Of(plan, blocks.Network);
        for (int most = int.MaxValue; ; most = LargestLeft(blocks, probed) / 2)
        {
            Unaffordable(blocks, probed, most);
            ExactPart part = new(blocks, probed);
            if (part.Ground == 0)
                return new RouteChoice(probed);
            Laplacian laplacian = part.BuildLaplacian();
            int[]? order = FillReducingOrder.Of(laplacian, budget.Limits, plan.Threads, cancel);
            ExactForecast? forecast = null;
            if (order is not null)
            {
                SymbolicCholesky symbolic = SymbolicCholesky.Of(laplacian, GroundLast(order, part.Ground));
                forecast = ExactForecast.Of(blocks.Network, symbolic, plan);
                if (budget.Holds(forecast))
                    return new RouteChoice(probed) { Part = part, Laplacian = laplacian, Symbolic = symbolic, Forecast = forecast };
            }
            if (plan.Route == Route.Exact)
                throw budget.Refusal(forecast);
        }
    }

    // Marks blocks of more than so many links.
    private static bool[] Unaffordable(Blocks blocks, bool[] probed, int most)
    {
        for (int b = 0; b < probed.Length; b++)
            probed[b] |= blocks.LinksOf(b) > most;
        return probed;
    }

    private static int LargestLeft(Blocks blocks, bool[] probed)
    {
        int largest = 0;
        for (int b = 0; b < probed.Length; b++)
            largest = probed[b] ? largest : Math.Max(largest, blocks.LinksOf(b));
        return largest;
    }

    // Without the ground's row the rest of an order fills in no more than with it.
    internal static int[] GroundLast(int[] order, int ground)
    {
        int at = Array.IndexOf(order, ground);
        Array.Copy(order, at + 1, order, at, order.Length - at - 1);
        order[^1] = ground;
        return order;
    }
}
