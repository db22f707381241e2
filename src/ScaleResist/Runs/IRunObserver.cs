// How a run tells what it is doing. The command line draws a bar or prints timed lines; a library user may ignore it.

namespace ScaleResist.Runs;

/// <summary>Follows a run. Calls may come from several threads.</summary>
public interface IRunObserver
{
    /// <summary>A phase begins; phases do not nest.</summary>
    /// <param name="phase">What is being done, such as <c>reading</c> or <c>solving</c>.</param>
    /// <param name="total">The amount of work in <paramref name="unit"/>, or null where it is not known.</param>
    /// <param name="unit">What is counted, such as <c>bytes</c>, <c>probes</c> or <c>links</c>.</param>
    void Begin(string phase, double? total, string unit);

    /// <summary>The work done so far in the phase.</summary>
    void Report(double done);

    /// <summary>The phase that last began is over.</summary>
    void End();
}
