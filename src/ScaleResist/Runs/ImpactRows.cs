// The tables of an impact run: one row a case, one a case and pair, one a suggestion.

using ScaleResist.Estimating;
using ScaleResist.Graphs;

namespace ScaleResist.Runs;

/// <summary>Writes cases as they come, in their order.</summary>
internal sealed class ImpactRows
{
    private readonly Network network;
    private readonly IReadOnlyList<PlannedCase> cases;
    private readonly (int U, int V)[] pairs;
    private readonly string method;
    private readonly bool integers;
    private readonly ITableWriter writer;
    private readonly ITableWriter? ofPairs;

    /// <summary>Opens the tables.</summary>
    public ImpactRows(
        Network network, IReadOnlyList<PlannedCase> cases, (int U, int V)[] pairs, string method, ITableSink sink, bool withPairs)
    {
        (this.network, this.cases, this.pairs, this.method) = (network, cases, pairs, method);
        integers = cases.All(planned => NodeLabels.TryCanonicalInteger(planned.Id, out _));
        ColumnKind id = integers ? ColumnKind.Int64 : ColumnKind.Text;
        writer = sink.Open(Tables.Impact(id));
        ofPairs = withPairs ? sink.Open(Tables.ImpactPairs(id, LabelColumns.KindOf(network.Labels))) : null;
    }

    /// <summary>Writes some cases that follow each other.</summary>
    public void Write(int first, CaseImpact[] found)
    {
        writer.Write(new RowBatch(found.Length,
        [
            Ids(found.Length, i => first + i), Column(i => (long)cases[first + i].Rows), Column(i => found[i].Before.Value),
            Column(i => found[i].After), Column(i => found[i].Change.Value), Column(i => found[i].Change.StandardError),
            Column(i => found[i].Change.Lower), Column(i => found[i].Change.Upper), Column(i => (long)found[i].ComponentsAfter),
            Column(i => (long)found[i].NodesCutOff), Column(i => found[i].Change.StandardError > 0 ? ResistanceMethod.Probe.Name() : method),
            Column(i => found[i].Before.StandardError), Column(i => found[i].Weighted?.Before), Column(i => found[i].Weighted?.After),
        ]));
        const int BatchRows = 1 << 20;
        long rows = (long)found.Length * pairs.Length;
        for (long from = 0; from < rows && ofPairs is not null; from += BatchRows)
            WritePairs(first, found, from, (int)Math.Min(BatchRows, rows - from));

        T[] Column<T>(Func<int, T> value) => [.. Enumerable.Range(0, found.Length).Select(value)];
    }

    /// <summary>Waits until all rows are stored.</summary>
    public long Complete() => writer.Complete() + (ofPairs?.Complete() ?? 0);

    /// <summary>Writes the table of suggestions.</summary>
    public static long WriteSuggestions(Network network, List<Addition> additions, string method, ITableSink sink)
    {
        ITableWriter writer = sink.Open(Tables.Suggestions(LabelColumns.KindOf(network.Labels)));
        Array source = LabelColumns.New(network.Labels, additions.Count), target = LabelColumns.New(network.Labels, additions.Count);
        for (int i = 0; i < additions.Count; i++)
        {
            LabelColumns.Put(network.Labels, source, i, additions[i].Candidate.U);
            LabelColumns.Put(network.Labels, target, i, additions[i].Candidate.V);
        }
        writer.Write(new RowBatch(additions.Count,
        [
            Column((_, i) => i + 1L), source, target, Column((a, _) => a.Candidate.Conductance), Column((a, _) => a.Candidate.Cost),
            Column((a, _) => a.Gain), new double[additions.Count], Column((a, _) => a.Gain / a.Candidate.Cost), Column((a, _) => a.IndexAfter),
            Column((_, _) => method),
        ]));
        return writer.Complete();

        T[] Column<T>(Func<Addition, int, T> value) => [.. additions.Select(value)];
    }

    private void WritePairs(int first, CaseImpact[] found, long from, int count)
    {
        Array source = LabelColumns.New(network.Labels, count), target = LabelColumns.New(network.Labels, count);
        double[] before = new double[count], after = new double[count], change = new double[count];
        string[] how = new string[count];
        for (int row = 0; row < count; row++)
        {
            int at = (int)((from + row) / pairs.Length), pair = (int)((from + row) % pairs.Length);
            LabelColumns.Put(network.Labels, source, row, pairs[pair].U);
            LabelColumns.Put(network.Labels, target, row, pairs[pair].V);
            (before[row], after[row]) = found[at].Pairs[pair];
            // Infinite before and after: nothing changed.
            change[row] = before[row] == after[row] ? 0 : after[row] - before[row];
            how[row] = method;
        }
        ofPairs!.Write(new RowBatch(count,
            [Ids(count, row => first + (int)((from + row) / pairs.Length)), source, target, before, after, change, new double[count], how]));
    }

    private Array Ids(int count, Func<int, int> caseOf)
    {
        if (!integers)
            return Enumerable.Range(0, count).Select(i => cases[caseOf(i)].Id).ToArray();
        return Enumerable.Range(0, count)
            .Select(i => NodeLabels.TryCanonicalInteger(cases[caseOf(i)].Id, out long id) ? id : throw new InvalidOperationException()).ToArray();
    }
}
