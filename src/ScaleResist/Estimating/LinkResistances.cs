// From sums to rows: walks links in order and hands out each one's resistance, bridges exactly, the others by likelihood.

using ScaleResist.Graphs;

namespace ScaleResist.Estimating;

/// <summary>A link's result.</summary>
/// <param name="Source">Internal node, the smaller.</param>
/// <param name="Target">Internal node, the larger.</param>
/// <param name="Conductance">c.</param>
/// <param name="Resistance">R with its error.</param>
/// <param name="NodesCutOff">For a bridge, the nodes on the smaller side; else 0.</param>
public readonly record struct LinkResult(int Source, int Target, double Conductance, Estimate Resistance, int NodesCutOff)
{
    /// <summary>Whether the link is a bridge; R = 1/c then, exactly.</summary>
    public bool IsBridge => NodesCutOff > 0;

    /// <summary>p = c R: the probability that a random spanning tree, drawn in proportion to its product of conductances, uses the link.</summary>
    public double SpanningProbability => Math.Min(1, Conductance * Resistance.Value);
}

/// <summary>Estimates of all links.</summary>
public sealed class LinkResistances
{
    private readonly Network network;
    private readonly Bridges bridges;
    private readonly LinkSums sums;
    private readonly double quantile;

    /// <summary>The links of a network whose panels are all in.</summary>
    public LinkResistances(Network network, Bridges bridges, LinkSums sums, double confidence)
    {
        this.network = network;
        this.bridges = bridges;
        this.sums = sums;
        quantile = Quantiles.Normal(confidence);
    }

    /// <summary>
    /// The links whose numbers lie in <c>first .. first + into.Length - 1</c>. Safe from several threads.
    /// </summary>
    public void Fill(long first, Span<LinkResult> into)
    {
        int u = NodeOfLink(first);
        int nextBridge = bridges.FirstFrom(first);
        for (int i = 0; i < into.Length; i++)
        {
            long link = first + i;
            while (network.LinkStart[u + 1] <= link)
                u++;
            long arc = network.FirstLaterArc(u) + (link - network.LinkStart[u]);
            int cutOff = 0;
            Estimate resistance;
            double c = network.Conductance(arc);
            if (nextBridge < bridges.Count && bridges.Links[nextBridge] == link)
            {
                cutOff = bridges.NodesCutOff[nextBridge++];
                resistance = Estimating.Estimate.Exact(1 / c);
            }
            else
            {
                resistance = sums.Estimate(link, arc, u, quantile);
            }
            into[i] = new LinkResult(u, network.Neighbours[arc], c, resistance, cutOff);
        }
    }

    private int NodeOfLink(long link)
    {
        // The last node whose links begin at or before this one and that has any.
        int low = 0, high = network.NodeCount - 1;
        while (low < high)
        {
            int middle = low + ((high - low + 1) / 2);
            if (network.LinkStart[middle] <= link)
                low = middle;
            else
                high = middle - 1;
        }
        return low;
    }
}
