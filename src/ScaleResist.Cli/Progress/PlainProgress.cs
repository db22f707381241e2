// Progress for logs: one line when a phase first begins, then at most one every few seconds.
// Invariant: nothing is written in the first second, so that a run refused at once says why in its first line.

using ScaleResist.Cli.Report;
using ScaleResist.Runs;

namespace ScaleResist.Cli.Progress;

/// <summary>Writes timed lines.</summary>
internal sealed class PlainProgress : IRunObserver, IDisposable
{
    private static readonly TimeSpan Grace = TimeSpan.FromSeconds(1);
    private static readonly TimeSpan Pause = TimeSpan.FromSeconds(5);
    private readonly TextWriter to;
    private readonly TimeProvider time;
    private readonly Lock gate = new();
    private readonly long started;
    private readonly ITimer timer;
    private readonly HashSet<string> seen = [];
    private long lastLine;
    private string phase = "";
    private double? total;
    private string unit = "";
    private List<string>? held = [];

    public PlainProgress(TextWriter to, TimeProvider time)
    {
        this.to = to;
        this.time = time;
        started = time.GetTimestamp();
        timer = time.CreateTimer(_ => Release(), null, Grace, Timeout.InfiniteTimeSpan);
    }

    /// <summary>Writes what was held back; called when the first second is over, or when the run has ended well before.</summary>
    public void Release()
    {
        lock (gate)
        {
            foreach (string line in held ?? [])
                to.WriteLine(line);
            held = null;
        }
    }

    public void Dispose()
    {
        lock (gate)
            held = []; // what was still held back belongs to a run that was refused
        timer.Dispose();
    }

    public void Begin(string phase, double? total, string unit)
    {
        lock (gate)
        {
            (this.phase, this.total, this.unit) = (phase, total, unit);
            if (seen.Add(phase))
                Line(total is double all ? $"{phase} {Numbers.Amount(all, unit)}" : phase);
        }
    }

    public void Report(double done)
    {
        lock (gate)
        {
            if (time.GetElapsedTime(lastLine) < Pause)
                return;
            string amount = Numbers.Amount(done, unit == "bytes" ? unit : "");
            Line(total is double all and > 0
                ? $"{phase}: {amount} of {Numbers.Amount(all, unit)} ({100 * done / all:0} %)"
                : $"{phase}: {Numbers.Amount(done, unit)}");
        }
    }

    public void End()
    {
    }

    private void Line(string text)
    {
        lastLine = time.GetTimestamp();
        string line = FormattableString.Invariant($"[{time.GetElapsedTime(started).TotalSeconds,8:0.0} s] {text}");
        if (held is null)
            to.WriteLine(line);
        else
            held.Add(line);
    }
}
