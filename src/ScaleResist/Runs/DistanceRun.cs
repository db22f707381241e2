// Distances on a network in memory: pairs, eccentricities, sums over pairs, profiles; rows go to the sink.
// Invariant: what is not wanted is neither computed nor written.

using ScaleResist.Distances;
using ScaleResist.Graphs;

namespace ScaleResist.Runs;

/// <summary>The distances run.</summary>
public static class DistanceRun
{
    /// <summary>
    /// Runs a plan. Where sources are given, eccentricities are theirs alone, diameter and radius the largest and least of them, the Wiener index
    /// the sum over all pairs that touch a source, the profile over the pairs from a source; components without a source have no rows.
    /// </summary>
    /// <param name="network">The network, with lengths where links cost anything.</param>
    /// <param name="plan">What is wanted.</param>
    /// <param name="inputs">Node weights, pairs, sources.</param>
    /// <param name="sink">Takes the tables.</param>
    /// <param name="observer">Follows the phases.</param>
    /// <param name="cancel">Ends the run early with <see cref="OperationCanceledException"/>.</param>
    public static DistanceSummary Execute(
        Network network, DistancePlan plan, DistanceInputs inputs, ITableSink sink, IRunObserver observer, CancellationToken cancel)
    {
        Dictionary<string, long> rows = [];
        ColumnKind label = LabelColumns.KindOf(network.Labels);
        DistanceCosts costs = new(network, inputs.NodeWeights);
        if (plan.Want.HasFlag(WantDistances.Pairs))
        {
            IReadOnlyList<(int U, int V)> pairs = inputs.Pairs ?? [];
            double[] distances = Do("searching pairs", pairs.Count, "pairs",
                () => PairDistances.Of(costs, pairs, plan.Threads, observer.Report, cancel));
            Write(DistanceTables.Pairs(label), w => DistanceTables.WritePairs(network.Labels, pairs, distances, inputs.Resistances, w));
        }
        List<(int Node, int Component, double Eccentricity, int Farthest)> nodes = [];
        long? searches = null;
        if ((plan.Want & (WantDistances.Eccentricity | WantDistances.Summary)) != 0)
        {
            nodes = inputs.Sources is null
                ? Do("bounding eccentricities", network.NodeCount, "nodes", () => All(out searches))
                : Do("searching sources", inputs.Sources.Count, "sources", () => Of(inputs.Sources));
            if (plan.Want.HasFlag(WantDistances.Eccentricity))
                Write(DistanceTables.Eccentricity(label), w => DistanceTables.WriteEccentricities(network, nodes, w));
        }
        List<(DistanceEntry Entry, int Centre, int Source, int Target)> entries = [];
        List<(int Component, double Pairs, ProfileStep Step)> profile = [];
        if ((plan.Want & (WantDistances.Summary | WantDistances.Profile)) != 0)
        {
            Do("summing pairs", network.NodeCount, "nodes", () =>
            {
                Sum();
                return 0;
            });
            if (plan.Want.HasFlag(WantDistances.Summary))
                Write(DistanceTables.Summary(label), w => DistanceTables.WriteSummary(network.Labels, entries, w));
            if (plan.Want.HasFlag(WantDistances.Profile))
                Write(DistanceTables.Profile, w => DistanceTables.WriteProfile(profile, w));
        }
        return new DistanceSummary
        {
            Nodes = network.NodeCount,
            Links = network.LinkCount,
            Components = network.Components.Count,
            Search = costs.Steps switch { StepKind.Equal => "hops", StepKind.Whole => "buckets", _ => "heap" },
            EccentricitySearches = searches,
            Entries = [.. entries.Select(e => e.Entry)],
            Rows = rows,
        };

        List<(int, int, double, int)> All(out long? count)
        {
            Eccentricities found = Eccentricities.Of(costs, plan.Threads, observer.Report, cancel);
            count = found.Searches;
            List<(int, int, double, int)> list = new(network.NodeCount);
            for (int c = 0; c < network.Components.Count; c++)
            {
                for (int u = network.Components[c].Start; u < network.Components[c].End; u++)
                    list.Add((u, c, found.Values[u], found.Farthest[u]));
            }
            return list;
        }

        List<(int, int, double, int)> Of(IReadOnlyList<int> sources)
        {
            (double Eccentricity, int Farthest)[] found = Eccentricities.OfSources(costs, sources, plan.Threads, cancel);
            return [.. sources.Select((u, i) => (u, costs.ComponentOf(u), found[i].Eccentricity, found[i].Farthest))];
        }

        void Sum()
        {
            RouteSumPlan how = new()
            {
                TargetError = plan.TargetError,
                Confidence = plan.Confidence,
                Seed = plan.Seed,
                Threads = plan.Threads,
                Profile = plan.Want.HasFlag(WantDistances.Profile),
            };
            ILookup<int, int>? sources = inputs.Sources?.ToLookup(costs.ComponentOf);
            int at = 0; // nodes come component by component, given sources do not
            ILookup<int, int>? given = inputs.Sources is null ? null : Enumerable.Range(0, nodes.Count).ToLookup(i => nodes[i].Component);
            for (int c = 0; c < network.Components.Count; c++)
            {
                cancel.ThrowIfCancellationRequested();
                Component component = network.Components[c];
                if (sources is not null && !sources.Contains(c))
                    continue;
                RouteSum sum = sources is null ? RouteSums.Of(costs, component, how, cancel)
                    : RouteSums.FromSources(costs, component, [.. sources[c]], how, cancel);
                profile.AddRange(sum.Profile.Select(step => (c, component.Nodes * (component.Nodes - 1.0) / 2, step)));
                if (plan.Want.HasFlag(WantDistances.Summary))
                {
                    entries.Add(given is null ? Entry(c, Enumerable.Range(at, component.Nodes), sum) : Entry(c, given[c], sum));
                    at += component.Nodes;
                }
                observer.Report(component.End);
            }
        }

        (DistanceEntry, int, int, int) Entry(int component, IEnumerable<int> of, RouteSum sum)
        {
            int centre = -1, source = -1, target = -1;
            double radius = double.PositiveInfinity, diameter = -1;
            long central = 0;
            foreach (int i in of)
            {
                (int u, _, double value, int far) = nodes[i];
                bool smaller = centre >= 0 && network.Labels.Compare(u, centre) < 0;
                if (value < radius || (value == radius && smaller))
                    centre = u;
                central = value < radius ? 1 : central + (value == radius ? 1 : 0);
                radius = Math.Min(radius, value);
                if (value > diameter || (value == diameter && network.Labels.Compare(u, source) < 0))
                    (diameter, source, target) = (value, u, far);
            }
            DistanceEntry entry = new()
            {
                ComponentId = component,
                Nodes = network.Components[component].Nodes,
                Diameter = diameter,
                Radius = radius,
                Centre = network.Labels[centre],
                CentreNodes = central,
                PeripherySource = network.Labels[source],
                PeripheryTarget = network.Labels[target],
                WienerIndex = sum.WienerIndex,
                WienerIndexSe = sum.StandardError,
                WienerIndexLower = sum.Lower,
                WienerIndexUpper = sum.Upper,
                NodeWeightedWienerIndex = costs.NodeWeights is null ? null : sum.Weighted,
                MeanDistance = sum.Pairs == 0 ? 0 : sum.WienerIndex / sum.Pairs,
                Sources = sum.Sources,
            };
            return (entry, centre, source, target);
        }

        T Do<T>(string phase, double total, string unit, Func<T> work)
        {
            observer.Begin(phase, total, unit);
            T result = work();
            observer.End();
            return result;
        }

        void Write(TableDefinition table, Action<ITableWriter> write) => rows[table.Name] = Do($"writing {table.Name}", 1, "tables", () =>
        {
            ITableWriter writer = sink.Open(table);
            write(writer);
            return writer.Complete();
        });
    }
}
