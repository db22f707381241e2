// run.json of an impact run, in the form of RunRecord.

using System.Text.Json.Nodes;
using ScaleResist.Cli.Commands;
using ScaleResist.Graphs;
using ScaleResist.Runs;

namespace ScaleResist.Cli.Report;

/// <summary>The record of a finished impact run.</summary>
internal sealed record ImpactRecord
{
    public int SchemaVersion => Tables.SchemaVersion;

    public string ProgramVersion => Cli.ProgramVersion.Number;

    public string? ProgramCommit => Cli.ProgramVersion.Commit;

    public required string RunId { get; init; }

    public required int ExitStatus { get; init; }

    public required DateTime Started { get; init; }

    public required DateTime Finished { get; init; }

    /// <summary>The command as validated.</summary>
    public required JsonObject Plan { get; init; }

    public required int Threads { get; init; }

    public required InputFacts Input { get; init; }

    public required CleaningFacts Cleaning { get; init; }

    public required Machine Machine { get; init; }

    public required IReadOnlyList<PhaseTime> Phases { get; init; }

    public required ImpactSummary Impact { get; init; }

    /// <summary>Rows by table.</summary>
    public required IReadOnlyDictionary<string, long> Rows { get; init; }

    public required long PeakResidentBytes { get; init; }

    /// <summary>Collects the record of a run that has just written its last row.</summary>
    public static ImpactRecord Of(ImpactRequest request, JsonObject plan, ImpactOutcome outcome, IReadOnlyDictionary<string, long> rows,
        IReadOnlyList<PhaseTime> phases, DateTimeOffset started, DateTimeOffset finished) => new()
        {
            RunId = request.RunId,
            ExitStatus = ExitCode.Done,
            Started = started.UtcDateTime,
            Finished = finished.UtcDateTime,
            Plan = plan,
            Threads = request.Plan.Threads,
            Input = outcome.Input,
            Cleaning = outcome.Cleaning,
            Machine = Machine.Here(),
            Phases = phases,
            Impact = outcome.Summary,
            Rows = rows,
            PeakResidentBytes = Machine.PeakResidentBytes(),
        };

    /// <summary>The record as UTF-8 JSON.</summary>
    public byte[] ToJson() => RunRecord.ToJson(this);
}
