// Holds a run id for one process. Invariant: a claim file that exists names a holder, and a claim is only ever taken over
// from a process of this host that is dead, by one process at a time (the file's lock), which then finds its own token in it.

using System.Diagnostics;
using System.Text.Json;

namespace ScaleResist.Cli.Lake;

/// <summary>The exclusive right to write a run; given back by <see cref="Dispose"/>, left behind by a crash.</summary>
internal sealed class RunClaim : IDisposable
{
    private const int MostAttempts = 400;
    private const int PauseMilliseconds = 5;
    private readonly string file;
    private readonly Holder holder;

    private RunClaim(string file, Holder holder)
    {
        this.file = file;
        this.holder = holder;
    }

    /// <summary>Takes the claim, or throws a <see cref="LakeException"/> that says who holds it.</summary>
    public static RunClaim Take(string file, string runId)
    {
        Holder me = Holder.Me();
        string folder = Path.GetDirectoryName(file)!;
        for (int attempt = 0; attempt < MostAttempts; attempt++)
        {
            // Here and not above: another run that ends removes the folder when it is empty.
            Directory.CreateDirectory(folder);
            try
            {
                Fill(new FileStream(file, FileMode.CreateNew, FileAccess.ReadWrite, FileShare.None), me);
                return new RunClaim(file, me);
            }
            catch (DirectoryNotFoundException)
            {
            }
            catch (IOException error) when (IsThere(error) || IsBusy(error))
            {
                if (Judge(file, runId, me))
                    return new RunClaim(file, me);
            }
        }
        throw new LakeException(file, $"run '{runId}' is being claimed by another process", "wait, or choose another --run-id");
    }

    /// <summary>Gives the claim back.</summary>
    public void Dispose()
    {
        for (int attempt = 0; attempt < MostAttempts; attempt++)
        {
            try
            {
                Holder? current;
                using (FileStream stream = new(file, FileMode.Open, FileAccess.Read, FileShare.ReadWrite | FileShare.Delete))
                    current = Holder.Read(stream);
                if (current?.Token == holder.Token)
                    File.Delete(file);
                return;
            }
            catch (Exception error) when (error is FileNotFoundException or DirectoryNotFoundException)
            {
                return; // A person removed it.
            }
            catch (IOException error) when (IsBusy(error))
            {
                Thread.Sleep(PauseMilliseconds); // Another process is judging it.
            }
        }
    }

    // Looks at an existing claim under its lock. True: it is ours. False: look again, it is gone, being judged, or was dead
    // and now names us. The look after that matters: the holder may have removed the file between our open and our lock, and
    // then we wrote to a file without a name.
    private static bool Judge(string file, string runId, Holder me)
    {
        try
        {
            using FileStream stream = new(file, FileMode.Open, FileAccess.ReadWrite, FileShare.None);
            Holder? other = Holder.Read(stream);
            if (other?.Token == me.Token)
                return true;
            if (other is not null && !other.IsDead())
            {
                throw new LakeException(file,
                    $"run '{runId}' is being written by process {other.Process} on {other.Host} since {other.Since:u}",
                    "wait for it, choose another --run-id, or remove this file if that process is gone");
            }
            stream.SetLength(0);
            me.WriteTo(stream);
        }
        catch (Exception error) when (error is FileNotFoundException or DirectoryNotFoundException)
        {
        }
        catch (IOException error) when (IsBusy(error))
        {
            Thread.Sleep(PauseMilliseconds);
        }
        return false;
    }

    private static void Fill(FileStream created, Holder me)
    {
        using FileStream stream = created;
        try
        {
            me.WriteTo(stream);
        }
        catch (IOException)
        {
            File.Delete(stream.Name); // A full disk must not leave a claim that names nobody.
            throw;
        }
    }

    // EEXIST, ERROR_FILE_EXISTS.
    private static bool IsThere(IOException error) => error.HResult is 17 or unchecked((int)0x80070050);

    // EWOULDBLOCK of a lock (Linux, macOS), ERROR_SHARING_VIOLATION, ERROR_LOCK_VIOLATION.
    private static bool IsBusy(IOException error) =>
        error.HResult is 11 or 35 or unchecked((int)0x80070020) or unchecked((int)0x80070021);

    private sealed record Holder(int Process, string Host, string ProcessStart, DateTime Since, string Token)
    {
        public static Holder Me() => new(Environment.ProcessId, Environment.MachineName, StartOf(Environment.ProcessId),
            DateTime.UtcNow, Guid.NewGuid().ToString("N"));

        public static Holder? Read(FileStream stream)
        {
            try
            {
                stream.Position = 0;
                return JsonSerializer.Deserialize<Holder>(stream);
            }
            catch (JsonException)
            {
                return null; // Its writer died between creating and filling it.
            }
        }

        public void WriteTo(FileStream stream)
        {
            stream.Position = 0;
            JsonSerializer.Serialize(stream, this);
            stream.Flush(flushToDisk: true);
        }

        public bool IsDead()
        {
            if (Host != Environment.MachineName)
                return false;
            try
            {
                using Process running = System.Diagnostics.Process.GetProcessById(Process);
                return StartOf(Process) != ProcessStart;
            }
            catch (ArgumentException)
            {
                return true;
            }
        }

        // Clock ticks since boot tell a reused process id from the old one; wall-clock start times move with the clock.
        private static string StartOf(int process)
        {
            try
            {
                string stat = File.ReadAllText($"/proc/{process}/stat");
                return stat[(stat.LastIndexOf(')') + 2)..].Split(' ')[19];
            }
            catch (IOException)
            {
                return "";
            }
        }
    }
}
