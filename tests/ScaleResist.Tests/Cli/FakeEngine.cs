// An engine that estimates nothing: it pushes rows that a test can compute, in every kind of column, at the pace asked for.

using ScaleResist.Cli.Commands;
using ScaleResist.Estimating;
using ScaleResist.Graphs;
using ScaleResist.Runs;

namespace ScaleResist.Tests.Cli;

internal sealed class FakeEngine : IEstimateEngine
{
    public bool TextLabels { get; init; }

    public int Nodes { get; init; } = 40;

    public int Links { get; init; } = 100;

    public int BatchRows { get; init; } = 33;

    public int Coordinates { get; init; } = 4;

    /// <summary>Called after each batch of links, with the interruption.</summary>
    public Action<CancellationToken> AfterBatch { get; init; } = token => token.ThrowIfCancellationRequested();

    /// <summary>What an audit found; null writes none.</summary>
    public AuditFacts? Audit { get; init; }

    public Exception? FailAfterLinks { get; init; }

    public int Runs { get; private set; }

    public static string Label(long node) => $"Müller-{node} \"ö\"";

    public SurveyOutcome Survey(SurveyRequest request, IRunObserver observer, CancellationToken interrupted) =>
        throw new NotSupportedException("this engine surveys nothing");

    public TuneOutcome Tune(TuneRequest request, double before, Func<ITableSink> openTables, IRunObserver observer, CancellationToken interrupted) =>
        throw new NotSupportedException("this engine tunes nothing");

    public EstimateOutcome Run(EstimateRequest request, Func<InputFacts, ITableSink> openSink, IRunObserver observer,
        CancellationToken interrupted)
    {
        Runs++;
        observer.Begin("reading", null, "bytes");
        InputFacts facts = new()
        {
            Path = request.Network,
            Form = "csv",
            Bytes = File.Exists(request.Network)
                ? new FileInfo(request.Network).Length
                : throw new InputException(request.Network, null, "no such file", "check the path"),
            Sha256 = InputDigest.Sha256(request.Network, interrupted),
            Rows = Links + 3,
            CommentLines = 1,
            Header = ["from", "to"],
            Columns = ["from", "to"],
        };
        observer.End();
        ITableSink sink = openSink(facts);
        ColumnKind label = TextLabels ? ColumnKind.Text : ColumnKind.Int64;
        observer.Begin("solving", request.Plan.MostProbes, "probes");
        Dictionary<string, long> rows = [];
        foreach ((Want want, TableDefinition table, int count) in new[]
        {
            (Want.Index, Tables.Index, 2),
            (Want.Components, Tables.Components(label), Nodes),
            (Want.Nodes, Tables.Nodes(label), Nodes),
            (Want.Links, Tables.Links(label), Links),
            (Want.Pairs, Tables.Pairs(label), 3),
            (Want.Coordinates, Tables.Coordinates(label), Nodes),
            (Want.None, Tables.Audit(label), 16),
        })
        {
            if (want == Want.None ? Audit is null : !request.Plan.Want.HasFlag(want))
                continue;
            ITableWriter writer = sink.Open(table);
            for (int from = 0; from < count; from += BatchRows)
            {
                writer.Write(Batch(table, from, Math.Min(BatchRows, count - from)));
                if (want == Want.Links)
                    AfterBatch(interrupted);
            }
            if (want == Want.Links && FailAfterLinks is not null)
                throw FailAfterLinks;
            rows[table.Name] = writer.Complete();
            observer.Report(rows.Count);
        }
        observer.End();
        return new EstimateOutcome(facts, new CleaningFacts(1, 2), Summary(rows));
    }

    /// <summary>An audit of 16 links and pairs, of which so many intervals held.</summary>
    public static AuditFacts AuditOf(int held, string? warning) => new()
    {
        Compared = 16,
        TooWide = 0,
        MedianError = 0.01,
        Percentile95Error = 0.03,
        WorstError = 0.04,
        Intervals = 16,
        Held = held,
        LinkIntervals = 8,
        LinksHeld = held / 2,
        FarOff = 0,
        SolverError = 0.004,
        SolverErrorAllowed = 0.0088,
        Warning = warning,
    };

    /// <summary>Rows whose values follow from the row's number and the column's place.</summary>
    public RowBatch Batch(TableDefinition table, int from, int count) =>
        new(count, [.. table.Columns.Select((c, at) => Column(c, at, from, count))]);

    private Array Column(ColumnDefinition column, int at, int from, int count)
    {
        IEnumerable<int> rows = Enumerable.Range(from, count);
        return column.Kind switch
        {
            ColumnKind.Int64 when column.Nullable => rows.Select(r => r % 3 == 0 ? r + at : (long?)null).ToArray(),
            ColumnKind.Int64 => rows.Select(r => (long)r + at).ToArray(),
            ColumnKind.Double when column.Nullable => rows.Select(r => r % 2 == 0 ? r * 0.5 : (double?)null).ToArray(),
            ColumnKind.Double => rows.Select(r => (r * 0.25) + at).ToArray(),
            ColumnKind.Boolean => rows.Select(r => r % 3 == 0).ToArray(),
            ColumnKind.Text when column.Name == "method" => rows.Select(r => r % 3 == 0 ? "bridge" : "probe").ToArray(),
            ColumnKind.Text => rows.Select(r => Label(r + at)).ToArray(),
            ColumnKind.FloatList => rows.SelectMany(r => Enumerable.Range(0, Coordinates).Select(k => r + (k / 8f))).ToArray(),
            _ => throw new InvalidOperationException(),
        };
    }

    private EstimateSummary Summary(Dictionary<string, long> rows) => new()
    {
        Nodes = Nodes,
        Links = Links,
        Components = 2,
        Bridges = 34,
        Exact = null,
        Index =
        [
            new IndexEntry
            {
                ComponentId = 0,
                Nodes = Nodes - 1,
                Links = Links,
                TotalConductance = 1234567.5,
                KirchhoffIndex = new Estimate(63769632.8, 12345, 63700000, 63840000),
                MeanResistance = 5.2253,
                DegreeKirchhoffIndex = 1e10,
                KemenyConstant = 100,
                FosterSum = Nodes - 2.5,
                Method = "probe",
                Probes = 64,
            },
            new IndexEntry
            {
                ComponentId = 1,
                Nodes = 1,
                Links = 0,
                TotalConductance = 0,
                KirchhoffIndex = new Estimate(0, 0, 0, 0),
                MeanResistance = double.NaN,
                DegreeKirchhoffIndex = 0,
                KemenyConstant = double.NaN,
                FosterSum = 0,
                Method = "exact",
                Probes = 0,
            },
        ],
        CriticalLinks =
        [
            new CriticalLink
            {
                Source = "7",
                Target = "8",
                Resistance = new Estimate(1, 0, 1, 1),
                SpanningProbability = 1,
                NodesCutOff = 12,
            },
            new CriticalLink
            {
                Source = "1",
                Target = "2",
                Resistance = new Estimate(0.9, 0.01, 0.88, 0.92),
                SpanningProbability = 0.9,
                LossImpact = new Estimate(120, 15, 94, 153),
                LossRank = 1,
                LossRankLower = 1,
                LossRankUpper = 4,
            },
        ],
        FosterSum = Nodes - 2.5,
        Solver = new SolverFacts
        {
            Preconditioner = "jacobi",
            Reason = "a trial foretells 7 steps",
            Eliminated = 12,
            Columns = 64,
            MostIterations = 123,
            LargestResidual = 9.9e-5,
            LargestEnergyError = 1e-5,
            Retried = 0,
        },
        Probing = new ProbingFacts { Probes = 64, StoppedBy = "probes", TargetError = null, RelativeStandardError = null },
        Audit = Audit,
        Phases = [],
        Rows = rows,
    };
}
