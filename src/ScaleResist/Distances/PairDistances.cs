// Distances of given pairs. Invariant: one search serves all pairs that share a node on the side with fewer different nodes.

using ScaleResist.Graphs;

namespace ScaleResist.Distances;

/// <summary>Distances of pairs of nodes.</summary>
public static class PairDistances
{
    /// <summary>d(source, target) of every pair, in order; +infinity between components. One search a different source (or target).</summary>
    /// <param name="costs">What is measured.</param>
    /// <param name="pairs">Pairs of nodes.</param>
    /// <param name="threads">Threads; results do not depend on them.</param>
    /// <param name="done">Told the pairs done so far.</param>
    /// <param name="cancel">Ends it early.</param>
    public static double[] Of(
        DistanceCosts costs, IReadOnlyList<(int Source, int Target)> pairs, int threads, Action<double>? done, CancellationToken cancel)
    {
        double[] distances = new double[pairs.Count];
        bool fromTargets = pairs.Select(p => p.Target).Distinct().Count() < pairs.Select(p => p.Source).Distinct().Count();
        IGrouping<int, int>[] groups =
            [.. Enumerable.Range(0, pairs.Count).GroupBy(i => fromTargets ? pairs[i].Target : pairs[i].Source)];
        long counted = 0;
        Parallel.ForEach(groups, new ParallelOptions { MaxDegreeOfParallelism = threads, CancellationToken = cancel },
            () => DistanceSearch.For(costs), (group, _, search) =>
            {
                Component component = search.Search(group.Key);
                foreach (int i in group)
                {
                    int other = fromTargets ? pairs[i].Source : pairs[i].Target;
                    if (other < component.Start || other >= component.End)
                        distances[i] = double.PositiveInfinity;
                    else if (fromTargets && other != group.Key) // d(u,v) = d(v,u) + w_v - w_u
                        distances[i] = Math.Max(0, search.Distances[other] + costs.Weight(group.Key) - costs.Weight(other));
                    else
                        distances[i] = search.Distances[other];
                }
                done?.Invoke(Interlocked.Add(ref counted, group.Count()));
                return search;
            }, _ => { });
        return distances;
    }
}
