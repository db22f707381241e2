// What a run ran on, and what it took at its peak.

using System.Diagnostics;
using System.Globalization;
using System.Runtime.InteropServices;
using System.Runtime.Intrinsics;

namespace ScaleResist.Cli.Report;

/// <summary>The machine, for run.json.</summary>
internal sealed record Machine
{
    public required string Os { get; init; }

    public required string Architecture { get; init; }

    public required string Processor { get; init; }

    public required int Cores { get; init; }

    /// <summary>Memory this process may use (a container's limit counts).</summary>
    public required long MemoryBytes { get; init; }

    public required string Runtime { get; init; }

    public required int SimdBits { get; init; }

    public static Machine Here() => new()
    {
        Os = RuntimeInformation.OSDescription,
        Architecture = RuntimeInformation.ProcessArchitecture.ToString().ToLowerInvariant(),
        Processor = ProcessorName(),
        Cores = Environment.ProcessorCount,
        MemoryBytes = GC.GetGCMemoryInfo().TotalAvailableMemoryBytes,
        Runtime = RuntimeInformation.FrameworkDescription,
        SimdBits = Vector512.IsHardwareAccelerated ? 512
            : Vector256.IsHardwareAccelerated ? 256
            : Vector128.IsHardwareAccelerated ? 128 : 0,
    };

    /// <summary>The most resident memory of this process so far: VmHWM where the system tells it.</summary>
    public static long PeakResidentBytes()
    {
        string? line = Lines("/proc/self/status").FirstOrDefault(l => l.StartsWith("VmHWM:", StringComparison.Ordinal));
        if (line is not null
            && long.TryParse(line["VmHWM:".Length..].Replace("kB", "").Trim(), CultureInfo.InvariantCulture, out long kilobytes))
            return kilobytes * 1024;
        using Process process = Process.GetCurrentProcess();
        return process.PeakWorkingSet64;
    }

    private static string ProcessorName()
    {
        string? line = Lines("/proc/cpuinfo").FirstOrDefault(l => l.StartsWith("model name", StringComparison.Ordinal));
        return line?.Split(':', 2)[^1].Trim() ?? Environment.GetEnvironmentVariable("PROCESSOR_IDENTIFIER") ?? "unknown";
    }

    private static string[] Lines(string file)
    {
        try
        {
            return File.ReadAllLines(file);
        }
        catch (Exception error) when (error is IOException or UnauthorizedAccessException)
        {
            return []; // Not Linux, or /proc is hidden.
        }
    }
}
