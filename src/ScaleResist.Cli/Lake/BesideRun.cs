// Resistances of another run of the same lake, for the pairs at hand: from its pairs, else from its links.
// Invariant: a pair that the other run does not have stays NaN; the order of its ends does not matter.

using ScaleResist.Graphs;

namespace ScaleResist.Cli.Lake;

/// <summary>Reads what stands beside distances.</summary>
internal static class BesideRun
{
    private static readonly RowRequest Columns = new()
    {
        Labels = 2,
        Number = NumberColumn.Required,
        Columns = ["source", "target", "resistance"],
    };

    /// <summary>The resistance of each pair in a run, NaN where the run has none.</summary>
    /// <exception cref="InputException">There is no such run, or it has neither pairs nor links.</exception>
    public static double[] Resistances(
        string lake, string run, NodeLabels labels, IReadOnlyList<(int Source, int Target)> pairs, CancellationToken ct)
    {
        RunFolder folder = new(lake, run);
        if (!folder.IsPublished)
            throw new InputException(folder.Published, null, "no finished run is there", "name a run of estimate in the same lake with --beside");
        double[] resistances = new double[pairs.Count];
        Array.Fill(resistances, double.NaN);
        ILookup<(int, int), int> wanted =
            Enumerable.Range(0, pairs.Count).ToLookup(i => (Math.Min(pairs[i].Source, pairs[i].Target), Math.Max(pairs[i].Source, pairs[i].Target)));
        string[] tables = [.. new[] { "links", "pairs" }.Select(t => Path.Combine(folder.Published, t)).Where(Directory.Exists)];
        if (tables.Length == 0)
        {
            throw new InputException(folder.Published, null, "the run has neither pairs nor links",
                "estimate the pairs (--pairs FILE), or name another run with --beside");
        }
        foreach (string table in tables) // pairs last: where both have a pair, they were asked for
        {
            using IRowSource rows = NetworkInput.Open(table, Columns, null, ct);
            while (rows.Read(out Row row))
            {
                int u = row.AreIntegers ? labels.IndexOf(row.FirstInteger) : labels.IndexOf(row.First);
                int v = row.AreIntegers ? labels.IndexOf(row.SecondInteger) : labels.IndexOf(row.Second);
                foreach (int i in wanted[(Math.Min(u, v), Math.Max(u, v))])
                    resistances[i] = row.Number;
            }
        }
        return resistances;
    }
}
