// Resistances of all nodes to the terminals: nodes shorted into one, such as supply points.
//
// R(u, T) is the entry (u,u) of the inverse of L without the terminals' rows and columns: exactly the diagonal of the selected inverse of the
// shorted network, grounded at the terminal node; by probes the pair (u, T) of that network, conditioned on its two ends as any pair.
// Invariant: terminals have 0, nodes whose component has no terminal +infinity, both without error.

using ScaleResist.Estimating;
using ScaleResist.Graphs;
using ScaleResist.Solving;

namespace ScaleResist.Runs;

/// <summary>Resistances to the terminals by node.</summary>
internal sealed class TerminalResistances
{
    private TerminalResistances(Estimate[] values, TerminalFacts facts)
    {
        Values = values;
        Facts = facts;
    }

    /// <summary>By node.</summary>
    public Estimate[] Values { get; }

    /// <summary>What to tell of them.</summary>
    public TerminalFacts Facts { get; }

    /// <summary>Finds them: exactly where a factor of the shorted network is affordable, unless the route is to probe.</summary>
    /// <exception cref="BudgetException">The exact route is asked for and does not fit, or the probes do not.</exception>
    public static TerminalResistances Of(
        Network network, IReadOnlyList<int> terminals, EstimatePlan plan, IRunObserver observer, CancellationToken cancel)
    {
        ShortedNetwork shorted = ShortedNetwork.Of(network, terminals);
        Estimate[] ofPlaces = [Estimate.Exact(0)];
        int? probes = null;
        if (shorted.Network is Network one && !TryExactly(one, shorted.Terminal, plan, cancel, ref ofPlaces))
            probes = Probe(one, shorted.Terminal, plan, observer, cancel, ref ofPlaces);
        Estimate[] values = new Estimate[network.NodeCount];
        int without = 0;
        for (int u = 0; u < values.Length; u++)
        {
            int place = shorted.PlaceOf(u);
            values[u] = place < 0 ? Estimate.Exact(double.PositiveInfinity) : ofPlaces[place];
            without += place < 0 ? 1 : 0;
        }
        return new TerminalResistances(values, new TerminalFacts
        {
            Terminals = terminals.Count,
            NodesWithout = without,
            ComponentsWithout = network.Components.Count(component => shorted.PlaceOf(component.Start) < 0),
            Method = (probes is null ? ResistanceMethod.Exact : ResistanceMethod.Probe).Name(),
            Probes = probes ?? 0,
        });
    }

    private static bool TryExactly(Network network, int terminal, EstimatePlan plan, CancellationToken cancel, ref Estimate[] values)
    {
        if (plan.Route == Route.Probe)
            return false;
        ExactBudget budget = ExactBudget.Of(plan, network);
        int[]? order = FillReducingOrder.Of(network.Laplacian, budget.Limits, plan.Threads, cancel);
        SymbolicCholesky? symbolic = order is null ? null : SymbolicCholesky.Of(network.Laplacian, RouteChoice.GroundLast(order, terminal));
        ExactForecast? forecast = symbolic is null ? null : ExactForecast.Of(network, symbolic, plan with { Want = Want.None });
        if (forecast is null || !budget.Holds(forecast))
            return plan.Route == Route.Exact ? throw budget.Refusal(forecast) : false;
        using CholeskyFactor factor = CholeskyFactor.Of(symbolic!, network.Laplacian, plan.Threads, cancel);
        SelectedInverse inverse = factor.Invert(plan.Threads, cancel);
        values = [.. Enumerable.Range(0, network.NodeCount).Select(u => Estimate.Exact(inverse.Diagonal(u)))];
        return true;
    }

    private static int Probe(
        Network network, int terminal, EstimatePlan plan, IRunObserver observer, CancellationToken cancel, ref Estimate[] values)
    {
        Blocks blocks = Blocks.Find(network);
        LaplacianSolver solver = new(network, plan.ForeseenProbes, plan.Seed, cancel);
        (int U, int V)[] pairs = [.. Enumerable.Range(0, network.NodeCount).Select(u => (u, terminal))];
        ProbedEstimates probed = ProbedEstimates.Run(
            blocks, plan with { Want = Want.Pairs }, new EstimateInputs { Pairs = pairs }, null, null, false, null, solver, observer, cancel);
        double quantile = Quantiles.Normal(plan.Confidence);
        values = [.. pairs.Select((_, i) => probed.Pairs!.Estimate(i, quantile).Resistance)];
        return probed.Facts!.Probes;
    }
}
