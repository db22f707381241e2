// A point of the frontier between accuracy and time: one way to run an estimate, what it is foreseen to give and take, and what it did where it was run.
// Invariant: a point is on the frontier where no other point is both faster and more accurate.

namespace ScaleResist.Runs;

/// <summary>One way to run an estimate.</summary>
public sealed record FrontierPoint
{
    /// <summary><see cref="Route.Exact"/> or <see cref="Route.Probe"/>.</summary>
    public required Route Route { get; init; }

    /// <summary>K; null on the exact route.</summary>
    public required int? Probes { get; init; }

    /// <summary>
    /// The largest over the wanted tables of rows of the 95th percentile of their relative standard errors; null where no such table is wanted.
    /// </summary>
    public required double? PredictedError { get; init; }

    /// <summary>
    /// The relative standard error of the Kirchhoff index, the largest over components that hold a hundredth of the nodes; null where it is not wanted.
    /// </summary>
    public required double? PredictedIndexError { get; init; }

    /// <summary><see cref="PredictedError"/> as it came out; null where the point was not run.</summary>
    public double? AchievedError { get; init; }

    /// <summary><see cref="PredictedIndexError"/> as it came out; null where the point was not run.</summary>
    public double? AchievedIndexError { get; init; }

    /// <summary>Wall seconds of the whole process: start, reading, building, preparing, solving, writing.</summary>
    public required double PredictedSeconds { get; init; }

    /// <summary>The same as it came out, but for the process's end; null where the point was not run.</summary>
    public double? AchievedSeconds { get; init; }

    /// <summary>Peak resident memory.</summary>
    public required long PredictedBytes { get; init; }

    /// <summary>Whether no other point is both faster and more accurate.</summary>
    public bool OnFrontier { get; init; }

    /// <summary>The error that points are compared by: of the rows, or of the index where no rows are wanted.</summary>
    public double Error => PredictedError ?? PredictedIndexError ?? 0;

    /// <summary>Points in order of time, each marked where it is on the frontier. O(n log n).</summary>
    public static IReadOnlyList<FrontierPoint> Mark(IEnumerable<FrontierPoint> points)
    {
        List<FrontierPoint> marked = [];
        double least = double.PositiveInfinity; // error of all that is faster
        foreach (IGrouping<double, FrontierPoint> tied in points.GroupBy(point => point.PredictedSeconds).OrderBy(group => group.Key))
        {
            marked.AddRange(tied.OrderBy(point => point.Error).Select(point => point with { OnFrontier = point.Error <= least }));
            least = Math.Min(least, tied.Min(point => point.Error));
        }
        return marked;
    }

    /// <summary>The rows of <see cref="Tables.Frontier"/>.</summary>
    /// <param name="points">The points, in the order of the rows.</param>
    /// <param name="command">The command line of a point.</param>
    public static RowBatch ToBatch(IReadOnlyList<FrontierPoint> points, Func<FrontierPoint, string> command)
    {
        return new RowBatch(points.Count,
        [
            Column(point => point.Route.ToString().ToLowerInvariant()), Column(point => (long?)point.Probes),
            Column(point => point.PredictedError), Column(point => point.PredictedIndexError),
            Column(point => point.AchievedError), Column(point => point.AchievedIndexError),
            Column(point => point.PredictedSeconds), Column(point => point.AchievedSeconds),
            Column(point => point.PredictedBytes), Column(point => point.OnFrontier), Column(command),
        ]);

        T[] Column<T>(Func<FrontierPoint, T> value) => [.. points.Select(value)];
    }
}
