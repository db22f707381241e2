// The verb impact on a network in memory: planned cases, or suggestions. Everything it finds goes to the sink.
// Invariant: rows come in the order of the cases; batches are cut by the cases alone, so that results do not depend on threads.

using ScaleResist.Estimating;
using ScaleResist.Graphs;
using ScaleResist.Kernels;
using ScaleResist.Solving;

namespace ScaleResist.Runs;

/// <summary>The impact run.</summary>
public static class ImpactRun
{
    private const int ColumnsOfBatch = 2 * PanelPair.Width;
    private const int RowsHeld = 1 << 21; // of pairs, between writes
    private const int WorstCases = 5;
    private const int SuggestionLines = 10;

    /// <summary>Runs a plan.</summary>
    /// <param name="network">The network.</param>
    /// <param name="plan">How.</param>
    /// <param name="inputs">Cases or candidates, pairs and node weights.</param>
    /// <param name="sink">Takes the tables.</param>
    /// <param name="observer">Follows the phases.</param>
    /// <param name="cancel">Ends the run early with <see cref="OperationCanceledException"/>.</param>
    /// <returns>What to tell of the run.</returns>
    /// <exception cref="SolveException">A solve did not reach its tolerance.</exception>
    /// <exception cref="BudgetException">The plan does not fit its budgets.</exception>
    public static ImpactSummary Execute(
        Network network, ImpactPlan plan, ImpactInputs inputs, ITableSink sink, IRunObserver observer, CancellationToken cancel)
    {
        if ((plan.Suggest is null) != (inputs.Cases is not null))
            throw new ArgumentException("A run has cases or suggestions.", nameof(inputs));
        RunPhases phases = new(observer);
        int[] componentOf = network.ComponentOfNodes();
        List<(int Start, int End)> batches = Batches(inputs, componentOf, out long columns, out int largest);
        long bytes = CaseBatch.Bytes(network, largest);
        using ImpactRoute route = ImpactRoute.Of(network, plan, inputs.NodeWeights, columns, bytes, phases, observer, cancel);
        List<CaseLine> worst = [];
        CaseLine? best = null;
        int cutting = 0, offered = 0;
        List<Addition> additions = [];
        string method = route.Potentials.Method.Name();
        if (inputs.Cases is IReadOnlyList<PlannedCase> cases)
        {
            BasePairs pairs = phases.Do("solving pairs", inputs.Pairs?.Count ?? 0, "pairs",
                () => PairForms(route.Potentials, inputs.Pairs, componentOf, cancel));
            ImpactRows rows = new(network, cases, pairs.Ends, method, sink, inputs.Pairs is not null);
            phases.Do("working off cases", cases.Count, "cases", () =>
            {
                WorkOff(cases, batches, route, pairs, componentOf, plan, Keep, observer, cancel);
                return rows.Complete();
            });

            void Keep(int first, CaseImpact[] found)
            {
                rows.Write(first, found);
                for (int i = 0; i < found.Length; i++)
                {
                    CaseImpact impact = found[i];
                    CaseLine line = new(cases[first + i].Id, impact.Change, impact.Before.Value, impact.ComponentsAfter, impact.NodesCutOff);
                    cutting += line.NodesCutOff > 0 ? 1 : 0;
                    worst = [.. worst.Append(line).OrderByDescending(a => a.NodesCutOff).ThenByDescending(a => a.Change.Value).Take(WorstCases)];
                    if (line.NodesCutOff == 0 && line.Change.Value < (best?.Change.Value ?? 0))
                        best = line;
                }
            }
        }
        else
        {
            WeightedTotals kind = route.Totals[^1];
            IReadOnlyList<Candidate> candidates = inputs.Candidates
                ?? phases.Do("finding candidates", null, "", () => FarCandidates.Of(route.Potentials, kind, cancel));
            offered = candidates.Count;
            GreedyAdditions greedy = phases.Do("trying candidates", candidates.Count, "candidates",
                () => GreedyAdditions.Of(route.Potentials, kind, candidates, plan.Threads, observer.Report, cancel));
            additions = phases.Do("choosing additions", plan.Suggest!.Value, "additions",
                () => greedy.Choose(plan.Suggest!.Value, plan.Budget, cancel));
            ImpactRows.WriteSuggestions(network, additions, method, sink);
        }
        return new ImpactSummary
        {
            Nodes = network.NodeCount,
            Links = network.LinkCount,
            Components = network.Components.Count,
            KirchhoffIndex = route.Totals[0].Index[0],
            Method = method,
            Columns = route.Potentials.Columns,
            Cases = inputs.Cases?.Count ?? 0,
            Cutting = cutting,
            Worst = worst,
            Best = best,
            Candidates = offered,
            Suggestions = [.. additions.Take(SuggestionLines).Select(a => new SuggestionLine(network.Labels[a.Candidate.U], network.Labels[a.Candidate.V],
                a.Candidate.Conductance, a.Candidate.Cost, a.Gain, a.IndexAfter))],
            Exact = route.Forecast is not ExactForecast forecast ? null : new ExactFacts
            {
                ProbedBlocks = 0,
                Entries = forecast.Entries,
                Operations = forecast.Operations,
                ForecastSeconds = forecast.Seconds,
                Seconds = phases.Times.Where(phase => phase.Name != "choosing a route").Sum(phase => phase.Seconds),
                ForecastBytes = forecast.Bytes,
            },
            Solver = route.Solver is not LaplacianSolver solver ? null : new SolverFacts
            {
                Preconditioner = solver.Preconditioner,
                Reason = solver.Reason,
                Eliminated = solver.Eliminated,
                Columns = solver.Statistics.Columns,
                MostIterations = solver.Statistics.MostIterations,
                LargestResidual = solver.Statistics.LargestResidual,
                LargestEnergyError = solver.Statistics.LargestEnergyError,
                Retried = solver.Statistics.Retried,
            },
            Probing = route.Probing,
            Phases = phases.Times,
        };
    }

    // Cases in a row whose columns fit two panels; one that needs more stands alone.
    private static List<(int Start, int End)> Batches(ImpactInputs inputs, int[] componentOf, out long columns, out int largest)
    {
        List<(int, int)> batches = [];
        (columns, largest) = (inputs.Candidates?.Count ?? 0, PanelPair.Width);
        IReadOnlyList<PlannedCase> cases = inputs.Cases ?? [];
        int start = 0, held = 0;
        for (int i = 0; i < cases.Count; i++)
        {
            int most = CaseWork.MostColumns(cases[i], componentOf, inputs.NodeWeights is null ? 1 : 2);
            if (i > start && held + most > ColumnsOfBatch)
            {
                batches.Add((start, i));
                (start, held) = (i, 0);
            }
            held += most;
            columns += most;
            largest = Math.Max(largest, held);
        }
        if (cases.Count > start)
            batches.Add((start, cases.Count));
        return batches;
    }

    private static void WorkOff(
        IReadOnlyList<PlannedCase> cases, List<(int Start, int End)> batches, ImpactRoute route, BasePairs pairs, int[] componentOf, ImpactPlan plan,
        Action<int, CaseImpact[]> keep, IRunObserver observer, CancellationToken cancel)
    {
        int slots = Math.Min(plan.Threads, batches.Count), done = 0;
        double quantile = Quantiles.Normal(plan.Confidence);
        CaseBatch[] workers = new CaseBatch[slots];
        try
        {
            for (int i = 0; i < slots; i++)
                workers[i] = new CaseBatch(route.Potentials, route.Totals, pairs, componentOf, quantile);
            int most = Math.Max(1, RowsHeld / (pairs.Ends.Length + 1));
            for (int first = 0; first < batches.Count;)
            {
                int end = first;
                while (end < batches.Count && (end < first + slots || batches[end].End - batches[first].Start <= most))
                    end++;
                CaseImpact[][] found = new CaseImpact[end - first][];
                int next = -1;
                Parallel.For(0, slots, new ParallelOptions { MaxDegreeOfParallelism = plan.Threads }, slot =>
                {
                    for (int i; (i = Interlocked.Increment(ref next)) < found.Length;)
                    {
                        (int start, int last) = batches[first + i];
                        found[i] = workers[slot].Run([.. Enumerable.Range(start, last - start).Select(at => cases[at])], cancel);
                        observer.Report(Interlocked.Add(ref done, last - start));
                    }
                });
                for (int i = 0; i < found.Length; i++)
                    keep(batches[first + i].Start, found[i]);
                first = end;
            }
        }
        finally
        {
            foreach (CaseBatch? worker in workers)
                worker?.Dispose();
        }
    }

    private static BasePairs PairForms(Potentials potentials, IReadOnlyList<(int U, int V)>? pairs, int[] componentOf, CancellationToken cancel)
    {
        (int U, int V)[] ends = [.. pairs ?? []];
        double[] forms = new double[ends.Length];
        if (ends.Length == 0)
            return new BasePairs(ends, forms);
        Network network = potentials.Network;
        using PanelPair b = new(network.NodeCount), x = new(network.NodeCount);
        using IDisposable workspace = potentials.NewWorkspace();
        for (int first = 0; first < ends.Length; first += PanelPair.Width)
        {
            int used = Math.Min(PanelPair.Width, ends.Length - first);
            SortedSet<int> components = [], across = [];
            for (int j = 0; j < used; j++)
            {
                (int u, int v) = ends[first + j];
                b.At(u, j) += 1;
                b.At(v, j) -= 1;
                components.UnionWith([componentOf[u], componentOf[v]]);
                if (componentOf[u] != componentOf[v])
                    across.UnionWith([componentOf[u], componentOf[v]]);
            }
            foreach (int c in across)
            {
                PanelKernels.Centre(b.First, network.Components[c].Start, network.Components[c].End);
                PanelKernels.Centre(b.Second, network.Components[c].Start, network.Components[c].End);
            }
            potentials.Solve(b, x, used, components, workspace, cancel);
            for (int j = 0; j < used; j++)
                forms[first + j] = x.At(ends[first + j].U, j) - x.At(ends[first + j].V, j);
            foreach (int c in components)
                b.Clear(network.Components[c].Start, network.Components[c].End);
        }
        return new BasePairs(ends, forms);
    }
}
