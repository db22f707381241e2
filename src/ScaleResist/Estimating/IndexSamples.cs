// One index over all components: the weights of its pairs, what of it is known, and a sample a probe of the rest.
// Invariant: known part + mean sample is unbiased, whatever the directions of a deflation.

using ScaleResist.Graphs;

namespace ScaleResist.Estimating;

/// <summary>
/// The sum of w_u w_v R(u,v) over the pairs of each component, split over blocks: W sum w [k^2 / d + E x^2], k = 1 - w_B / W less what a deflation
/// takes, beside exact blocks and the exact part of a deflation.
/// </summary>
/// <param name="hanging">The weights that hang off the nodes of each block.</param>
/// <param name="choose">The index of an exact block.</param>
internal sealed class IndexSamples(HangingWeights hanging, Func<(double Plain, double ByStrength, double ByWeight), double> choose)
{
    private double[] known = [];
    private double[] knownOfProbed = []; // of it, the blocks that have a probed part too
    private RunningMoments[] moments = [];
    private DeflatedShares? deflated;

    /// <summary>The weights.</summary>
    public HangingWeights Hanging => hanging;

    /// <summary>k of a node in the block of which it is a member.</summary>
    public double MemberShare(int node, int component) =>
        Share(hanging.OfMember(node), hanging.Total(component)) - (deflated?.OfMembers[node] ?? 0);

    /// <summary>k of a block's head.</summary>
    public double HeadShare(int block, int component) =>
        Share(hanging.OfHead(block), hanging.Total(component)) - (deflated?.OfHeads[block] ?? 0);

    /// <summary>The shares of a deflation, to be filled; <see cref="FindKnown"/> comes after.</summary>
    public DeflatedShares Deflate(int nodes, int blocks) => deflated ??= new DeflatedShares(hanging, nodes, blocks);

    /// <summary>Adds up what needs no probes.</summary>
    public void FindKnown(Blocks blocks, BlockRows rows, ExactBlocks? exact)
    {
        int components = blocks.Network.Components.Count;
        known = new double[components];
        knownOfProbed = new double[components];
        if (moments.Length == 0)
            moments = new RunningMoments[components];
        for (int c = 0; c < components; c++)
        {
            (int first, int end) = blocks.OfComponent(c);
            for (int b = first; b < end; b++)
            {
                if (exact?.Has(b) == true)
                {
                    known[c] += choose(exact.Index(b));
                    continue;
                }
                double sum = hanging.OfHead(b) * Square(HeadShare(b, c)) / rows.OfHead(b);
                foreach (int v in blocks.Members(b))
                    sum += hanging.OfMember(v) * Square(MemberShare(v, c)) / rows.OfMember(v);
                double part = hanging.Total(c) * (sum + (deflated?.Parts.GetValueOrDefault(b) ?? 0));
                known[c] += part;
                if (!blocks.IsBridge(b))
                    knownOfProbed[c] += part;
            }
        }

        static double Square(double k) => k * k;
    }

    /// <summary>Adds a probe's sum of w x^2 over a component.</summary>
    public void Add(int component, double sum) => moments[component].Add(hanging.Total(component) * sum);

    /// <summary>Forgets the samples.</summary>
    public void Clear() => Array.Clear(moments);

    /// <summary>Standard error over value, foreseen for so many probes.</summary>
    public double RelativeError(int component, int probes)
    {
        double error = moments[component].StandardErrorOf(probes);
        return error > 0 ? error / (known[component] + moments[component].Mean) : 0;
    }

    /// <summary>The index with its interval, Student t after the samples' skewness.</summary>
    /// <param name="component">Of the network.</param>
    /// <param name="confidence">Of the interval.</param>
    /// <param name="solverError">Mean square of the mode errors of the probes.</param>
    public Estimate Estimate(int component, double confidence, double solverError)
    {
        RunningMoments probed = moments[component];
        if (probed.Count == 0 || probed.Mean == 0)
            return Estimating.Estimate.Exact(known[component]);
        double value = known[component] + probed.Mean;
        (double lower, double upper) = probed.Interval(Quantiles.Student(confidence, probed.Count - 1));
        return new Estimate(value, probed.StandardError, known[component] + Math.Max(0, lower), known[component] + upper)
            .WithBias(solverError * (knownOfProbed[component] + probed.Mean), known[component]);
    }

    private static double Share(double weight, double total) => total > 0 ? Math.Max(0, 1 - (weight / total)) : 1;
}
