// The one door for input of any form: a folder or a .parquet file goes to Parquet, everything else to text.
// Invariant: the readers behind it are the same for both, so the rules on labels and numbers are too.

using ScaleResist.Graphs;

namespace ScaleResist.Cli.Lake;

/// <summary>Reads links, pairs and node weights of any form.</summary>
internal static class NetworkInput
{
    /// <summary>Reads a network's links.</summary>
    /// <exception cref="InputException">The input cannot be used.</exception>
    public static EdgeList Read(string path, ReadOptions options, Action<long>? bytesRead = null, CancellationToken ct = default)
    {
        using IRowSource rows = Open(path, EdgeListReader.Request(path, options), bytesRead, ct);
        return EdgeListReader.Read(rows, options.Weights);
    }

    /// <summary>Reads pairs of nodes as dense indices, in file order.</summary>
    /// <exception cref="InputException">The input cannot be used.</exception>
    public static List<(int Source, int Target)> ReadPairs(
        string path, NodeLabels labels, IReadOnlyList<string>? columns = null, CancellationToken ct = default)
    {
        using IRowSource rows = Open(path, PairReader.Request(columns), null, ct);
        return PairReader.Read(rows, labels);
    }

    /// <summary>Reads a weight for every node, by dense index.</summary>
    /// <exception cref="InputException">The input cannot be used.</exception>
    public static double[] ReadNodeWeights(
        string path, NodeLabels labels, IReadOnlyList<string>? columns = null, CancellationToken ct = default)
    {
        using IRowSource rows = Open(path, NodeWeightReader.Request(columns), null, ct);
        return NodeWeightReader.Read(rows, labels);
    }

    /// <summary>Reads nodes as dense indices, ascending, each once.</summary>
    /// <exception cref="InputException">The input cannot be used.</exception>
    public static List<int> ReadTerminals(string path, NodeLabels labels, CancellationToken ct = default)
    {
        using IRowSource rows = Open(path, TerminalReader.Request(), null, ct);
        return TerminalReader.Read(rows, labels);
    }

    /// <summary>Reads planned cases.</summary>
    /// <exception cref="InputException">The input cannot be used.</exception>
    public static List<PlannedCase> ReadChanges(string path, Network network, CancellationToken ct = default)
    {
        using INamedRows rows = OpenNamed(path, ChangeReader.Columns, ct);
        return ChangeReader.Read(rows, network);
    }

    /// <summary>Reads candidates for additions.</summary>
    /// <exception cref="InputException">The input cannot be used.</exception>
    public static List<Candidate> ReadCandidates(string path, Network network, CancellationToken ct = default)
    {
        using INamedRows rows = OpenNamed(path, CandidateReader.Columns, ct);
        return CandidateReader.Read(rows, network);
    }

    private static INamedRows OpenNamed(string path, NamedColumns columns, CancellationToken ct) =>
        path.EndsWith(".parquet", StringComparison.OrdinalIgnoreCase)
            ? ParquetNamedRows.Open(path, columns, ct)
            : NamedTextRows.Open(path, columns, ct);

    /// <summary>Reads nodes as dense indices, in file order, each once.</summary>
    /// <exception cref="InputException">The input cannot be used.</exception>
    public static int[] ReadNodes(string path, NodeLabels labels, CancellationToken ct = default)
    {
        using IRowSource rows = Open(path, NodeReader.Request, null, ct);
        return NodeReader.Read(rows, labels);
    }

    /// <summary>Opens input of any form as rows.</summary>
    public static IRowSource Open(
        string path, RowRequest request, Action<long>? bytesRead = null, CancellationToken ct = default) =>
        Directory.Exists(path) || path.EndsWith(".parquet", StringComparison.OrdinalIgnoreCase)
            ? ParquetRows.Open(path, request, bytesRead, ct)
            : TextRows.Open(path, request, bytesRead, ct);
}
