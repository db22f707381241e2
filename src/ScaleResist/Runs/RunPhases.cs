// The phases of a run: each is told to an observer, and its time kept.

using System.Diagnostics;

namespace ScaleResist.Runs;

/// <summary>Times the phases of a run and tells an observer.</summary>
internal sealed class RunPhases(IRunObserver observer)
{
    public List<PhaseTime> Times { get; } = [];

    public T Do<T>(string name, double? total, string unit, Func<T> work)
    {
        observer.Begin(name, total, unit);
        long start = Stopwatch.GetTimestamp();
        T result = work();
        Times.Add(new PhaseTime(name, Stopwatch.GetElapsedTime(start).TotalSeconds));
        observer.End();
        return result;
    }
}
