// Where a run lives in the lake. Invariant: DIR/run=ID appears by one rename, complete, flushed and with _SUCCESS inside;
// until then everything is under DIR/_staging/run=ID, which no pattern DIR/run=*/... matches. A published run is never changed.

using System.Text.RegularExpressions;

namespace ScaleResist.Cli.Lake;

/// <summary>The places of one run in a lake.</summary>
internal sealed partial class RunFolder
{
    /// <summary>Name of the run's record.</summary>
    public const string RecordName = "run.json";

    /// <summary>Name of the report.</summary>
    public const string ReportName = "report.html";

    /// <summary>Name of the mark of a finished run.</summary>
    public const string SuccessName = "_SUCCESS";

    public RunFolder(string lake, string runId)
    {
        if (!IsRunId(runId))
            throw new ArgumentException($"'{runId}' is not a run id.", nameof(runId));
        Lake = lake;
        RunId = runId;
        StagingRoot = Path.Combine(lake, "_staging");
        Published = Path.Combine(lake, "run=" + runId);
        Staging = Path.Combine(StagingRoot, "run=" + runId);
    }

    /// <summary>The lake as the user named it.</summary>
    public string Lake { get; }

    /// <summary>The run's name.</summary>
    public string RunId { get; }

    /// <summary>Where the finished run is.</summary>
    public string Published { get; }

    /// <summary>Where the run is written.</summary>
    public string Staging { get; }

    /// <summary>The record of the finished run.</summary>
    public string PublishedRecord => Path.Combine(Published, RecordName);

    /// <summary>Whether the run is finished and visible.</summary>
    public bool IsPublished => File.Exists(Path.Combine(Published, SuccessName));

    internal string StagingRoot { get; }

    internal string ClaimFile => Staging + ".claim";

    /// <summary>A run id is a plain name: up to 100 letters, digits, '.', '-' and '_', the first a letter or digit.</summary>
    public static bool IsRunId(string text) => RunIdPattern().IsMatch(text);

    /// <summary>The run id where none is given: the network's file stem and the UTC time.</summary>
    public static string DefaultRunId(string network, DateTimeOffset now)
    {
        string stem = Path.GetFileName(Path.TrimEndingDirectorySeparator(network)).Split('.')[0];
        stem = NotPlain().Replace(stem, "-").Trim('-', '_');
        stem = stem.Length == 0 ? "run" : stem[..Math.Min(stem.Length, 80)];
        return $"{stem}-{now.UtcDateTime:yyyyMMdd'T'HHmmss'Z'}";
    }

    /// <summary>
    /// Claims the run and gives an empty staging folder; what a crashed run left there is discarded.
    /// (Checkpoints will be kept in it one day: this is the place to look for them.)
    /// </summary>
    /// <exception cref="LakeException">The lake cannot be written, or another process writes this run.</exception>
    public StagedRun Begin()
    {
        if (File.Exists(Lake))
            throw new LakeException(Lake, "the lake is a file", "name a folder with --lake");
        RefuseForeignFolder();
        bool createdLake = !Directory.Exists(Lake);
        RunClaim? claim = null;
        try
        {
            claim = RunClaim.Take(ClaimFile, RunId);
            if (Directory.Exists(Staging))
                Directory.Delete(Staging, recursive: true);
            Directory.CreateDirectory(Staging);
            return new StagedRun(this, claim, createdLake);
        }
        catch (Exception error)
        {
            claim?.Dispose();
            RemoveEmptyFolders(createdLake);
            if (LakeException.IsFileSystemError(error))
                throw LakeException.From(Lake, error);
            throw;
        }
    }

    // Only where empty: other runs may be at work.
    internal void RemoveEmptyFolders(bool createdLake)
    {
        Quietly(() => Directory.Delete(StagingRoot));
        if (createdLake)
            Quietly(() => Directory.Delete(Lake));
    }

    // Tidying must not hide the error that led here; what it leaves is outside the lake's pattern and discarded by the next run.
    internal static void Quietly(Action tidy)
    {
        try
        {
            tidy();
        }
        catch (Exception error) when (LakeException.IsFileSystemError(error))
        {
        }
    }

    // A folder without _SUCCESS was not published by this program, and a rename onto it would fail in the end.
    internal void RefuseForeignFolder()
    {
        if (Directory.Exists(Published) && !IsPublished)
        {
            throw new LakeException(Published, "a folder of this name is there, but no finished run",
                "move it away or choose another --run-id");
        }
    }

    [GeneratedRegex(@"^[A-Za-z0-9][A-Za-z0-9._-]{0,99}\z", RegexOptions.CultureInvariant)]
    private static partial Regex RunIdPattern();

    [GeneratedRegex("[^A-Za-z0-9_-]+", RegexOptions.CultureInvariant)]
    private static partial Regex NotPlain();
}

/// <summary>A run being written. Disposing it before <see cref="Publish"/> leaves nothing of it behind.</summary>
internal sealed class StagedRun : IDisposable
{
    private readonly RunFolder folder;
    private readonly RunClaim claim;
    private readonly bool createdLake;
    private bool published;

    internal StagedRun(RunFolder folder, RunClaim claim, bool createdLake)
    {
        this.folder = folder;
        this.claim = claim;
        this.createdLake = createdLake;
    }

    /// <summary>The folder to write into.</summary>
    public string Path => folder.Staging;

    /// <summary>Writes a file beside the tables, and flushes it.</summary>
    public void Write(string name, ReadOnlySpan<byte> content)
    {
        try
        {
            Durable.WriteNew(System.IO.Path.Combine(Path, name), content);
        }
        catch (Exception error) when (LakeException.IsFileSystemError(error))
        {
            throw LakeException.From(Path, error);
        }
    }

    /// <summary>Makes the run visible: record and mark, flush, one rename.</summary>
    /// <param name="record">The content of run.json.</param>
    public void Publish(ReadOnlySpan<byte> record)
    {
        try
        {
            Durable.WriteNew(System.IO.Path.Combine(Path, RunFolder.RecordName), record);
            Durable.WriteNew(System.IO.Path.Combine(Path, RunFolder.SuccessName), []);
            foreach (string table in Directory.EnumerateDirectories(Path))
                Durable.FlushFolder(table);
            Durable.FlushFolder(Path);
            folder.RefuseForeignFolder();
            Directory.Move(Path, folder.Published);
            published = true;
            Durable.FlushFolder(folder.StagingRoot);
            Durable.FlushFolder(folder.Lake);
        }
        catch (Exception error) when (LakeException.IsFileSystemError(error))
        {
            throw LakeException.From(published ? folder.Published : Path, error);
        }
    }

    public void Dispose()
    {
        if (!published)
            RunFolder.Quietly(() => Directory.Delete(Path, recursive: true));
        RunFolder.Quietly(claim.Dispose);
        folder.RemoveEmptyFolders(createdLake);
    }
}
