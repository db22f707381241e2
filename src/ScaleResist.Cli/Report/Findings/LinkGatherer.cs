// Reads the links table as it passes: counts into bins, keeps the rows to look at first. A few nanoseconds a row.
// Invariant: linear bins of spanning probability where they tell links apart, else logarithmic ones; both are always counted.

namespace ScaleResist.Cli.Report.Findings;

/// <summary>Gathers <see cref="LinkFindings"/>.</summary>
internal sealed class LinkGatherer
{
    private const int MostBins = 40;
    private const int MostRows = 10;
    private readonly LogBins resistances = new();
    private readonly LogBins probabilities = new();
    private readonly LogBins errors = new();
    private readonly long[] counts = new long[MostBins];
    private readonly long[] bridgeCounts = new long[MostBins];
    private readonly SortedDictionary<string, long> methods = new(StringComparer.Ordinal);
    private readonly TopRows<LinkRow> bridges = new(MostRows);
    private readonly TopRows<LinkRow> others = new(MostRows);
    private readonly TopRows<LinkRow> losses = new(MostRows);

    /// <summary>Reads a batch.</summary>
    public void Add(Columns rows)
    {
        (double[] resistance, double[] error) = (rows.Of<double>("resistance"), rows.Of<double>("resistance_se"));
        (double[] probability, bool[] isBridge) = (rows.Of<double>("spanning_probability"), rows.Of<bool>("is_bridge"));
        (long?[] cutOff, double?[] impact) = (rows.Of<long?>("nodes_cut_off"), rows.Of<double?>("loss_impact"));
        string[] method = rows.Of<string>("method");
        string counted = "";
        long run = 0;
        for (int i = 0; i < rows.Count; i++)
        {
            resistances.Add(resistance[i], isBridge[i]);
            probabilities.Add(probability[i], isBridge[i]);
            errors.Add(error[i] / resistance[i]);
            int bin = Math.Clamp((int)(probability[i] * MostBins), 0, MostBins - 1);
            counts[bin]++;
            bridgeCounts[bin] += isBridge[i] ? 1 : 0;
            if (method[i] != counted)
            {
                Count(counted, run);
                (counted, run) = (method[i], 0);
            }
            run++;
            TopRows<LinkRow> top = isBridge[i] ? bridges : others;
            double weight = isBridge[i] ? cutOff[i] ?? 0 : probability[i];
            if (top.Takes(weight))
                Offer(top, weight, rows, i);
            if (impact[i] is double loss && losses.Takes(loss))
                Offer(losses, loss, rows, i);
        }
        Count(counted, run);
    }

    /// <summary>What was read.</summary>
    public LinkFindings Findings() => new()
    {
        Methods = methods,
        SpanningProbability = SpanningProbability(),
        Resistance = Range("log", resistances, resistances.Show(MostBins)),
        RelativeError = errors.Total == 0 ? null : new ErrorBounds(errors.Total, errors.Bound(0.5), errors.Bound(0.95)),
        Bridges = bridges.Rows,
        Others = others.Rows,
        Losses = losses.Rows,
    };

    private static void Offer(TopRows<LinkRow> top, double weight, Columns rows, int i) => top.Offer(weight, new LinkRow(
        rows.Label("source", i), rows.Label("target", i), rows.Of<double>("conductance")[i], rows.Resistance(i),
        rows.Of<double>("spanning_probability")[i], rows.Of<long?>("nodes_cut_off")[i], rows.Of<double?>("loss_impact")[i],
        rows.Of<double?>("loss_impact_se")[i], rows.Of<string>("method")[i]));

    private static Histogram Range(string scale, LogBins range, IReadOnlyList<Bin> bins) =>
        new(scale, range.Total == 0 ? null : range.Least, range.Total == 0 ? null : range.Most, bins);

    // Where most links share the lowest tenth, as in social networks, a linear axis would show one bar.
    private Histogram SpanningProbability()
    {
        bool crowded = counts.AsSpan(0, MostBins / 10).Sum() > 0.7 * probabilities.Total;
        if (crowded)
            return Range("log", probabilities, probabilities.Show(MostBins));
        return Range("linear", probabilities,
        [
            .. counts.Select((count, i) => new Bin((double)i / MostBins, (i + 1.0) / MostBins, count, bridgeCounts[i])),
        ]);
    }

    private void Count(string method, long rows)
    {
        if (rows > 0)
            methods[method] = methods.GetValueOrDefault(method) + rows;
    }
}
