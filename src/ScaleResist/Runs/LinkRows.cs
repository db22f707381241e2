// The links table, batch by batch, with Foster's sum and the most critical links gathered on the way.
// Invariant: source is the end with the smaller label; every link of the network appears once.

using ScaleResist.Estimating;
using ScaleResist.Graphs;

namespace ScaleResist.Runs;

/// <summary>Walks all links once.</summary>
internal sealed class LinkRows
{
    private const int BatchRows = 1 << 20;
    private const int PartRows = 1 << 14;
    private readonly Network network;
    private readonly CriticalLinks critical = new();

    private LinkRows(Network network)
    {
        this.network = network;
        FosterSums = new double[network.Components.Count];
    }

    /// <summary>Sum of spanning probabilities by component.</summary>
    public double[] FosterSums { get; }

    /// <summary>The bridges that cut off most, then the links whose loss raises the Kirchhoff index most; ranked where rows were written.</summary>
    public IReadOnlyList<CriticalLink> Critical => critical.Show(network.Labels);

    /// <summary>Estimates every link, adds up, and writes rows where a writer is given.</summary>
    public static LinkRows Walk(
        Network network, LinkResistances resistances, ITableWriter? writer, int threads, IRunObserver observer,
        CancellationToken cancel)
    {
        LinkRows rows = new(network);
        LinkResult[] results = new LinkResult[Math.Min(BatchRows, network.LinkCount)];
        int component = 0;
        for (long first = 0; first < network.LinkCount; first += BatchRows)
        {
            cancel.ThrowIfCancellationRequested();
            int count = (int)Math.Min(BatchRows, network.LinkCount - first);
            Batch? batch = writer is null ? null : new Batch(network.Labels, count);
            int parts = (count + PartRows - 1) / PartRows;
            Parallel.For(0, parts, new ParallelOptions { MaxDegreeOfParallelism = threads }, part =>
            {
                int from = part * PartRows;
                Span<LinkResult> span = results.AsSpan(from, Math.Min(PartRows, count - from));
                resistances.Fill(first + from, span);
                batch?.Put(from, span);
            });
            for (int i = 0; i < count; i++)
            {
                while (results[i].Source >= network.Components[component].End)
                    component++;
                rows.FosterSums[component] += results[i].Conductance * results[i].Resistance.Value;
                if (batch is not null)
                    rows.critical.Add(results[i]);
                batch?.Component[i] = component;
            }
            if (batch is not null)
                writer!.Write(batch.ToRows());
            observer.Report(first + count);
        }
        if (writer is not null)
            rows.critical.Rank(resistances, network.LinkCount, threads, cancel);
        return rows;
    }

    private sealed class Batch(NodeLabels labels, int count)
    {
        private readonly Array source = LabelColumns.New(labels, count);
        private readonly Array target = LabelColumns.New(labels, count);
        private readonly double[] conductance = new double[count];
        private readonly double[] resistance = new double[count];
        private readonly double[] error = new double[count];
        private readonly double[] lower = new double[count];
        private readonly double[] upper = new double[count];
        private readonly double[] spanning = new double[count];
        private readonly bool[] isBridge = new bool[count];
        private readonly long?[] cutOff = new long?[count];
        private readonly double?[] impact = new double?[count];
        private readonly double?[] impactError = new double?[count];
        private readonly string[] method = new string[count];

        public long[] Component { get; } = new long[count];

        public static (int Source, int Target) InLabelOrder(NodeLabels labels, in LinkResult link) =>
            labels.Compare(link.Source, link.Target) < 0 ? (link.Source, link.Target) : (link.Target, link.Source);

        public void Put(int row, ReadOnlySpan<LinkResult> links)
        {
            foreach (ref readonly LinkResult link in links)
            {
                (int from, int to) = InLabelOrder(labels, link);
                LabelColumns.Put(labels, source, row, from);
                LabelColumns.Put(labels, target, row, to);
                conductance[row] = link.Conductance;
                resistance[row] = link.Resistance.Value;
                error[row] = link.Resistance.StandardError;
                lower[row] = link.Resistance.Lower;
                upper[row] = link.Resistance.Upper;
                spanning[row] = link.SpanningProbability;
                isBridge[row] = link.IsBridge;
                cutOff[row] = link.IsBridge ? link.NodesCutOff : null;
                impact[row] = link.LossImpact?.Value;
                impactError[row] = link.LossImpact?.StandardError;
                method[row] = link.Method.Name();
                row++;
            }
        }

        public RowBatch ToRows() => new(count,
        [
            source, target, Component, conductance, resistance, error, lower, upper, spanning, isBridge, cutOff,
            impact, impactError, method,
        ]);
    }
}
