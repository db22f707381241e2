// Planned cases the slow way: the changed network as a dense matrix, its parts by search, indices and resistances by MathNet.Numerics.
// Invariant: shares nothing with the library but the network and the case as read.

using MathNet.Numerics.LinearAlgebra;
using ScaleResist.Graphs;

namespace ScaleResist.Tests.Runs;

/// <summary>What a case does, by dense recomputation.</summary>
internal sealed class DenseCases
{
    private readonly Network network;
    private readonly double[,] before;

    public DenseCases(Network network)
    {
        this.network = network;
        before = new double[network.NodeCount, network.NodeCount];
        for (int u = 0; u < network.NodeCount; u++)
        {
            for (long k = network.RowStart[u]; k < network.RowStart[u + 1]; k++)
                before[u, network.Neighbours[k]] = network.Conductance(k);
        }
    }

    public sealed record Result(
        double Before, double After, int Parts, int CutOff, double WeightedBefore, double WeightedAfter, double[] Pairs);

    /// <summary>Applies a case; w are node weights.</summary>
    public Result Apply(PlannedCase planned, double[] w, IReadOnlyList<(int U, int V)> pairs)
    {
        double[,] after = (double[,])before.Clone();
        foreach (LinkChange link in planned.Links)
            after[link.U, link.V] = after[link.V, link.U] = link.After;
        bool[] lost = new bool[network.NodeCount];
        foreach (int u in planned.LostNodes)
        {
            lost[u] = true;
            for (int v = 0; v < network.NodeCount; v++)
                after[u, v] = after[v, u] = 0;
        }
        int[] componentOf = network.ComponentOfNodes();
        IEnumerable<int> touched = planned.Links.SelectMany(link => new[] { link.U, link.V }).Concat(planned.LostNodes);
        int[] area = [.. touched.Select(u => componentOf[u]).Distinct().Order()];
        int[] first = [.. Enumerable.Range(0, network.NodeCount).Where(u => componentOf[u] == area[0])];
        List<int[]> parts = Parts(after, lost, u => area.Contains(componentOf[u]));
        int[] main = parts.Where(part => part.Any(u => componentOf[u] == area[0])).OrderByDescending(part => part.Length)
            .ThenBy(part => part.Min(u => network.Labels.Integers[u])).FirstOrDefault() ?? [];
        int cutOff = first.Count(u => !lost[u] && !main.Contains(u));
        Dictionary<int, (int[] Part, Matrix<double> Inverse)> inverses = [];
        double[] found = [.. pairs.Select(pair => Between(pair.U, pair.V))];
        return new Result(Index(before, first, _ => 1), Index(after, main, _ => 1), parts.Count, cutOff,
            Index(before, first, u => w[u]), Index(after, main, u => w[u]), found);

        double Between(int u, int v)
        {
            if (lost[u] || lost[v])
                return double.PositiveInfinity;
            if (u == v)
                return 0;
            int[] part = Parts(after, lost, _ => true).First(nodes => nodes.Contains(u));
            if (!part.Contains(v))
                return double.PositiveInfinity;
            if (!inverses.TryGetValue(part[0], out (int[] Part, Matrix<double> Inverse) known))
                inverses[part[0]] = known = (part, PseudoInverse(after, part));
            return known.Inverse.Resistance(Array.IndexOf(known.Part, u), Array.IndexOf(known.Part, v));
        }
    }

    private static List<int[]> Parts(double[,] conductances, bool[] lost, Func<int, bool> inArea)
    {
        int n = lost.Length;
        bool[] seen = new bool[n];
        List<int[]> parts = [];
        for (int root = 0; root < n; root++)
        {
            if (seen[root] || lost[root] || !inArea(root))
                continue;
            List<int> part = [root];
            seen[root] = true;
            for (int i = 0; i < part.Count; i++)
            {
                for (int v = 0; v < n; v++)
                {
                    if (conductances[part[i], v] > 0 && !seen[v])
                    {
                        seen[v] = true;
                        part.Add(v);
                    }
                }
            }
            parts.Add([.. part]);
        }
        return parts;
    }

    private static Matrix<double> PseudoInverse(double[,] conductances, int[] part)
    {
        int n = part.Length;
        Matrix<double> laplacian = Matrix<double>.Build.Dense(n, n, (i, j) => i == j ? 0 : -conductances[part[i], part[j]]);
        Vector<double> strengths = -laplacian.RowSums();
        laplacian.SetDiagonal(strengths);
        // Any multiple of 11'/n has the same inverse on the rest; one of the size of the strengths loses the fewest digits.
        double size = n == 1 ? 1 : strengths.Average();
        return laplacian.Add(size / n).Cholesky().Solve(Matrix<double>.Build.DenseIdentity(n)).Subtract(1 / (size * n));
    }

    private static double Index(double[,] conductances, int[] part, Func<int, double> w)
    {
        if (part.Length <= 1)
            return 0;
        Matrix<double> inverse = PseudoInverse(conductances, part);
        Vector<double> weights = Vector<double>.Build.Dense(part.Length, i => w(part[i]));
        return (weights.Sum() * weights.PointwiseMultiply(inverse.Diagonal()).Sum()) - (weights * inverse * weights);
    }
}

/// <summary>A table in memory.</summary>
internal sealed class MemoryRows(params string[][] rows) : INamedRows
{
    private int row = -1;

    public string Path => "changes.csv";

    public long Line => row + 2;

    public string this[int column] => column < rows[row].Length ? rows[row][column] : "";

    public bool Has(int column) => column < rows[0].Length;

    public bool Read() => ++row < rows.Length;

    public void Dispose()
    {
    }
}
