// A validated plan of an estimate run: what is wanted and how. Raw options are the command line's affair.

using ScaleResist.Estimating;

namespace ScaleResist.Runs;

/// <summary>The tables an estimate can write.</summary>
[Flags]
public enum Want
{
    /// <summary>Nothing.</summary>
    None = 0,

    /// <summary>One row a component: the Kirchhoff index and its kin.</summary>
    Index = 1,

    /// <summary>One row a node: its component.</summary>
    Components = 2,

    /// <summary>One row a node: its diagonal entry of L+, closeness and rank.</summary>
    Nodes = 4,

    /// <summary>One row a link: resistance, spanning probability, bridges.</summary>
    Links = 8,

    /// <summary>One row a requested pair.</summary>
    Pairs = 16,

    /// <summary>One row a node: coordinates from which any pair's resistance follows.</summary>
    Coordinates = 32,
}

/// <summary>How resistances are found.</summary>
public enum Route
{
    /// <summary>Exactly where a factor is affordable, block by block, else by probes.</summary>
    Auto,

    /// <summary>Exactly, or not at all.</summary>
    Exact,

    /// <summary>By probes, but for bridges.</summary>
    Probe,
}

/// <summary>What an estimate run computes.</summary>
public sealed record EstimatePlan
{
    /// <summary>The probes used where the user names no number.</summary>
    public const int DefaultProbes = 64;

    /// <summary>The most probes that a target error may take.</summary>
    public const int LargestProbes = 4096;

    /// <summary>The tables wanted.</summary>
    public Want Want { get; init; } = Want.Index | Want.Components | Want.Nodes | Want.Links;

    /// <summary>How.</summary>
    public Route Route { get; init; } = Route.Auto;

    /// <summary>
    /// The number of probes K, at least 4, where anything is probed; null: as many as the target error takes and the time budget allows, without
    /// either <see cref="DefaultProbes"/>.
    /// </summary>
    public int? Probes { get; init; }

    /// <summary>
    /// The relative standard error, in (0, 1), that 95 % of the probed rows of each table stay below; null: no target. Not with <see cref="Probes"/>.
    /// </summary>
    public double? TargetError { get; init; }

    /// <summary>
    /// Whether K is known only at the end: where a target error or a time budget decides. A time budget alone does not where coordinates are wanted,
    /// whose memory and file grow with K.
    /// </summary>
    public bool EndIsOpen => Probes is null && (TargetError is not null || (TimeBudget is not null && !Want.HasFlag(Want.Coordinates)));

    /// <summary>
    /// The run ends after so many panels, yet prepares, solves and deflates as if all its probes were to come, and measures their errors; null: no trial.
    /// </summary>
    internal int? TrialPanels { get; init; }

    /// <summary>Panels solved side by side; null: as many as threads.</summary>
    internal int? PanelsAtOnce { get; init; }

    /// <summary>The most probes the run can take.</summary>
    public int MostProbes => Probes ?? (EndIsOpen ? LargestProbes : DefaultProbes);

    /// <summary>
    /// About how many it will take: with a target E, 0.1 / E^2, from a relative standard error of 0.22 sqrt(2/K); what time allows, nobody knows.
    /// </summary>
    public int ForeseenProbes => TargetError is double error
        ? (int)Math.Clamp(0.1 / (error * error), 2 * ProbePanel.Width, LargestProbes)
        : Probes ?? DefaultProbes;

    /// <summary>The confidence of the intervals, in (0, 1).</summary>
    public double Confidence { get; init; } = 0.95;

    /// <summary>The seed of all random signs.</summary>
    public ulong Seed { get; init; } = 1;

    /// <summary>Threads to use; results do not depend on it.</summary>
    public int Threads { get; init; } = Environment.ProcessorCount;

    /// <summary>Seconds that the automatic route gives to exactness: what is foreseen to take longer is probed.</summary>
    public double AffordableSeconds { get; init; } = 120;

    /// <summary>Time that the run may take; null: as long as it takes. Probes that nobody named end in time; what else is foreseen not to fit is refused.</summary>
    public TimeSpan? TimeBudget { get; init; }

    /// <summary>Memory in bytes that the run may be foreseen to need; null: what the machine has.</summary>
    public long? MemoryBudget { get; init; }

    /// <summary>
    /// The solver error allowed in any mode of z, relative to the mode's standard deviation; null: a twentieth of the relative statistical
    /// error sqrt(2/K) of a mode's square, so that solver errors stay below a tenth of the error bars.
    /// </summary>
    public double? ModeError { get; init; }

    /// <summary>
    /// The mode error in force for a panel. Where K is known only at the end, panel i gets half of what K = 16 (i+1) would:
    /// the sum of (i+1)^(-1/2) over P panels is below 2 P^(1/2), so that the mean over the panels keeps to the twentieth wherever the run stops.
    /// </summary>
    public double ModeErrorOf(int panel) => ModeError ?? SoundModeErrorOf(panel);

    /// <summary>The same without <see cref="ModeError"/>: what the error bars need, and an audit demands.</summary>
    internal double SoundModeErrorOf(int panel) =>
        EndIsOpen ? 0.025 * Math.Sqrt(2.0 / (ProbePanel.Width * (panel + 1.0))) : 0.05 * Math.Sqrt(2.0 / MostProbes);
}
