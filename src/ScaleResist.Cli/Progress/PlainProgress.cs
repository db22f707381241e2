// Progress for logs: one line when a phase first begins, then at most one every few seconds.

using ScaleResist.Cli.Report;
using ScaleResist.Runs;

namespace ScaleResist.Cli.Progress;

/// <summary>Writes timed lines.</summary>
internal sealed class PlainProgress(TextWriter to, TimeProvider time) : IRunObserver
{
    private static readonly TimeSpan Pause = TimeSpan.FromSeconds(5);
    private readonly Lock gate = new();
    private readonly long started = time.GetTimestamp();
    private readonly HashSet<string> seen = [];
    private long lastLine;
    private string phase = "";
    private double? total;
    private string unit = "";

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
        to.WriteLine(FormattableString.Invariant($"[{time.GetElapsedTime(started).TotalSeconds,8:0.0} s] {text}"));
    }
}
