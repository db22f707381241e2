// Measures the phases of a run, time and memory, on their way to whatever shows them.

using ScaleResist.Cli.Report;
using ScaleResist.Runs;

namespace ScaleResist.Cli.Progress;

/// <summary>A phase and what it took.</summary>
/// <param name="Name">The phase.</param>
/// <param name="Seconds">Wall-clock seconds.</param>
/// <param name="PeakResidentBytes">The most memory resident by its end.</param>
internal sealed record PhaseUse(string Name, double Seconds, long PeakResidentBytes);

/// <summary>Records the wall time of each phase; a phase that comes back adds up.</summary>
internal sealed class PhaseClock(IRunObserver view, TimeProvider time) : IRunObserver
{
    private readonly List<PhaseUse> phases = [];
    private readonly Lock gate = new();
    private string? current;
    private long since;

    /// <summary>The phases so far, in order of first appearance.</summary>
    public IReadOnlyList<PhaseUse> Phases
    {
        get
        {
            lock (gate)
                return [.. phases];
        }
    }

    /// <summary>The same without memory.</summary>
    public IReadOnlyList<PhaseTime> Times => [.. Phases.Select(phase => new PhaseTime(phase.Name, phase.Seconds))];

    public void Begin(string phase, double? total, string unit)
    {
        Stop();
        lock (gate)
        {
            current = phase;
            since = time.GetTimestamp();
        }
        view.Begin(phase, total, unit);
    }

    public void Report(double done) => view.Report(done);

    public void End()
    {
        Stop();
        view.End();
    }

    private void Stop()
    {
        lock (gate)
        {
            if (current is null)
                return;
            long peak = Machine.PeakResidentBytes();
            double seconds = time.GetElapsedTime(since).TotalSeconds;
            int known = phases.FindIndex(p => p.Name == current);
            if (known < 0)
                phases.Add(new PhaseUse(current, seconds, peak));
            else
                phases[known] = phases[known] with { Seconds = phases[known].Seconds + seconds, PeakResidentBytes = peak };
            current = null;
        }
    }
}
