// How a number was found: the `method` column of every table.

namespace ScaleResist.Estimating;

/// <summary>How a resistance or an index was found.</summary>
public enum ResistanceMethod
{
    /// <summary>1/c of a link whose loss splits its component; no error.</summary>
    Bridge,

    /// <summary>By a factor of the grounded Laplacian; no error but rounding.</summary>
    Exact,

    /// <summary>By a solve with bounds on both sides.</summary>
    Solve,

    /// <summary>By random probes, with a statistical error.</summary>
    Probe,
}

/// <summary>Names of methods.</summary>
public static class ResistanceMethods
{
    /// <summary>The name in the tables: <c>bridge</c>, <c>exact</c>, <c>solve</c> or <c>probe</c>.</summary>
    public static string Name(this ResistanceMethod method) => method switch
    {
        ResistanceMethod.Bridge => "bridge",
        ResistanceMethod.Exact => "exact",
        ResistanceMethod.Solve => "solve",
        ResistanceMethod.Probe => "probe",
        _ => throw new ArgumentOutOfRangeException(nameof(method), method, "not a method"),
    };
}
