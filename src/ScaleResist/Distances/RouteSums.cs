// Sums over pairs of nodes: Wiener index, its node-weighted kin, mean distance, and the share of pairs within each distance.
// Invariant: an exact result has standard error 0; a sampled one is unbiased, and its interval counts that sources are drawn without repetition.

using MathNet.Numerics.Distributions;
using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Distances;

/// <summary>How sums over pairs are found.</summary>
public sealed record RouteSumPlan
{
    /// <summary>The relative standard error of a sampled Wiener index to reach: 0.5 %, so that a 95 % interval is within 1 %.</summary>
    public double TargetError { get; init; } = 0.005;

    /// <summary>The confidence of intervals.</summary>
    public double Confidence { get; init; } = 0.95;

    /// <summary>The seed of the sample.</summary>
    public ulong Seed { get; init; } = 1;

    /// <summary>Threads; results do not depend on them.</summary>
    public int Threads { get; init; } = 1;

    /// <summary>Whether the profile is wanted.</summary>
    public bool Profile { get; init; }

    /// <summary>Sources times nodes and arcs that count as affordable for exactness; where batches serve, 64 times as many.</summary>
    public long AffordableWork { get; init; } = 1L << 32;
}

/// <summary>One step of a profile.</summary>
/// <param name="Distance">The distance.</param>
/// <param name="Share">The share of pairs (u,v), u other than v, with d(u,v) at most that.</param>
/// <param name="Error">Its standard error.</param>
public readonly record struct ProfileStep(double Distance, double Share, double Error);

/// <summary>Sums over the unordered pairs of a component; of the pairs that touch a given source, where sources are given.</summary>
public sealed record RouteSum
{
    /// <summary>Sum of t(u,v) = (d(u,v) + d(v,u)) / 2.</summary>
    public double WienerIndex { get; init; }

    /// <summary>Its standard error.</summary>
    public double StandardError { get; init; }

    /// <summary>Lower end of its interval (Student).</summary>
    public double Lower { get; init; }

    /// <summary>Upper end.</summary>
    public double Upper { get; init; }

    /// <summary>Sum of w_u w_v t(u,v).</summary>
    public double Weighted { get; init; }

    /// <summary>How many pairs the sums are over.</summary>
    public double Pairs { get; init; }

    /// <summary>Searches; 0 where a tree needed none.</summary>
    public int Sources { get; init; }

    /// <summary>The profile, ascending; empty where not wanted.</summary>
    public IReadOnlyList<ProfileStep> Profile { get; init; } = [];
}

/// <summary>
/// W = sum over pairs of t(u,v). Trees: a link of cost c = (w_u + w_v)/2 + length parts n1 from n2 nodes, and W = sum of c n1 n2 (Wiener 1947).
/// Where all sources are affordable: half the sum of the rows T_u = sum over v of t(u,v). Else two independent samples without repetition:
/// p pivots, whose distances to all nodes foretell every row, X_u = (n/p) sum over pivots of t(p,u), and k sources, which say by how much:
///
///     2 W = n mean over sources (T_u - X_u) + sum over all u of X_u,
///
/// unbiased given the pivots, with variance n^2 Var(T - X) (1 - k/n) / k and k - 1 degrees of freedom. T - X spreads sqrt(p) times less than
/// t(u,v) beyond the sum of a row and a column effect.
/// </summary>
public static class RouteSums
{
    private const int Pivots = 64;
    private const int FirstSources = 64;
    private const int BatchGain = 64;
    private const uint PivotDomain = 0x50495654, SourceDomain = 0x534F5552; // keep these counters apart from all others

    /// <summary>The sums of a component.</summary>
    public static RouteSum Of(DistanceCosts costs, Component component, RouteSumPlan plan, CancellationToken cancel)
    {
        Network network = costs.Network;
        bool isTree = network.LinksOf(component) == component.Nodes - 1;
        if (component.Nodes == 1 || (isTree && !plan.Profile))
            return OfTree(costs, component);
        double work = component.Nodes * (component.Nodes + (2.0 * network.LinksOf(component)));
        bool exact = component.Nodes <= Pivots + FirstSources || work <= plan.AffordableWork
            || (work <= (double)BatchGain * plan.AffordableWork && HopBatch.Serves(costs, component, component.Nodes));
        RouteSum sum = exact ? OfAll(costs, component, plan, cancel) : Sampled(costs, component, plan, cancel);
        return isTree ? OfTree(costs, component) with { Sources = sum.Sources, Profile = sum.Profile } : sum;
    }

    /// <summary>The sums over all pairs of which at least one node is a source, exactly, and the profile from the sources.</summary>
    public static RouteSum FromSources(
        DistanceCosts costs, Component component, int[] sources, RouteSumPlan plan, CancellationToken cancel)
    {
        DistanceSteps? steps = Steps(costs, component, plan);
        double[] inner = new double[sources.Length], innerWeighted = new double[sources.Length];
        SourceRows rows = new(costs, component, steps);
        rows.Search(sources, (row, distances) =>
        {
            foreach (int v in sources)
            {
                double mean = costs.Mean(sources[row], v, distances[v]);
                inner[row] += mean;
                innerWeighted[row] += costs.Weight(v) * mean;
            }
        }, plan.Threads, cancel);
        Totals totals = Totals.Of(costs, component);
        double sum = 0, weighted = 0;
        for (int i = 0; i < sources.Length; i++)
        {
            (double row, double rowWeighted) = totals.Row(rows, i, sources[i]);
            sum += row - (inner[i] / 2);
            weighted += costs.Weight(sources[i]) * (rowWeighted - (innerWeighted[i] / 2));
        }
        double count = sources.Length, pairs = (count * (component.Nodes - 1.0)) - (count * (count - 1) / 2);
        return Exact(sum, weighted, pairs, sources.Length, ProfileOf(rows, steps, sampled: false));
    }

    private static RouteSum Exact(double sum, double weighted, double pairs, int sources, IReadOnlyList<ProfileStep> profile) => new()
    {
        WienerIndex = sum,
        Lower = sum,
        Upper = sum,
        Weighted = weighted,
        Pairs = pairs,
        Sources = sources,
        Profile = profile,
    };

    private static double AllPairs(Component component) => component.Nodes * (component.Nodes - 1.0) / 2;

    // Within a component nodes stand in breadth-first order, so every node but the first has its parent as first neighbour.
    private static RouteSum OfTree(DistanceCosts costs, Component component)
    {
        Network network = costs.Network;
        double[] nodes = new double[component.Nodes], weights = new double[component.Nodes];
        double total = 0, sum = 0, weighted = 0;
        for (int i = 0; i < component.Nodes; i++)
        {
            nodes[i] = 1;
            weights[i] = costs.Weight(component.Start + i);
            total += weights[i];
        }
        for (int i = component.Nodes - 1; i > 0; i--)
        {
            int u = component.Start + i;
            long arc = network.RowStart[u];
            int parent = network.Neighbours[arc];
            double cost = ((costs.Weight(u) + costs.Weight(parent)) / 2) + costs.Length(arc);
            sum += cost * nodes[i] * (component.Nodes - nodes[i]);
            weighted += cost * weights[i] * (total - weights[i]);
            nodes[parent - component.Start] += nodes[i];
            weights[parent - component.Start] += weights[i];
        }
        return Exact(sum, weighted, AllPairs(component), 0, []);
    }

    private static RouteSum OfAll(DistanceCosts costs, Component component, RouteSumPlan plan, CancellationToken cancel)
    {
        DistanceSteps? steps = Steps(costs, component, plan);
        int[] sources = [.. Enumerable.Range(component.Start, component.Nodes)];
        SourceRows rows = new(costs, component, steps);
        rows.Search(sources, null, plan.Threads, cancel);
        Totals totals = Totals.Of(costs, component);
        double sum = 0, weighted = 0;
        for (int i = 0; i < sources.Length; i++)
        {
            (double row, double rowWeighted) = totals.Row(rows, i, sources[i]);
            sum += row;
            weighted += costs.Weight(sources[i]) * rowWeighted;
        }
        return Exact(sum / 2, weighted / 2, AllPairs(component), sources.Length, ProfileOf(rows, steps, sampled: false));
    }

    private static RouteSum Sampled(DistanceCosts costs, Component component, RouteSumPlan plan, CancellationToken cancel)
    {
        int n = component.Nodes;
        double[] foretold = new double[n], foretoldWeighted = new double[n];
        int[] pivots = Draw(costs.Network, component, Pivots, plan.Seed, PivotDomain);
        double scale = (double)n / Pivots;
        new SourceRows(costs, component, null).Search(pivots, (row, distances) =>
        {
            int p = pivots[row];
            double weight = costs.Weight(p);
            Parallel.For(0, plan.Threads, new ParallelOptions { MaxDegreeOfParallelism = plan.Threads }, part =>
            {
                int end = (int)((part + 1L) * n / plan.Threads);
                for (int i = (int)((long)part * n / plan.Threads); i < end; i++)
                {
                    double mean = scale * costs.Mean(p, component.Start + i, distances[component.Start + i]);
                    foretold[i] += mean;
                    foretoldWeighted[i] += weight * mean;
                }
            });
        }, plan.Threads, cancel);

        double all = 0, allWeighted = 0;
        for (int i = 0; i < n; i++)
        {
            all += foretold[i];
            allWeighted += costs.Weight(component.Start + i) * foretoldWeighted[i];
        }
        // As many sources as the first ones ask for (two stages: Stein, Ann. Math. Stat. 16:243, 1945).
        Totals totals = Totals.Of(costs, component);
        DistanceSteps? steps = Steps(costs, component, plan);
        int[] drawn = Draw(costs.Network, component, n, plan.Seed, SourceDomain);
        SourceRows rows = new(costs, component, steps);
        rows.Search(drawn.AsMemory(0, FirstSources), null, plan.Threads, cancel);
        RouteSum sum = Estimate();
        double ratio = sum.StandardError / (plan.TargetError * sum.WienerIndex);
        if (ratio > 1)
        {
            int needed = (int)Math.Min(n, Math.Ceiling(FirstSources * ratio * ratio));
            rows.Search(drawn.AsMemory(FirstSources, needed - FirstSources), null, plan.Threads, cancel);
            sum = Estimate();
        }
        return sum with { Profile = ProfileOf(rows, steps, sampled: true) };

        RouteSum Estimate()
        {
            int k = rows.Count;
            double mean = 0, spread = 0, weighted = 0;
            for (int i = 0; i < k; i++)
            {
                int at = drawn[i] - component.Start;
                (double row, double rowWeighted) = totals.Row(rows, i, drawn[i]);
                double step = row - foretold[at] - mean;
                mean += step / (i + 1);
                spread += step * (row - foretold[at] - mean);
                weighted += costs.Weight(drawn[i]) * (rowWeighted - foretoldWeighted[at]);
            }
            double value = ((n * mean) + all) / 2;
            double error = n * Math.Sqrt(spread / (k - 1) / k * (1 - ((double)k / n))) / 2;
            double half = error * StudentT.InvCDF(0, 1, k - 1, (1 + plan.Confidence) / 2);
            return new RouteSum
            {
                WienerIndex = value,
                StandardError = error,
                Lower = value - half,
                Upper = value + half,
                Weighted = ((n * (weighted / k)) + allWeighted) / 2,
                Pairs = AllPairs(component),
                Sources = Pivots + k,
            };
        }
    }

    private static DistanceSteps? Steps(DistanceCosts costs, Component component, RouteSumPlan plan)
    {
        if (!plan.Profile)
            return null;
        DistanceSearch search = DistanceSearch.For(costs);
        search.Search(component.Start);
        double largest = 0, start = costs.Weight(component.Start);
        for (int v = component.Start; v < component.End; v++)
            largest = Math.Max(largest, search.Distances[v]);
        // d(u,v) <= d(u,x) + d(x,v), and d(u,x) = d(x,u) + w_x - w_u.
        return DistanceSteps.Of(costs, (2 * largest) + start);
    }

    private static IReadOnlyList<ProfileStep> ProfileOf(SourceRows rows, DistanceSteps? steps, bool sampled)
    {
        List<ProfileStep> profile = [];
        if (steps is null)
            return profile;
        (double Share, double Error)[] shares = rows.Shares(sampled);
        for (int i = 0; i < shares.Length; i++)
        {
            if (shares[i].Share > 0)
                profile.Add(new ProfileStep(i * steps.Width, shares[i].Share, shares[i].Error));
            if (shares[i].Share == 1)
                break;
        }
        return profile;
    }

    // The nodes whose random numbers are least: any number of them is a sample without repetition, and more of them keep those before.
    private static int[] Draw(Network network, Component component, int count, ulong seed, uint domain)
    {
        ulong[] keys = new ulong[component.Nodes];
        int[] nodes = new int[component.Nodes];
        for (int i = 0; i < keys.Length; i++)
        {
            ulong key = network.NodeKeys[component.Start + i];
            nodes[i] = component.Start + i;
            keys[i] = Philox.Block((uint)key, (uint)(key >> 32), 0, domain, seed).Low;
        }
        Array.Sort(keys, nodes);
        return nodes[..count];
    }

    // What turns sums of d into sums of t: T_u = sum of d(u,v) + n w_u / 2 - (sum of w) / 2, and the same with weights.
    private readonly record struct Totals(DistanceCosts Costs, double Nodes, double Weights, double Squares)
    {
        public static Totals Of(DistanceCosts costs, Component component)
        {
            double weights = 0, squares = 0;
            for (int u = component.Start; u < component.End; u++)
            {
                double w = costs.Weight(u);
                weights += w;
                squares += w * w;
            }
            return new Totals(costs, component.Nodes, weights, squares);
        }

        public (double Sum, double Weighted) Row(SourceRows rows, int row, int source)
        {
            if (Costs.NodeWeights is null)
                return (rows.Sums[row], rows.WeightedSums[row]);
            double w = Costs.Weight(source);
            return (rows.Sums[row] + (((Nodes * w) - Weights) / 2), rows.WeightedSums[row] + (((Weights * w) - Squares) / 2));
        }
    }
}
