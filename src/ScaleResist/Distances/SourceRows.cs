// What searches from many sources leave behind: one row of sums a source, and counts by distance over all of them.
// Invariant: rows stand in the order of the sources, counts are whole numbers, and so nothing depends on threads.

using ScaleResist.Graphs;

namespace ScaleResist.Distances;

/// <summary>Sums over a component, source by source.</summary>
internal sealed class SourceRows
{
    private readonly DistanceCosts costs;
    private readonly Component component;
    private readonly DistanceSteps? steps;
    private readonly ulong[] within; // sources added up: nodes within each step, the source left out
    private readonly double[] squares; // below 2^53 where they are of use, so exact
    private readonly Lock gate = new();
    private double[] sums = [];
    private double[] weightedSums = [];
    private double[] eccentricities = [];
    private int[] farthest = [];

    /// <summary>No rows yet.</summary>
    /// <param name="costs">What is measured.</param>
    /// <param name="component">The component of all sources to come.</param>
    /// <param name="steps">Distances to count at, or null.</param>
    public SourceRows(DistanceCosts costs, Component component, DistanceSteps? steps)
    {
        this.costs = costs;
        this.component = component;
        this.steps = steps;
        within = new ulong[steps?.Count ?? 0];
        squares = new double[steps?.Count ?? 0];
    }

    /// <summary>Sources so far.</summary>
    public int Count => sums.Length;

    /// <summary>Sum of d(u,v) over all v.</summary>
    public double[] Sums => sums;

    /// <summary>Sum of w_v d(u,v) over all v.</summary>
    public double[] WeightedSums => weightedSums;

    /// <summary>e(u).</summary>
    public double[] Eccentricities => eccentricities;

    /// <summary>A node at that distance.</summary>
    public int[] Farthest => farthest;

    /// <summary>Searches from further sources.</summary>
    /// <param name="sources">The sources.</param>
    /// <param name="each">Called for every source in order with its place among these and its distances; null allows batches.</param>
    /// <param name="threads">Threads.</param>
    /// <param name="cancel">Ends it early.</param>
    public void Search(ReadOnlyMemory<int> sources, Action<int, double[]>? each, int threads, CancellationToken cancel)
    {
        int first = Count, count = first + sources.Length;
        Array.Resize(ref sums, count);
        Array.Resize(ref weightedSums, count);
        Array.Resize(ref eccentricities, count);
        Array.Resize(ref farthest, count);
        ParallelOptions options = new() { MaxDegreeOfParallelism = threads, CancellationToken = cancel };
        if (each is null && HopBatch.Serves(costs, component, sources.Length))
            ByBatches(sources, first, options);
        else
            OneByOne(sources, first, each, options);
    }

    /// <summary>The share of all pairs (u,v), u a source and v another node, within each step; and its standard error over all nodes.</summary>
    public (double Share, double Error)[] Shares(bool sampled)
    {
        double count = Count, others = component.Nodes - 1;
        return [.. within.Select((sum, i) =>
        {
            double mean = sum / count;
            double spread = sampled ? Math.Max(0, (squares[i] / count) - (mean * mean)) * count / (count - 1) : 0;
            return (mean / others, Math.Sqrt(spread / count * (1 - (count / component.Nodes))) / others);
        })];
    }

    private void OneByOne(ReadOnlyMemory<int> sources, int row, Action<int, double[]>? each, ParallelOptions options)
    {
        int wave = Math.Max(1, options.MaxDegreeOfParallelism);
        DistanceSearch[] searches = new DistanceSearch[Math.Min(wave, sources.Length)];
        for (int first = 0; first < sources.Length; first += wave)
        {
            int count = Math.Min(wave, sources.Length - first);
            Parallel.For(0, count, options, i =>
            {
                searches[i] ??= DistanceSearch.For(costs);
                int source = sources.Span[first + i];
                searches[i].Search(source);
                Add(row + first + i, source, searches[i].Distances);
            });
            for (int i = 0; i < count && each is not null; i++)
                each(first + i, searches[i].Distances);
        }
    }

    private void Add(int row, int source, double[] distances)
    {
        double sum = 0, weighted = 0, largest = -1;
        int far = source;
        int[] counts = new int[within.Length];
        for (int v = component.Start; v < component.End; v++)
        {
            double distance = distances[v];
            sum += distance;
            weighted += costs.Weight(v) * distance;
            if (distance > largest)
                (largest, far) = (distance, v);
        }
        if (steps is not null)
        {
            for (int v = component.Start; v < component.End; v++)
                counts[steps.Index(distances[v])]++;
            counts[0]--; // the source itself
        }
        (Sums[row], WeightedSums[row], Eccentricities[row], Farthest[row]) = (sum, weighted, largest, largest > 0 ? far : source);
        AddCounts(counts);
    }

    private void AddCounts(int[] counts)
    {
        lock (gate)
        {
            ulong sum = 0;
            for (int i = 0; i < counts.Length; i++)
            {
                sum += (ulong)counts[i];
                within[i] += sum;
                squares[i] += (double)sum * sum;
            }
        }
    }

    private void ByBatches(ReadOnlyMemory<int> sources, int row, ParallelOptions options)
    {
        double step = costs.Weight(component.Start);
        int batches = (sources.Length + HopBatch.Lanes - 1) / HopBatch.Lanes;
        Parallel.For(0, batches, options, () => new HopBatch(costs.Network), (batch, _, search) =>
        {
            int first = batch * HopBatch.Lanes;
            ReadOnlySpan<int> some = sources.Span[first..Math.Min(first + HopBatch.Lanes, sources.Length)];
            search.Search(some, component, count: true);
            for (int lane = 0; lane < some.Length; lane++)
            {
                double levels = 0;
                int[] counts = new int[within.Length];
                for (int level = 1; level < search.Counts.Count; level++)
                {
                    levels += (double)level * search.Counts[level][lane];
                    if (steps is not null)
                        counts[steps.Index(level * step)] += search.Counts[level][lane];
                }
                Sums[row + first + lane] = levels * step;
                WeightedSums[row + first + lane] = levels * step * step;
                Eccentricities[row + first + lane] = search.Reach[lane] * step;
                Farthest[row + first + lane] = search.FarthestOf[lane];
                AddCounts(counts);
            }
            return search;
        }, search => search.Dispose());
    }
}

/// <summary>The distances at which a profile counts: multiples of one width, from 0 to a bound on all distances.</summary>
/// <param name="Width">The step.</param>
/// <param name="Count">How many there are.</param>
internal sealed record DistanceSteps(double Width, int Count)
{
    private const int About = 200;
    private const int MostWhole = 1000;

    /// <summary>Every distance where they are few whole numbers or equal steps, else about 200 of them.</summary>
    public static DistanceSteps Of(DistanceCosts costs, double bound)
    {
        if (costs.Steps == StepKind.Equal && costs.Weight(0) > 0)
            return new(costs.Weight(0), (int)Math.Round(bound / costs.Weight(0)) + 1);
        if (bound == 0)
            return new(1, 1);
        double width = costs.AreWhole && bound <= MostWhole ? 1 : Round(bound / About);
        if (costs.AreWhole)
            width = Math.Max(1, width);
        return new(width, (int)Math.Ceiling(bound / width) + 1);
    }

    /// <summary>The first multiple that is not below a distance.</summary>
    public int Index(double distance)
    {
        int index = (int)Math.Ceiling(distance / Width);
        return Math.Min(index - (index > 0 && (index - 1) * Width >= distance ? 1 : 0), Count - 1);
    }

    // Up to 1, 2 or 5 times a power of ten.
    private static double Round(double width)
    {
        double power = Math.Pow(10, Math.Floor(Math.Log10(width)));
        return (width / power) switch { <= 1 => power, <= 2 => 2 * power, <= 5 => 5 * power, _ => 10 * power };
    }
}
