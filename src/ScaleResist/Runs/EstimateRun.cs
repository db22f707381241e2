// The main job on a network in memory: bridges, probes, estimates, rows. Everything it finds goes to the sink.
// Invariant: what is not wanted is neither computed nor written, except Foster's sum, the check that every probed run carries.

using System.Diagnostics;
using ScaleResist.Estimating;
using ScaleResist.Graphs;
using ScaleResist.Solving;

namespace ScaleResist.Runs;

/// <summary>What a run takes beside the network.</summary>
public sealed record EstimateInputs
{
    /// <summary>Requested pairs as internal nodes of the network, in the order of the request.</summary>
    public IReadOnlyList<(int U, int V)>? Pairs { get; init; }

    /// <summary>Node weights by internal node, finite and not negative.</summary>
    public double[]? NodeWeights { get; init; }

    /// <summary>Internal nodes that are shorted into one, to which the nodes table then gives resistances; null: none.</summary>
    public IReadOnlyList<int>? Terminals { get; init; }
}

/// <summary>The estimate run.</summary>
public static class EstimateRun
{
    /// <summary>Runs a plan.</summary>
    /// <param name="network">The network.</param>
    /// <param name="plan">What is wanted.</param>
    /// <param name="inputs">Pairs and node weights.</param>
    /// <param name="sink">Takes the tables.</param>
    /// <param name="observer">Follows the phases.</param>
    /// <param name="cancel">Ends the run early with <see cref="OperationCanceledException"/>.</param>
    /// <returns>What to tell of the run.</returns>
    /// <exception cref="SolveException">A solve did not reach its tolerance.</exception>
    /// <exception cref="BudgetException">The plan does not fit its budgets.</exception>
    public static EstimateSummary Execute(
        Network network, EstimatePlan plan, EstimateInputs inputs, ITableSink sink, IRunObserver observer,
        CancellationToken cancel)
    {
        if (plan.Probes is not null && plan.TargetError is not null)
            throw new ArgumentException("A plan has a number of probes or a target error, not both.", nameof(plan));
        long begin = Stopwatch.GetTimestamp();
        RunPhases phases = new(observer);
        Dictionary<string, long> rows = [];
        ColumnKind label = LabelColumns.KindOf(network.Labels);
        Blocks blocks = phases.Do("finding bridges", network.LinkCount, "links", () => Blocks.Find(network));
        if (plan.Want.HasFlag(Want.Components))
            Write("components", Tables.Components(label), network.NodeCount, w => NodeRows.WriteComponents(network, w, cancel));

        RouteChoice? route = null;
        ExactResults? exact = null;
        ExactPairs? exactPairs = null;
        LaplacianSolver? solver = null;
        ProbedEstimates? probed = null;
        Audit? audit = null;
        AuditFacts? audited = null;
        NodeSums? nodes = null;
        LinkRows? links = null;
        TerminalResistances? terminals = null;
        ConnectivityFacts? connectivity = null;
        List<IndexEntry> index = [];
        Want left = Want.None; // to the probes
        if ((plan.Want & ~Want.Components) != 0)
        {
            route = phases.Do("choosing a route", network.LinkCount, "links", () => RouteChoice.Of(blocks, plan, cancel));
            if (route.Part is not null && (plan.Want & ~(Want.Components | Want.Coordinates)) != 0)
            {
                exact = phases.Do("factorising", route.Forecast!.Entries, "entries",
                    () => ExactResults.Of(route.Part, route.Symbolic!, route.Laplacian!, inputs.NodeWeights, plan.Want.HasFlag(Want.Links), plan.Threads, cancel));
            }
            bool wantsCut = plan.Want.HasFlag(Want.Index) && network.Components[0].Nodes > 1;
            if (wantsCut && exact?.Part.HoldsComponent(0) == true)
                connectivity = phases.Do("finding the weakest cut", null, "solves", () => Connectivity.Exactly(exact, plan));
            // Of the exact results only pairs still need the factor; its memory is free for the tables.
            if (exact is not null && plan.Want.HasFlag(Want.Pairs))
                exactPairs = new ExactPairs(exact);
            else
                exact?.Dispose();
            // On the probed route a tree has exact links, nodes and index; its pairs are left.
            left = route.AllExact ? plan.Want & (exact is null ? Want.Pairs | Want.Coordinates : Want.Coordinates) : plan.Want;
            if (left != Want.None)
            {
                RunCost.CheckMemory(network, plan with { Want = left }, plan.ForeseenProbes);
                solver = phases.Do("preparing", network.LinkCount, "links",
                    () => new LaplacianSolver(network, plan.ForeseenProbes, plan.Seed, cancel));
                if ((left & (Want.Links | Want.Pairs)) != 0)
                    audit = new Audit(blocks, plan, exact?.Part, !route.AllExact);
                probed = phases.Do("solving", plan.EndIsOpen ? null : plan.MostProbes, "probes",
                    () => ProbedEstimates.Run(
                        blocks, Left(left), inputs, exact?.ExactBlocks, exactPairs, !route.AllExact, audit?.Pairs, solver,
                        observer, cancel));
                audit = audit is null || probed.OutOfTime ? null
                    : phases.Do("solving an audit", Audit.CountFor(plan), "pairs", () => audit.Solve(solver, plan.Threads, cancel));
            }
            if (wantsCut && connectivity is null)
            {
                connectivity = phases.Do("finding the weakest cut", null, "solves", () => Connectivity.BySolves(
                    network, solver ?? new LaplacianSolver(network, 1, plan.Seed, cancel), probed?.Facts?.Probes ?? 0, plan, cancel));
            }
            if ((plan.Want & (Want.Index | Want.Nodes)) != 0)
                nodes = probed?.Nodes ?? new NodeSums(blocks, inputs.NodeWeights, exact?.ExactBlocks);
            links = WalkLinks();
            if (!links.FosterSums.All(double.IsFinite))
                throw new SolveException("an estimate is not a finite number");
        }
        if (plan.Want.HasFlag(Want.Index))
        {
            index = IndexRows.Of(network, nodes!, links!.FosterSums, exact?.LogSpanningTrees, connectivity, plan.Confidence);
            Write("index", Tables.Index, index.Count, w => IndexRows.Write(index, w));
        }
        if (plan.Want.HasFlag(Want.Nodes))
        {
            if (inputs.Terminals is { } shorted)
            {
                terminals = phases.Do("finding resistances to terminals", null, "probes",
                    () => TerminalResistances.Of(network, shorted, Left(plan.Want), observer, cancel));
            }
            Write("nodes", Tables.Nodes(label, terminals is not null), network.NodeCount,
                w => NodeRows.WriteNodes(network, nodes!, terminals?.Values, plan.Confidence, w, cancel));
        }
        if (plan.Want.HasFlag(Want.Pairs))
        {
            IReadOnlyList<(int U, int V)> pairs = inputs.Pairs ?? [];
            PairSums sums = probed?.Pairs ?? new PairSums(network, blocks.Bridges, pairs, exactPairs);
            Write("pairs", Tables.Pairs(label), pairs.Count,
                w => PairRows.Write(network, pairs, sums, plan.Confidence, plan.Threads, w));
            exactPairs?.Dispose();
            exact?.Dispose();
        }
        if (plan.Want.HasFlag(Want.Coordinates))
        {
            Write("coordinates", Tables.Coordinates(label), network.NodeCount,
                w => NodeRows.WriteCoordinates(network, probed!.Coordinates!, w, cancel));
        }
        if (audit is not null)
        {
            Write("audit", Tables.Audit(label), Audit.CountFor(plan),
                w => audited = audit.Write(blocks.Bridges, probed!.Links, plan, probed.SolverError, w));
        }
        else if (probed is not null)
        {
            audited = Audit.OfSolves(plan, probed.SolverError);
        }
        return new EstimateSummary
        {
            Nodes = network.NodeCount,
            Links = network.LinkCount,
            Components = network.Components.Count,
            Bridges = blocks.Bridges.Count,
            Index = index,
            CriticalLinks = plan.Want.HasFlag(Want.Links) ? links!.Critical : [],
            FosterSum = links?.FosterSums.Sum(),
            Exact = exact is null ? null : new ExactFacts
            {
                ProbedBlocks = route!.Probed.Count(left => left),
                Entries = route.Forecast!.Entries,
                Operations = route.Forecast.Operations,
                ForecastSeconds = route.Forecast.Seconds,
                Seconds = phases.Times.Where(phase => phase.Name == "factorising" || phase.Name.StartsWith("writing ", StringComparison.Ordinal))
                    .Sum(phase => phase.Seconds),
                ForecastBytes = route.Forecast.Bytes,
            },
            Solver = solver is null ? null : new SolverFacts
            {
                Preconditioner = solver.Preconditioner,
                Reason = solver.Reason,
                Eliminated = solver.Eliminated,
                Columns = solver.Statistics.Columns,
                MostIterations = solver.Statistics.MostIterations,
                LargestResidual = solver.Statistics.LargestResidual,
                LargestEnergyError = solver.Statistics.LargestEnergyError,
                Retried = solver.Statistics.Retried,
                DeflationSolves = probed?.Nodes?.DeflationSolves ?? 0,
            },
            Probing = probed?.Facts,
            TrialErrors = probed?.Errors ?? default,
            Audit = audited,
            Terminals = terminals?.Facts,
            Connectivity = connectivity,
            Phases = phases.Times,
            Rows = rows,
        };

        EstimatePlan Left(Want want)
        {
            EstimatePlan rest = plan with { Want = want, TimeBudget = plan.TimeBudget - Stopwatch.GetElapsedTime(begin) };
            return rest with { PanelsAtOnce = RunCost.PanelsAtOnce(network, rest, phases.Times.LastOrDefault(phase => phase.Name == "preparing")?.Seconds ?? 0) };
        }

        LinkRows WalkLinks()
        {
            LinkResistances resistances = new(network, blocks.Bridges, probed?.Links, exact, plan.Confidence, probed?.Losses);
            if (!plan.Want.HasFlag(Want.Links))
            {
                return phases.Do("checking", network.LinkCount, "links",
                    () => LinkRows.Walk(network, resistances, null, plan.Threads, observer, cancel));
            }
            LinkRows? walked = null;
            Write("links", Tables.Links(label), network.LinkCount,
                w => walked = LinkRows.Walk(network, resistances, w, plan.Threads, observer, cancel));
            return walked!;
        }

        void Write(string name, TableDefinition table, long count, Action<ITableWriter> write) =>
            rows[name] = phases.Do($"writing {name}", count, "rows", () =>
            {
                ITableWriter writer = sink.Open(table);
                write(writer);
                return writer.Complete();
            });
    }
}
