// From sums to rows: walks links in order and hands out each one's resistance, by its conductance, a factor or likelihood.

using ScaleResist.Graphs;

namespace ScaleResist.Estimating;

/// <summary>A link's result.</summary>
/// <param name="Source">Internal node, the smaller.</param>
/// <param name="Target">Internal node, the larger.</param>
/// <param name="Conductance">c.</param>
/// <param name="Resistance">R with its error.</param>
/// <param name="Method">How R was found.</param>
/// <param name="NodesCutOff">For a bridge, the nodes on the smaller side; else 0.</param>
/// <param name="LossImpact">
/// How much the Kirchhoff index of the component rises when the link is lost: n c |L+ (e_u - e_v)|^2 / (1 - p). Null for bridges, for links that are
/// bridges but for what rounding hides, and where it was not computed.
/// </param>
public readonly record struct LinkResult(
    int Source, int Target, double Conductance, Estimate Resistance, ResistanceMethod Method, int NodesCutOff, Estimate? LossImpact = null)
{
    /// <summary>Whether the link is a bridge; R = 1/c then, exactly.</summary>
    public bool IsBridge => Method == ResistanceMethod.Bridge;

    /// <summary>p = c R: the probability that a random spanning tree, drawn in proportion to its product of conductances, uses the link.</summary>
    public double SpanningProbability => Math.Min(1, Conductance * Resistance.Value);
}

/// <summary>Estimates of all links.</summary>
public sealed class LinkResistances
{
    private readonly Network network;
    private readonly Bridges bridges;
    private readonly LinkSums? sums;
    private readonly ExactResults? exact;
    private readonly LossSums? losses;
    private readonly double quantile;

    /// <summary>The links of a network whose panels are all in.</summary>
    public LinkResistances(Network network, Bridges bridges, LinkSums sums, double confidence)
        : this(network, bridges, sums, null, confidence)
    {
    }

    /// <summary>The links of a network, exact ones by their factor, the others by their panels.</summary>
    internal LinkResistances(Network network, Bridges bridges, LinkSums? sums, ExactResults? exact, double confidence, LossSums? losses = null)
    {
        this.losses = losses;
        this.exact = exact;
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
        int u = network.NodeOfLink(first);
        int nextBridge = bridges.FirstFrom(first);
        for (int i = 0; i < into.Length; i++)
        {
            long link = first + i;
            while (network.LinkStart[u + 1] <= link)
                u++;
            long arc = network.FirstLaterArc(u) + (link - network.LinkStart[u]);
            int v = network.Neighbours[arc];
            double c = network.Conductance(arc);
            if (nextBridge < bridges.Count && bridges.Links[nextBridge] == link)
            {
                into[i] = new LinkResult(u, v, c, Estimate.Exact(1 / c), ResistanceMethod.Bridge, bridges.NodesCutOff[nextBridge++]);
            }
            else if (exact is not null && exact.Holds(u, v))
            {
                double r = exact.Resistance(u, v), rise = exact.HasLosses ? exact.LossImpact(u, v, c, r) : double.NaN;
                into[i] = new LinkResult(
                    u, v, c, Estimate.Exact(r), ResistanceMethod.Exact, 0, double.IsNaN(rise) ? null : Estimate.Exact(rise));
            }
            else
            {
                Estimate resistance = sums!.Estimate(link, arc, u, quantile);
                into[i] = new LinkResult(
                    u, v, c, resistance, ResistanceMethod.Probe, 0, losses?.Estimate(link, arc, u, resistance, quantile));
            }
        }
    }
}
