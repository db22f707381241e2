// Random pairs and links of what the probes estimate, by seed: whom an audit asks, and by whom coordinates are judged.
// Invariant: the draw depends on network, seed and purpose alone.

using ScaleResist.Estimating;
using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Runs;

/// <summary>Draws without repetition; fewer than asked for where there are few to draw from.</summary>
/// <param name="blocks">Of the network.</param>
/// <param name="exact">What needs no probes, or null.</param>
/// <param name="seed">Of the run.</param>
/// <param name="purpose">Another purpose draws others.</param>
internal sealed class RandomPairs(Blocks blocks, ExactPart? exact, ulong seed, uint purpose)
{
    private const int TriesPerPair = 1000;
    private const uint Domain = 0x41554449; // keeps these counters apart from those of the probes
    private readonly Network network = blocks.Network;
    private readonly int[] componentOf = blocks.Network.ComponentOfNodes();
    private readonly HashSet<(int U, int V)> taken = [];
    private uint draws;

    /// <summary>Links that are neither bridges nor exact: the link's number and its ends.</summary>
    public List<(long Link, int U, int V)> Links(int count)
    {
        List<(long, int, int)> found = [];
        for (long tries = (long)count * TriesPerPair; tries > 0 && found.Count < count && network.LinkCount > 0; tries--)
        {
            long link = Below(network.LinkCount);
            int u = network.NodeOfLink(link);
            int v = network.Neighbours[network.FirstLaterArc(u) + (link - network.LinkStart[u])];
            if (!blocks.Bridges.Contains(link) && exact?.Probed[blocks.BlockOf(u, v)] != false && taken.Add((u, v)))
                found.Add((link, u, v));
        }
        return found;
    }

    /// <summary>Two random nodes of a component that is not exact as a whole, joined by no bridge.</summary>
    public List<(int U, int V)> Pairs(int count)
    {
        List<(int, int)> found = [];
        for (long tries = (long)count * TriesPerPair; tries > 0 && found.Count < count && network.NodeCount > 0; tries--)
        {
            int one = (int)Below(network.NodeCount);
            Component component = network.Components[componentOf[one]];
            int other = component.Start + (int)Below(component.Nodes);
            (int u, int v) = (Math.Min(one, other), Math.Max(one, other));
            if (u == v || exact?.HoldsComponent(componentOf[u]) == true)
                continue;
            bool bridge = network.FindArc(u, v) >= 0 && blocks.Bridges.Contains(network.LinkBetween(u, v));
            if (!bridge && taken.Add((u, v)))
                found.Add((u, v));
        }
        return found;
    }

    private long Below(long bound) => (long)Math.BigMul(Philox.Block(draws++, 0, purpose, Domain, seed).Low, (ulong)bound, out _);
}
