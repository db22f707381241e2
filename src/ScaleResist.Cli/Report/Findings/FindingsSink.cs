// A sink in front of another: it reads the rows that pass and hands them on. Invariant: rows pass unchanged and in order; columns are
// found by name, so that a table may gain some.

using ScaleResist.Estimating;
using ScaleResist.Runs;

namespace ScaleResist.Cli.Report.Findings;

/// <summary>Gathers findings on the way to the tables.</summary>
internal sealed class FindingsSink(ITableSink tables) : ITableSink
{
    private const int MostPairs = 20;
    private const int MostNodes = 8;
    private LinkGatherer? links;
    private TopRows<NodeRow>? closest;
    private TopRows<NodeRow>? remotest;
    private List<PairRow>? pairs;
    private long pairRows;
    private List<AuditRow>? audit;

    /// <summary>What the rows said.</summary>
    public RunFindings Findings => new(
        links?.Findings(),
        closest is null ? null : new NodeFindings(closest.Rows, remotest!.Rows),
        pairs is null ? null : new PairFindings(pairRows, pairs),
        audit);

    public ITableWriter Open(TableDefinition table)
    {
        ITableWriter writer = tables.Open(table);
        switch (table.Name)
        {
            case "links":
                links = new LinkGatherer();
                return new Reader(table, writer, links.Add);
            case "nodes":
                (closest, remotest) = (new(MostNodes), new(MostNodes));
                return new Reader(table, writer, AddNodes);
            case "pairs":
                pairs = [];
                return new Reader(table, writer, AddPairs);
            case "audit":
                audit = [];
                return new Reader(table, writer, AddAudit);
            default:
                return writer;
        }
    }

    private void AddNodes(Columns rows)
    {
        (long[] component, long[] rank) = (rows.Of<long>("component_id"), rows.Of<long>("closeness_rank"));
        for (int i = 0; i < rows.Count; i++)
        {
            if (component[i] != 0)
                continue;
            if (closest!.Takes(-rank[i]))
                closest.Offer(-rank[i], Node(rows, i));
            if (remotest!.Takes(rank[i]))
                remotest.Offer(rank[i], Node(rows, i));
        }
    }

    private static NodeRow Node(Columns rows, int i) => new(
        rows.Label("node", i), rows.Of<long>("degree")[i], rows.Of<double>("resistance_diagonal")[i],
        rows.Of<double>("resistance_diagonal_se")[i], rows.Of<double>("total_resistance")[i], rows.Of<double>("closeness")[i],
        rows.Of<long>("closeness_rank")[i], rows.Of<long>("rank_lower")[i], rows.Of<long>("rank_upper")[i], rows.Of<string>("method")[i]);

    private void AddPairs(Columns rows)
    {
        for (int i = 0; i < rows.Count && pairs!.Count < MostPairs; i++)
            pairs.Add(new PairRow(rows.Label("source", i), rows.Label("target", i), rows.Resistance(i), rows.Of<string>("method")[i]));
        pairRows += rows.Count;
    }

    private void AddAudit(Columns rows)
    {
        for (int i = 0; i < rows.Count; i++)
        {
            audit!.Add(new AuditRow(rows.Label("source", i), rows.Label("target", i), rows.Of<double>("resistance")[i],
                rows.Of<double>("reference_lower")[i], rows.Of<double>("reference_upper")[i], rows.Of<double>("relative_error")[i]));
        }
    }

    private sealed class Reader(TableDefinition table, ITableWriter writer, Action<Columns> read) : ITableWriter
    {
        public void Write(RowBatch batch)
        {
            read(new Columns(table, batch));
            writer.Write(batch);
        }

        public long Complete() => writer.Complete();
    }
}

/// <summary>A batch with its columns by name.</summary>
internal sealed class Columns(TableDefinition table, RowBatch batch)
{
    public int Count => batch.Count;

    /// <summary>A column's values; nullable ones are of the nullable type.</summary>
    public T[] Of<T>(string name)
    {
        for (int i = 0; i < table.Columns.Count; i++)
        {
            if (table.Columns[i].Name == name)
                return (T[])batch.Columns[i];
        }
        throw new InvalidOperationException($"Table '{table.Name}' has no column '{name}'.");
    }

    /// <summary>A node's label as text.</summary>
    public string Label(string name, int row)
    {
        for (int i = 0; i < table.Columns.Count; i++)
        {
            if (table.Columns[i].Name == name)
                return batch.Columns[i] is long[] integers
                    ? integers[row].ToString(System.Globalization.CultureInfo.InvariantCulture)
                    : ((string[])batch.Columns[i])[row];
        }
        throw new InvalidOperationException($"Table '{table.Name}' has no column '{name}'.");
    }

    /// <summary>The columns resistance, _se, _lower and _upper of a row.</summary>
    public Estimate Resistance(int row) => new(Of<double>("resistance")[row], Of<double>("resistance_se")[row],
        Of<double>("resistance_lower")[row], Of<double>("resistance_upper")[row]);
}

/// <summary>The rows of largest weight, in order; of equal weights the earlier.</summary>
internal sealed class TopRows<T>(int most)
{
    private readonly List<(double Weight, T Row)> rows = [];

    public IReadOnlyList<T> Rows => [.. rows.Select(entry => entry.Row)];

    /// <summary>Whether a row of this weight would have a place.</summary>
    public bool Takes(double weight) => rows.Count < most || weight > rows[^1].Weight;

    /// <summary>Takes a row that <see cref="Takes"/> has a place for.</summary>
    public void Offer(double weight, T row)
    {
        int at = rows.Count;
        while (at > 0 && rows[at - 1].Weight < weight)
            at--;
        rows.Insert(at, (weight, row));
        if (rows.Count > most)
            rows.RemoveAt(most);
    }
}
