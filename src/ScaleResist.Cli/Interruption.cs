// Turns SIGINT, SIGTERM and SIGHUP into a cancellation. The first one ends the run in good order, a second one at once.

using System.Runtime.InteropServices;

namespace ScaleResist.Cli;

/// <summary>Listens for signals while it lives.</summary>
internal sealed class Interruption : IDisposable
{
    private readonly CancellationTokenSource source = new();
    private readonly List<PosixSignalRegistration> registrations = [];

    public Interruption()
    {
        foreach (PosixSignal signal in (PosixSignal[])[PosixSignal.SIGINT, PosixSignal.SIGTERM, PosixSignal.SIGHUP])
            registrations.Add(PosixSignalRegistration.Create(signal, OnSignal));
    }

    /// <summary>Cancelled by the first signal.</summary>
    public CancellationToken Token => source.Token;

    public void Dispose()
    {
        foreach (PosixSignalRegistration registration in registrations)
            registration.Dispose();
        source.Dispose();
    }

    private void OnSignal(PosixSignalContext context)
    {
        context.Cancel = !source.IsCancellationRequested;
        source.Cancel();
    }
}
