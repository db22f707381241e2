// run.json: everything needed to judge a run and to do it again. Names are snake_case, times UTC (ISO 8601), sizes in bytes,
// times in seconds; a number that is not finite is one of the strings "NaN", "Infinity" and "-Infinity", which is valid JSON.

using System.Text.Encodings.Web;
using System.Text.Json;
using System.Text.Json.Nodes;
using System.Text.Json.Serialization;
using ScaleResist.Cli.Commands;
using ScaleResist.Cli.Progress;
using ScaleResist.Cli.Report.Findings;
using ScaleResist.Estimating;
using ScaleResist.Graphs;
using ScaleResist.Runs;

namespace ScaleResist.Cli.Report;

/// <summary>The record of a finished run.</summary>
internal sealed record RunRecord
{
    private const int MostIndexRows = 20;

    internal static readonly JsonSerializerOptions Format = new()
    {
        WriteIndented = true,
        PropertyNamingPolicy = JsonNamingPolicy.SnakeCaseLower,
        NumberHandling = JsonNumberHandling.AllowNamedFloatingPointLiterals,
        Encoder = JavaScriptEncoder.UnsafeRelaxedJsonEscaping,
    };

    public int SchemaVersion => Tables.SchemaVersion;

    public string ProgramVersion => Cli.ProgramVersion.Number;

    public string? ProgramCommit => Cli.ProgramVersion.Commit;

    public required string RunId { get; init; }

    public required int ExitStatus { get; init; }

    public required DateTime Started { get; init; }

    public required DateTime Finished { get; init; }

    /// <summary>The command as validated; see <see cref="RunPlan"/>.</summary>
    public required JsonObject Plan { get; init; }

    public required int Threads { get; init; }

    public required InputFacts Input { get; init; }

    public required CleaningFacts Cleaning { get; init; }

    public required NetworkCounts Network { get; init; }

    public required Machine Machine { get; init; }

    public required IReadOnlyList<PhaseUse> Phases { get; init; }

    public required ExactFacts? Exact { get; init; }

    public required SolverFacts? Solver { get; init; }

    public required ProbingFacts? Probing { get; init; }

    public required AuditFacts? Audit { get; init; }

    /// <summary>Algebraic connectivity and weakest cut of the largest component, or null.</summary>
    public required ConnectivityFacts? Connectivity { get; init; }

    /// <summary>Resistances to terminals, or null without them.</summary>
    public required TerminalFacts? Terminals { get; init; }

    /// <summary>Foster's theorem as a check, or null where nothing was probed.</summary>
    public required FosterCheck? Foster { get; init; }

    /// <summary>The rows of the index table, the largest components first, at most 20.</summary>
    public required IReadOnlyList<IndexEntry> Index { get; init; }

    public required IReadOnlyList<CriticalLink> CriticalLinks { get; init; }

    /// <summary>Rows by table.</summary>
    public required IReadOnlyDictionary<string, long> Rows { get; init; }

    /// <summary>What the tables say at a glance: what report.html shows of them.</summary>
    public required RunFindings Findings { get; init; }

    public required long PeakResidentBytes { get; init; }

    /// <summary>The plan's confidence.</summary>
    [JsonIgnore]
    public double Confidence => Plan["confidence"]?.GetValue<double>() ?? double.NaN;

    /// <summary>Collects the record of a run that has just written its last row.</summary>
    public static RunRecord Of(EstimateRequest request, JsonObject plan, EstimateOutcome outcome,
        IReadOnlyDictionary<string, long> rows, IReadOnlyList<PhaseUse> phases, RunFindings findings,
        DateTimeOffset started, DateTimeOffset finished) => new()
        {
            RunId = request.RunId,
            ExitStatus = ExitCode.Done,
            Started = started.UtcDateTime,
            Finished = finished.UtcDateTime,
            Plan = plan,
            Threads = request.Plan.Threads,
            Input = outcome.Input,
            Cleaning = outcome.Cleaning,
            Network = new NetworkCounts(outcome.Summary.Nodes, outcome.Summary.Links, outcome.Summary.Components,
                outcome.Summary.Bridges),
            Machine = Machine.Here(),
            Phases = phases,
            Exact = outcome.Summary.Exact,
            Solver = outcome.Summary.Solver,
            Probing = outcome.Summary.Probing,
            Audit = outcome.Summary.Audit,
            Connectivity = outcome.Summary.Connectivity,
            Terminals = outcome.Summary.Terminals,
            Foster = FosterCheck.Of(outcome.Summary),
            Index = [.. outcome.Summary.Index.Take(MostIndexRows)],
            CriticalLinks = outcome.Summary.CriticalLinks,
            Rows = rows,
            Findings = findings,
            PeakResidentBytes = Machine.PeakResidentBytes(),
        };

    /// <summary>The record as UTF-8 JSON.</summary>
    public byte[] ToJson() => ToJson(this);

    /// <summary>Any record as run.json writes it.</summary>
    internal static byte[] ToJson<T>(T record) => [.. JsonSerializer.SerializeToUtf8Bytes(record, Format), (byte)'\n'];
}

/// <summary>The network after cleaning.</summary>
internal sealed record NetworkCounts(long Nodes, long Links, int Components, long Bridges);

/// <summary>Foster (1949): spanning probabilities sum to nodes minus components.</summary>
internal sealed record FosterCheck(double Sum, long Expected, double RelativeDifference)
{
    /// <summary>The check of a run, or null where it has no sum.</summary>
    public static FosterCheck? Of(EstimateSummary summary)
    {
        if (summary.FosterSum is not double sum)
            return null;
        long expected = summary.Nodes - summary.Components;
        return new FosterCheck(sum, expected, expected == 0 ? 0 : (sum / expected) - 1);
    }
}
