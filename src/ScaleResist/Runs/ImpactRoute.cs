// How an impact run finds columns of L+: by one factor of the whole network where that is affordable, else by the iterative solver, the index
// before then by probes.
// Invariant: the choice depends on network, plan and budgets alone, and is made before a number is computed.

using System.Globalization;
using ScaleResist.Estimating;
using ScaleResist.Graphs;
using ScaleResist.Solving;

namespace ScaleResist.Runs;

/// <summary>Columns, and the totals of every component.</summary>
internal sealed class ImpactRoute : IDisposable
{
    private const double SecondsPerEntryOfColumn = 0.7e-9; // of one thread's substitution, by entry of the factor
    private const double SecondsPerNodeOfColumn = 5e-9;

    private ImpactRoute(Potentials potentials, WeightedTotals[] totals)
    {
        Potentials = potentials;
        Totals = totals;
    }

    public Potentials Potentials { get; }

    /// <summary>By number of nodes, and by node weight where there is one.</summary>
    public WeightedTotals[] Totals { get; }

    public ExactForecast? Forecast { get; private init; }

    public LaplacianSolver? Solver { get; private init; }

    public ProbingFacts? Probing { get; private init; }

    /// <summary>Chooses and prepares.</summary>
    /// <param name="network">The network.</param>
    /// <param name="plan">The plan.</param>
    /// <param name="weights">Node weights, or null.</param>
    /// <param name="columns">Columns to come.</param>
    /// <param name="batchBytes">Bytes of the columns that one thread holds at a time.</param>
    /// <param name="phases">Told the phases.</param>
    /// <param name="observer">Told of the probes.</param>
    /// <param name="cancel">Ends the work.</param>
    /// <exception cref="BudgetException">It does not fit.</exception>
    public static ImpactRoute Of(
        Network network, ImpactPlan plan, double[]? weights, long columns, long batchBytes, RunPhases phases, IRunObserver observer,
        CancellationToken cancel)
    {
        if (plan.Route != Route.Probe)
        {
            (SymbolicCholesky Symbolic, Laplacian Laplacian, ExactForecast Forecast)? factor = phases.Do(
                "choosing a route", network.LinkCount, "links", () => Affordable(network, plan, columns, batchBytes, cancel));
            if (factor is var (symbolic, laplacian, forecast))
            {
                ExactPotentials exact = phases.Do("factorising", forecast.Entries, "entries",
                    () => ExactPotentials.Of(network, symbolic, laplacian, plan.Threads, cancel));
                return new ImpactRoute(exact, TotalsOf(exact, weights, null, cancel)) { Forecast = forecast };
            }
        }
        long bytes = RunCost.ProbedBytes(network, plan.Probing, plan.Probing.MostProbes)
            + (plan.Threads * (batchBytes + SolvedPotentials.BytesPerThread(network)));
        if (bytes > plan.MemoryBudget)
            throw TooMuch(bytes, plan);
        LaplacianSolver solver = phases.Do("preparing", network.LinkCount, "links",
            () => new LaplacianSolver(network, (int)Math.Min(int.MaxValue, columns + plan.Probing.MostProbes), plan.Seed, cancel));
        EstimatePlan probing = plan.Probing with { Route = Route.Probe };
        EstimateInputs inputs = new() { NodeWeights = weights };
        ProbedEstimates probed = phases.Do("probing the index", probing.MostProbes, "probes",
            () => ProbedEstimates.Run(Blocks.Find(network), probing, inputs, null, null, false, null, solver, observer, cancel));
        SolvedPotentials solved = new(network, solver, probed.Nodes!.Diagonals(0));
        return new ImpactRoute(solved, TotalsOf(solved, weights, probed.Nodes, cancel))
        {
            Solver = solver,
            Probing = probed.Facts,
        };

        WeightedTotals[] TotalsOf(Potentials potentials, double[]? weights, NodeSums? sums, CancellationToken cancel)
        {
            Func<int, Estimate>? index = sums is null ? null : c => sums.KirchhoffIndex(c, plan.Confidence);
            Func<int, Estimate>? weighted = sums is null ? null : c => sums.WeightedKirchhoffIndex(c, plan.Confidence)!.Value;
            WeightedTotals plain = WeightedTotals.Of(potentials, null, index, cancel);
            return weights is null ? [plain] : [plain, WeightedTotals.Of(potentials, weights, weighted, cancel)];
        }
    }

    public void Dispose() => Potentials.Dispose();

    private static (SymbolicCholesky, Laplacian, ExactForecast)? Affordable(
        Network network, ImpactPlan plan, long columns, long batchBytes, CancellationToken cancel)
    {
        EstimatePlan priced = plan.Probing with { Want = Want.None };
        ExactBudget budget = ExactBudget.Of(priced, network);
        Laplacian laplacian = ExactPotentials.Ground(network);
        int[]? order = FillReducingOrder.Of(laplacian, budget.Limits, plan.Threads, cancel);
        ExactForecast? forecast = null;
        if (order is not null)
        {
            SymbolicCholesky symbolic = SymbolicCholesky.Of(laplacian, RouteChoice.GroundLast(order, 0));
            forecast = ExactForecast.Of(network, symbolic, priced);
            forecast = forecast with { Bytes = forecast.Bytes + (plan.Threads * (batchBytes + ExactPotentials.BytesPerThread(network))) };
            // Where a factor is affordable, its columns cost less than solves: they do not speak against it.
            if (budget.Holds(forecast))
            {
                double column = (symbolic.StoredEntries * SecondsPerEntryOfColumn) + (network.NodeCount * SecondsPerNodeOfColumn);
                return (symbolic, laplacian, forecast with { Seconds = forecast.Seconds + (columns * column / Math.Min(2, plan.Threads)) });
            }
        }
        return plan.Route == Route.Exact ? throw budget.Refusal(forecast) : null;
    }

    private static BudgetException TooMuch(long bytes, ImpactPlan plan) => new(string.Create(CultureInfo.InvariantCulture,
        $"the run needs about {bytes / 1e9:0.0} GB, and --memory-budget is {plan.MemoryBudget / 1e9:0.0} GB; use fewer --threads, "
        + $"cases of fewer links or a larger budget"));
}
