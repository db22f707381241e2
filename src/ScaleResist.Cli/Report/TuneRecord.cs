// run.json of a tuning: the same fields as an estimate's where they mean the same, and the points as a report takes them.

using System.Text.Json.Nodes;
using ScaleResist.Cli.Commands;
using ScaleResist.Graphs;
using ScaleResist.Runs;

namespace ScaleResist.Cli.Report;

/// <summary>The record of a finished tuning.</summary>
internal sealed record TuneRecord
{
    public int SchemaVersion => Tables.SchemaVersion;

    public string ProgramVersion => Cli.ProgramVersion.Number;

    public string? ProgramCommit => Cli.ProgramVersion.Commit;

    public required string RunId { get; init; }

    public int ExitStatus => ExitCode.Done;

    public required DateTime Started { get; init; }

    public required DateTime Finished { get; init; }

    public required JsonObject Plan { get; init; }

    public required int Threads { get; init; }

    public required InputFacts Input { get; init; }

    public required CleaningFacts Cleaning { get; init; }

    public required Machine Machine { get; init; }

    public required IReadOnlyList<PhaseTime> Phases { get; init; }

    /// <summary>The points in order of predicted time, as table frontier has them.</summary>
    public required IReadOnlyList<TunePoint> Frontier { get; init; }

    public required IReadOnlyDictionary<string, long> Rows { get; init; }

    public required long PeakResidentBytes { get; init; }

    /// <summary>Collects the record of a tuning that has just written its last row.</summary>
    public static TuneRecord Of(TuneRequest request, JsonObject plan, TuneOutcome outcome, IReadOnlyDictionary<string, long> rows,
        IReadOnlyList<PhaseTime> phases, DateTimeOffset started, DateTimeOffset finished) => new()
        {
            RunId = request.RunId!,
            Started = started.UtcDateTime,
            Finished = finished.UtcDateTime,
            Plan = plan,
            Threads = request.Plan.Threads,
            Input = outcome.Network.Input,
            Cleaning = outcome.Network.Cleaning,
            Machine = Machine.Here(),
            Phases = phases,
            Frontier = [.. outcome.Points.Select(point => new TunePoint(point.Route.ToString().ToLowerInvariant(), point.Probes,
                point.PredictedError, point.PredictedIndexError, point.AchievedError, point.AchievedIndexError,
                point.PredictedSeconds, point.AchievedSeconds, point.PredictedBytes, point.OnFrontier, request.CommandOf(point)))],
            Rows = rows,
            PeakResidentBytes = Machine.PeakResidentBytes(),
        };

    /// <summary>The record as UTF-8 JSON.</summary>
    public byte[] ToJson() => RunRecord.ToJson(this);
}

/// <summary>A row of table frontier.</summary>
internal sealed record TunePoint(string Route, int? Probes, double? PredictedError, double? PredictedIndexError, double? AchievedError,
    double? AchievedIndexError, double PredictedSeconds, double? AchievedSeconds, long PredictedBytes, bool OnFrontier, string Command);
