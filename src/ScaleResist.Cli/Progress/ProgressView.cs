// Work with its progress on the error stream: a live bar on a terminal, timed lines elsewhere.

using ScaleResist.Runs;

namespace ScaleResist.Cli.Progress;

/// <summary>Chooses how progress is shown.</summary>
internal static class ProgressView
{
    /// <summary>Runs work that tells its progress.</summary>
    public static void Follow(CliHost host, Action<IRunObserver> work)
    {
        if (host.LiveProgress)
        {
            LiveProgress.Follow(host.Error, work);
            return;
        }
        using PlainProgress progress = new(host.Error, host.Time);
        work(progress);
        progress.Release();
    }
}
