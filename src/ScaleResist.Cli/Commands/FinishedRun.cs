// What a command says whose run is there already: the same again is done, anything else is refused.
// Invariant: a finished run is never changed.

using System.Text.Json;
using System.Text.Json.Nodes;
using ScaleResist.Cli.Lake;
using ScaleResist.Cli.Report;

namespace ScaleResist.Cli.Commands;

/// <summary>Answers for a finished run.</summary>
/// <param name="host">Where the answer goes.</param>
/// <param name="folder">The run.</param>
/// <param name="network">The network that is asked about now.</param>
/// <param name="plan">The plan that is asked for now.</param>
/// <param name="restart">Whether leftovers were to be discarded.</param>
internal sealed class FinishedRun(CliHost host, RunFolder folder, string network, JsonObject plan, bool restart)
{
    /// <summary>Answers.</summary>
    /// <returns>The exit code.</returns>
    public int Answer(CancellationToken interrupted)
    {
        string mend = "a finished run is never overwritten: choose another --run-id, or remove the folder yourself";
        if (restart)
            return CommandLine.Refuse(host, $"--restart discards an unfinished run, and '{folder.RunId}' is finished; {mend}");
        JsonObject? record = ReadRecord(folder.PublishedRecord);
        if (record?["plan"] is not JsonObject finished || record["input"]?["sha256"]?.ToString() is not string digest)
            return CommandLine.Refuse(host,
                $"{folder.Published}: a run is there, but its {RunFolder.RecordName} cannot be read; {mend}");
        string? difference = RunPlan.Difference(finished, plan);
        if (difference is null && InputDigest.Sha256(network, interrupted) != digest)
            difference = "a network of other content";
        if (difference is not null)
            return CommandLine.Refuse(host, $"run '{folder.RunId}' is finished with another plan ({difference}); {mend}");
        host.Out.WriteLine($"run '{folder.RunId}' is already done, with this plan and this network: {folder.Published}");
        host.Out.WriteLine(SummaryText.Query(folder.Published, (record["rows"] as JsonObject)?.Select(r => r.Key) ?? []));
        return ExitCode.Done;
    }

    private static JsonObject? ReadRecord(string path)
    {
        try
        {
            return JsonNode.Parse(File.ReadAllBytes(path)) as JsonObject;
        }
        catch (Exception error) when (error is JsonException or IOException or UnauthorizedAccessException)
        {
            return null;
        }
    }
}
