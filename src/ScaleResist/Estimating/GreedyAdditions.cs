// The best links to add, one after the other, among candidates.
//
// Adding conductance c between u and v, with b = e_u - e_v, x = L+ b, R = b'x and P = diag(w) - w w'/W:
//     Kf_w falls by W c q / (1 + c R),    q = x'P x
// After an addition with y = L+ b and t = c / (1 + c R), L+ becomes L+ - t y y', so that every other candidate of the component has
//     x - t (b'y) y:    R less t (b'y)^2,    q less 2 t (b'y)(b'h) - t^2 (b'y)^2 y'P y,    h = L+ P y
// and two columns an addition keep all gains up to date. They are solved with the first L+; the additions so far follow as t y y'.
// Invariant: the candidate chosen has its gain from its own new column, not from the recurrence.

using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Estimating;

/// <summary>An addition that was chosen.</summary>
/// <param name="Candidate">The link.</param>
/// <param name="Gain">The fall of the index of its component.</param>
/// <param name="IndexAfter">That index, all additions so far in place.</param>
internal readonly record struct Addition(Candidate Candidate, double Gain, double IndexAfter);

/// <summary>Chooses additions.</summary>
internal sealed unsafe class GreedyAdditions
{
    private readonly Potentials potentials;
    private readonly Network network;
    private readonly WeightedTotals kind;
    private readonly Candidate[] candidates;
    private readonly int[] componentOf;
    private readonly double[] resistances; // R by candidate
    private readonly double[] squares; // q
    private readonly bool[] taken;
    private readonly List<(int Component, double Step, double[] Column)> added = [];

    private GreedyAdditions(Potentials potentials, WeightedTotals kind, IReadOnlyList<Candidate> candidates)
    {
        (this.potentials, this.kind, this.candidates) = (potentials, kind, [.. candidates]);
        network = potentials.Network;
        componentOf = network.ComponentOfNodes();
        (resistances, squares, taken) = (new double[candidates.Count], new double[candidates.Count], new bool[candidates.Count]);
    }

    /// <summary>Solves a column for every candidate, 16 a panel.</summary>
    /// <param name="potentials">Of the network.</param>
    /// <param name="kind">The weights of the index that is to fall.</param>
    /// <param name="candidates">Links whose ends lie in one component each.</param>
    /// <param name="threads">Threads; results do not depend on them.</param>
    /// <param name="done">Told how many are done.</param>
    /// <param name="cancel">Ends the solves.</param>
    public static GreedyAdditions Of(
        Potentials potentials, WeightedTotals kind, IReadOnlyList<Candidate> candidates, int threads, Action<double> done, CancellationToken cancel)
    {
        GreedyAdditions all = new(potentials, kind, candidates);
        int[][] panels = [.. Enumerable.Range(0, candidates.Count).GroupBy(i => all.componentOf[candidates[i].U]).OrderBy(group => group.Key)
            .SelectMany(group => group.Chunk(PanelPair.Width))];
        int next = -1, finished = 0;
        Parallel.For(0, Math.Min(threads, panels.Length), new ParallelOptions { MaxDegreeOfParallelism = threads }, _ =>
        {
            using Room room = new(potentials);
            for (int i; (i = Interlocked.Increment(ref next)) < panels.Length;)
            {
                all.Evaluate(panels[i], room, cancel);
                done(Interlocked.Add(ref finished, panels[i].Length));
            }
        });
        return all;
    }

    /// <summary>Chooses the best addition by gain, or by gain per cost within a budget, again and again.</summary>
    /// <param name="most">The most additions.</param>
    /// <param name="budget">What they may cost together; null: costs do not count.</param>
    /// <param name="cancel">Ends the solves.</param>
    public List<Addition> Choose(int most, double? budget, CancellationToken cancel)
    {
        List<Addition> chosen = [];
        double[] index = [.. kind.Index.Select(before => before.Value)];
        double left = budget ?? double.PositiveInfinity;
        using Room room = new(potentials);
        while (chosen.Count < most && Best(budget is not null, left) is int best && best >= 0)
        {
            Candidate candidate = candidates[best];
            int c = componentOf[candidate.U];
            int start = network.Components[c].Start;
            double[] y = Column(c, room, b => (b[candidate.U - start], b[candidate.V - start]) = (1, -1), cancel);
            double mean = Mean(y, c), square = 0;
            for (int u = 0; u < y.Length; u++)
                square += kind.Of(start + u) * (y[u] - mean) * (y[u] - mean);
            double resistance = y[candidate.U - start] - y[candidate.V - start];
            double step = candidate.Conductance / (1 + (candidate.Conductance * resistance));
            double gain = kind.Weight[c] * step * square;
            double[] h = Column(c, room, b =>
            {
                for (int u = 0; u < y.Length; u++)
                    b[u] = kind.Of(start + u) * (y[u] - mean);
            }, cancel);
            taken[best] = true;
            added.Add((c, step, y));
            Update(c, step, y, h, square);
            index[c] -= gain;
            left -= candidate.Cost ?? 0;
            chosen.Add(new Addition(candidate, gain, index[c]));
        }
        return chosen;
    }

    private double Gain(int i) => kind.Weight[componentOf[candidates[i].U]] * candidates[i].Conductance * squares[i]
        / (1 + (candidates[i].Conductance * resistances[i]));

    private int Best(bool perCost, double left)
    {
        int best = -1;
        double most = double.NegativeInfinity;
        for (int i = 0; i < candidates.Length; i++)
        {
            if (taken[i] || (perCost && candidates[i].Cost > left))
                continue;
            double gain = Gain(i) / (perCost ? candidates[i].Cost!.Value : 1);
            if (gain > most)
                (best, most) = (i, gain);
        }
        return best;
    }

    private void Update(int component, double step, double[] y, double[] h, double square)
    {
        int start = network.Components[component].Start;
        for (int i = 0; i < candidates.Length; i++)
        {
            (int u, int v) = (candidates[i].U - start, candidates[i].V - start);
            if (componentOf[candidates[i].U] != component)
                continue;
            double drop = y[u] - y[v], shared = step * drop;
            resistances[i] -= shared * drop;
            squares[i] -= shared * ((2 * (h[u] - h[v])) - (shared * square));
        }
    }

    private void Evaluate(int[] panel, Room room, CancellationToken cancel)
    {
        int c = componentOf[candidates[panel[0]].U];
        Component range = network.Components[c];
        for (int j = 0; j < panel.Length; j++)
        {
            room.B.At(candidates[panel[j]].U, j) = 1;
            room.B.At(candidates[panel[j]].V, j) = -1;
        }
        potentials.Solve(room.B, room.X, panel.Length, [c], room.Workspace, cancel);
        foreach (int i in panel)
        {
            room.B.Clear(candidates[i].U, candidates[i].U + 1);
            room.B.Clear(candidates[i].V, candidates[i].V + 1);
        }
        double* sums = stackalloc double[PanelPair.Half], products = stackalloc double[PanelPair.Half];
        fixed (double* w = kind.Weights)
        {
            for (int half = 0; half * PanelPair.Half < panel.Length; half++)
            {
                new Span<double>(sums, PanelPair.Half).Clear();
                new Span<double>(products, PanelPair.Half).Clear();
                GramKernels.AddRows(room.X[half].Pointer, w, range.Start, range.End, sums);
                GramKernels.AddSquares(room.X[half].Pointer, w, range.Start, range.End, products);
                for (int j = half * PanelPair.Half; j < Math.Min(panel.Length, (half + 1) * PanelPair.Half); j++)
                {
                    int lane = j % PanelPair.Half, i = panel[j];
                    resistances[i] = room.X.At(candidates[i].U, j) - room.X.At(candidates[i].V, j);
                    squares[i] = kind.Weight[c] > 0 ? products[lane] - (sums[lane] * sums[lane] / kind.Weight[c]) : 0;
                }
            }
        }
    }

    private double Mean(double[] column, int component)
    {
        double sum = 0;
        for (int u = 0; u < column.Length; u++)
            sum += kind.Of(network.Components[component].Start + u) * column[u];
        return kind.Weight[component] > 0 ? sum / kind.Weight[component] : 0;
    }

    // A column of today's L+: that of the first less the additions so far.
    private double[] Column(int component, Room room, Action<double[]> fill, CancellationToken cancel)
    {
        Component range = network.Components[component];
        double[] b = new double[range.Nodes];
        fill(b);
        for (int u = 0; u < b.Length; u++)
            room.B.At(range.Start + u, 0) = b[u];
        potentials.Solve(room.B, room.X, 1, [component], room.Workspace, cancel);
        room.B.Clear(range.Start, range.End);
        double[] column = new double[b.Length];
        for (int u = 0; u < column.Length; u++)
            column[u] = room.X.At(range.Start + u, 0);
        foreach ((int of, double step, double[] y) in added)
        {
            if (of != component)
                continue;
            double factor = 0;
            for (int u = 0; u < b.Length; u++)
                factor += y[u] * b[u];
            factor *= step;
            for (int u = 0; u < b.Length; u++)
                column[u] -= factor * y[u];
        }
        return column;
    }

    private sealed class Room(Potentials potentials) : IDisposable
    {
        public PanelPair B { get; } = new(potentials.Network.NodeCount);

        public PanelPair X { get; } = new(potentials.Network.NodeCount);

        public IDisposable Workspace { get; } = potentials.NewWorkspace();

        public void Dispose()
        {
            B.Dispose();
            X.Dispose();
            Workspace.Dispose();
        }
    }
}
