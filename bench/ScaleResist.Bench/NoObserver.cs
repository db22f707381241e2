// An observer that looks away.

using ScaleResist.Runs;

namespace ScaleResist.Bench;

internal sealed class NoObserver : IRunObserver
{
    public void Begin(string phase, double? total, string unit)
    {
    }

    public void Report(double done)
    {
    }

    public void End()
    {
    }
}
