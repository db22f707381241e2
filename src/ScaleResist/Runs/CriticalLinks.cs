// The links that a person reads of: the bridges that cut off most, then the links whose loss raises the Kirchhoff index most.
// Invariant: a rank counts all links of the network that are no bridges; rank_lower .. rank_upper holds every rank the intervals allow.

using ScaleResist.Estimating;
using ScaleResist.Graphs;

namespace ScaleResist.Runs;

/// <summary>Gathers links in the order of their numbers, then ranks those that were kept.</summary>
internal sealed class CriticalLinks
{
    private const int MostBridges = 5;
    private const int MostLosses = 20;
    private const int PartRows = 1 << 14;
    private readonly List<(double Weight, LinkResult Link)> bridges = [], losses = [];
    private readonly List<(int Lower, int Upper)> ranks = [];
    private bool probed;

    /// <summary>Looks at a link.</summary>
    public void Add(in LinkResult link)
    {
        probed |= link.LossImpact is { StandardError: > 0 };
        if (link.IsBridge)
            Keep(bridges, MostBridges, link.NodesCutOff, link);
        else if (link.LossImpact is Estimate impact)
            Keep(losses, MostLosses, impact.Value, link);
    }

    /// <summary>
    /// Finds the ranks that the intervals allow, in a second pass over all links: those surely above begin above a link's interval, those perhaps
    /// above end within or above it. Where all is exact, no pass is needed.
    /// </summary>
    public void Rank(LinkResistances resistances, long links, int threads, CancellationToken cancel)
    {
        if (!probed)
        {
            ranks.AddRange(Enumerable.Range(1, losses.Count).Select(rank => (rank, rank)));
            return;
        }
        int[] above = new int[losses.Count], perhaps = new int[losses.Count];
        Lock gate = new();
        int parts = (int)((links + PartRows - 1) / PartRows);
        Parallel.For(
            0, parts, new ParallelOptions { MaxDegreeOfParallelism = threads, CancellationToken = cancel },
            () => (Rows: new LinkResult[PartRows], Above: new int[losses.Count], Perhaps: new int[losses.Count]),
            (part, _, own) =>
            {
                long first = (long)part * PartRows;
                Span<LinkResult> rows = own.Rows.AsSpan(0, (int)Math.Min(PartRows, links - first));
                resistances.Fill(first, rows);
                foreach (ref readonly LinkResult row in rows)
                {
                    if (row.LossImpact is Estimate impact)
                        Count(impact, own.Above, own.Perhaps);
                }
                return own;
            },
            own =>
            {
                lock (gate)
                {
                    for (int i = 0; i < above.Length; i++)
                        (above[i], perhaps[i]) = (above[i] + own.Above[i], perhaps[i] + own.Perhaps[i]);
                }
            });
        ranks.AddRange(above.Zip(perhaps, (one, other) => (one + 1, other)));
    }

    /// <summary>What was kept, bridges first.</summary>
    public IReadOnlyList<CriticalLink> Show(NodeLabels labels) =>
    [
        .. bridges.Select(entry => Show(labels, entry.Link, null)),
        .. losses.Select((entry, i) => Show(labels, entry.Link, i)),
    ];

    private void Count(in Estimate impact, int[] above, int[] perhaps)
    {
        for (int i = 0; i < above.Length; i++)
        {
            Estimate kept = losses[i].Link.LossImpact!.Value;
            above[i] += impact.Lower > kept.Upper ? 1 : 0;
            perhaps[i] += impact.Upper >= kept.Lower ? 1 : 0;
        }
    }

    private static void Keep(List<(double Weight, LinkResult Link)> list, int most, double weight, in LinkResult link)
    {
        if (list.Count == most && weight <= list[^1].Weight)
            return;
        int at = list.Count;
        while (at > 0 && list[at - 1].Weight < weight)
            at--;
        list.Insert(at, (weight, link));
        if (list.Count > most)
            list.RemoveAt(most);
    }

    private CriticalLink Show(NodeLabels labels, in LinkResult link, int? place)
    {
        bool ordered = labels.Compare(link.Source, link.Target) < 0;
        return new CriticalLink
        {
            Source = labels[ordered ? link.Source : link.Target],
            Target = labels[ordered ? link.Target : link.Source],
            Resistance = link.Resistance,
            SpanningProbability = link.SpanningProbability,
            NodesCutOff = link.IsBridge ? link.NodesCutOff : null,
            LossImpact = link.LossImpact,
            LossRank = place is int i ? i + 1 : null,
            LossRankLower = place is int j ? ranks[j].Lower : null,
            LossRankUpper = place is int k ? ranks[k].Upper : null,
        };
    }
}
