// A network whose terminals are one node: what joins two terminals drops out, what joins a node to several adds up.
// Invariant: every node of a component that holds a terminal has a place in it, and these components are one; the others are left out.

namespace ScaleResist.Graphs;

/// <summary>The components of a network that hold terminals, with all terminals shorted into one node.</summary>
public sealed class ShortedNetwork
{
    private readonly int[] placeOf;

    private ShortedNetwork(Network? network, int[] placeOf, int terminal)
    {
        Network = network;
        Terminal = terminal;
        this.placeOf = placeOf;
    }

    /// <summary>The network; null where no link is left, every node of its components being a terminal.</summary>
    public Network? Network { get; }

    /// <summary>The node that stands for all terminals.</summary>
    public int Terminal { get; }

    /// <summary>The place of a node of the original network; -1 where its component has no terminal.</summary>
    public int PlaceOf(int node) => placeOf[node];

    /// <summary>
    /// Shorts. Nodes keep their labels, the terminals that of the first by label, so that random numbers are those of the labels. O(n + m).
    /// </summary>
    /// <param name="network">The network.</param>
    /// <param name="terminals">Nodes of it, at least one; twice is once.</param>
    public static ShortedNetwork Of(Network network, IReadOnlyList<int> terminals)
    {
        NodeLabels labels = network.Labels;
        bool[] isTerminal = new bool[network.NodeCount];
        int first = terminals[0];
        foreach (int t in terminals)
        {
            isTerminal[t] = true;
            first = labels.Compare(t, first) < 0 ? t : first;
        }
        EdgeListBuilder builder = new(weighted: true);
        int[] placeOf = new int[network.NodeCount];
        Array.Fill(placeOf, -1);
        foreach (Component component in network.Components)
        {
            if (!isTerminal.AsSpan(component.Start, component.Nodes).Contains(true))
                continue;
            for (int u = component.Start; u < component.End; u++)
            {
                placeOf[u] = 0;
                for (long k = network.FirstLaterArc(u); k < network.RowStart[u + 1]; k++)
                {
                    int v = network.Neighbours[k];
                    if (isTerminal[u] && isTerminal[v])
                        continue;
                    (int from, int to) = (isTerminal[u] ? first : u, isTerminal[v] ? first : v);
                    if (labels.AreIntegers)
                        builder.Add(labels.Integers[from], labels.Integers[to], network.Conductance(k));
                    else
                        builder.Add(labels.Texts[from], labels.Texts[to], network.Conductance(k));
                }
            }
        }
        if (builder.Count == 0)
            return new ShortedNetwork(null, placeOf, 0);
        Network shorted = NetworkBuilder.Build(builder.Finish(network.Input));
        int terminal = shorted.Labels.IndexOf(labels[first]);
        for (int u = 0; u < placeOf.Length; u++)
        {
            if (placeOf[u] >= 0)
                placeOf[u] = isTerminal[u] ? terminal : Place(u);
        }
        return new ShortedNetwork(shorted, placeOf, terminal);

        int Place(int node) => labels.AreIntegers ? shorted.Labels.IndexOf(labels.Integers[node]) : shorted.Labels.IndexOf(labels.Texts[node]);
    }
}
