// A validated plan of an impact run, what it takes beside the network, and what it says when it is done.

using ScaleResist.Estimating;
using ScaleResist.Graphs;

namespace ScaleResist.Runs;

/// <summary>How an impact run computes.</summary>
public sealed record ImpactPlan
{
    /// <summary>How columns of L+ are found: by a factor where it is affordable, or by solves.</summary>
    public Route Route { get; init; } = Route.Auto;

    /// <summary>How many additions are suggested; null: cases are worked off instead.</summary>
    public int? Suggest { get; init; }

    /// <summary>What the additions may cost together; null: the largest gains are chosen whatever they cost.</summary>
    public double? Budget { get; init; }

    /// <summary>The confidence of the intervals, in (0, 1).</summary>
    public double Confidence { get; init; } = 0.95;

    /// <summary>The seed of the probes.</summary>
    public ulong Seed { get; init; } = 1;

    /// <summary>Threads to use; results do not depend on it.</summary>
    public int Threads { get; init; } = Environment.ProcessorCount;

    /// <summary>Memory in bytes that the run may be foreseen to need; null: what the machine has.</summary>
    public long? MemoryBudget { get; init; }

    internal EstimatePlan Probing => new()
    {
        Want = Want.Index,
        Route = Route,
        Confidence = Confidence,
        Seed = Seed,
        Threads = Threads,
        MemoryBudget = MemoryBudget,
    };
}

/// <summary>What a run takes beside the network.</summary>
public sealed record ImpactInputs
{
    /// <summary>Planned cases, or null where additions are suggested.</summary>
    public IReadOnlyList<PlannedCase>? Cases { get; init; }

    /// <summary>Candidates for additions; null: pairs that are far apart.</summary>
    public IReadOnlyList<Candidate>? Candidates { get; init; }

    /// <summary>Pairs whose resistance is wanted in every case, or null.</summary>
    public IReadOnlyList<(int U, int V)>? Pairs { get; init; }

    /// <summary>Node weights by internal node, finite and not negative, or null.</summary>
    public double[]? NodeWeights { get; init; }
}

/// <summary>A case in the summary.</summary>
/// <param name="Case">Its id.</param>
/// <param name="Change">The change of the index.</param>
/// <param name="Before">The index before.</param>
/// <param name="ComponentsAfter">Parts afterwards.</param>
/// <param name="NodesCutOff">Nodes outside the part that counts.</param>
public sealed record CaseLine(string Case, Estimate Change, double Before, int ComponentsAfter, int NodesCutOff);

/// <summary>A suggestion in the summary.</summary>
/// <param name="Source">Label of one end.</param>
/// <param name="Target">Label of the other.</param>
/// <param name="Conductance">What is added.</param>
/// <param name="Cost">What it costs; null where not given.</param>
/// <param name="Gain">The fall of the index.</param>
/// <param name="IndexAfter">The index after this and all before it.</param>
public sealed record SuggestionLine(string Source, string Target, double Conductance, double? Cost, double Gain, double IndexAfter);

/// <summary>What a finished impact run says of itself.</summary>
public sealed record ImpactSummary
{
    /// <summary>Nodes of the network.</summary>
    public required long Nodes { get; init; }

    /// <summary>Links of the network after cleaning.</summary>
    public required long Links { get; init; }

    /// <summary>Components, single nodes included.</summary>
    public required int Components { get; init; }

    /// <summary>Kf of the largest component as the network is.</summary>
    public required Estimate KirchhoffIndex { get; init; }

    /// <summary><c>exact</c> or <c>solve</c>.</summary>
    public required string Method { get; init; }

    /// <summary>Columns of L+.</summary>
    public required long Columns { get; init; }

    /// <summary>How many cases there are; 0 where additions are suggested.</summary>
    public required int Cases { get; init; }

    /// <summary>Of them, those that cut nodes off.</summary>
    public required int Cutting { get; init; }

    /// <summary>Five cases: those that cut off most, then those that raise the index most.</summary>
    public required IReadOnlyList<CaseLine> Worst { get; init; }

    /// <summary>The case that lowers the index most of those that cut nothing off, or null where none does.</summary>
    public required CaseLine? Best { get; init; }

    /// <summary>How many candidates there were; 0 without suggestions.</summary>
    public required int Candidates { get; init; }

    /// <summary>The first suggestions, at most ten.</summary>
    public required IReadOnlyList<SuggestionLine> Suggestions { get; init; }

    /// <summary>The factor, or null where columns were solved.</summary>
    public required ExactFacts? Exact { get; init; }

    /// <summary>Solver statistics, or null where there was a factor.</summary>
    public required SolverFacts? Solver { get; init; }

    /// <summary>The probes of the index before, or null where it is exact.</summary>
    public required ProbingFacts? Probing { get; init; }

    /// <summary>Phases in order.</summary>
    public required IReadOnlyList<PhaseTime> Phases { get; init; }
}
