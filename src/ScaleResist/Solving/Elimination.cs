// Exact elimination of nodes of degree 1, 2 and 3 (series, pendant and star-mesh laws), before anything iterates.
// Invariant: for any b, forward substitution, a solve on the core and back-substitution give the solution of the whole system exactly.
//
// Eliminating v with neighbours i of conductance c_i and d = sum c_i joins its neighbours by c_i c_j / d and passes b on:
//     b_i += (c_i / d) b_v                          (forward, in order)
//     x_v  = b_v / d + sum (c_i / d) x_i            (back, in reverse)
// A node is looked at once more when it is eliminated, so the work is linear in the arcs, around hubs too.

using System.Collections.Concurrent;
using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Solving;

/// <summary>The steps of an elimination and the core that is left.</summary>
internal sealed class Elimination
{
    private const int MostDegree = 3;
    private readonly Laplacian laplacian;
    private readonly int start;
    private readonly int[] degree;
    private readonly bool[] gone;
    private readonly FillLinks fill;
    private readonly Queue<int>[] ready = [new(), new(), new()];

    private Elimination(Laplacian laplacian, Component component)
    {
        this.laplacian = laplacian;
        start = component.Start;
        degree = new int[component.Nodes];
        gone = new bool[component.Nodes];
        fill = new FillLinks(component.Nodes);
        Steps = [];
        Core = [];
    }

    /// <summary>Steps in order, in the numbering of the Laplacian.</summary>
    public List<EliminationStep> Steps { get; }

    /// <summary>The nodes that are left, ascending, in the numbering of the Laplacian.</summary>
    public int[] Core { get; private set; }

    /// <summary>Eliminates what can be eliminated of a component; at least one node is left.</summary>
    public static Elimination Of(Laplacian laplacian, Component component)
    {
        Elimination elimination = new(laplacian, component);
        elimination.Run();
        elimination.Core = new int[component.Nodes - elimination.Steps.Count];
        for (int v = 0, i = 0; v < component.Nodes; v++)
        {
            if (!elimination.gone[v])
                elimination.Core[i++] = component.Start + v;
        }
        return elimination;
    }

    private void Run()
    {
        for (int v = 0; v < degree.Length; v++)
        {
            degree[v] = (int)(laplacian.RowStart[start + v + 1] - laplacian.RowStart[start + v]);
            MarkReady(v);
        }
        Span<int> nodes = stackalloc int[MostDegree];
        Span<double> weights = stackalloc double[MostDegree];
        while (Next(out int v))
        {
            int count = Gather(v, nodes, weights);
            Eliminate(v, nodes[..count], weights[..count]);
        }
    }

    private bool Next(out int node)
    {
        for (int d = 1; d <= MostDegree; d++)
        {
            while (ready[d - 1].TryDequeue(out node))
            {
                if (!gone[node] && degree[node] == d)
                    return true;
            }
        }
        node = -1;
        return false;
    }

    private void MarkReady(int node)
    {
        if (degree[node] is >= 1 and <= MostDegree)
            ready[degree[node] - 1].Enqueue(node);
    }

    // The neighbours that are left, parallel links added up.
    private int Gather(int v, Span<int> nodes, Span<double> weights)
    {
        int count = 0;
        for (long k = laplacian.RowStart[start + v]; k < laplacian.RowStart[start + v + 1]; k++)
        {
            int u = laplacian.Neighbours[k] - start;
            if (!gone[u])
                Put(u, laplacian.Conductance(k), nodes, weights);
        }
        for (int link = fill.First(v); link >= 0; link = fill.Next(link))
        {
            if (!gone[fill.To(link)])
                Put(fill.To(link), fill.Weight(link), nodes, weights);
        }
        return count;

        void Put(int node, double weight, Span<int> nodes, Span<double> weights)
        {
            for (int i = 0; i < count; i++)
            {
                if (nodes[i] == node)
                {
                    weights[i] += weight;
                    return;
                }
            }
            nodes[count] = node;
            weights[count++] = weight;
        }
    }

    private void Eliminate(int v, ReadOnlySpan<int> nodes, ReadOnlySpan<double> weights)
    {
        double d = 0;
        foreach (double weight in weights)
            d += weight;
        gone[v] = true;
        Steps.Add(new EliminationStep(
            start + v, start + nodes[0], nodes.Length > 1 ? start + nodes[1] : -1, nodes.Length > 2 ? start + nodes[2] : -1,
            weights[0] / d, nodes.Length > 1 ? weights[1] / d : 0, nodes.Length > 2 ? weights[2] / d : 0, 1 / d));
        for (int i = 0; i < nodes.Length; i++)
            degree[nodes[i]]--;
        for (int i = 0; i < nodes.Length; i++)
        {
            for (int j = i + 1; j < nodes.Length; j++)
            {
                double c = weights[i] * weights[j] / d;
                if (fill.TryAddTo(nodes[i], nodes[j], c, gone))
                    continue;
                fill.Add(nodes[i], nodes[j], c);
                if (!AreLinked(nodes[i], nodes[j]))
                {
                    degree[nodes[i]]++;
                    degree[nodes[j]]++;
                }
            }
        }
        foreach (int node in nodes)
            MarkReady(node);
    }

    private bool AreLinked(int u, int v)
    {
        long uStart = laplacian.RowStart[start + u], vStart = laplacian.RowStart[start + v];
        long uLength = laplacian.RowStart[start + u + 1] - uStart, vLength = laplacian.RowStart[start + v + 1] - vStart;
        return uLength <= vLength
            ? laplacian.Neighbours.AsSpan((int)uStart, (int)uLength).BinarySearch(start + v) >= 0
            : laplacian.Neighbours.AsSpan((int)vStart, (int)vLength).BinarySearch(start + u) >= 0;
    }

    /// <summary>The Laplacian of the core, in the order of <see cref="Core"/>.</summary>
    public Laplacian BuildCore()
    {
        int n = Core.Length;
        int[] place = new int[gone.Length];
        long[] rowStart = new long[n + 1];
        for (int i = 0; i < n; i++)
        {
            place[Core[i] - start] = i;
            rowStart[i + 1] = rowStart[i] + degree[Core[i] - start];
        }
        int[] neighbours = new int[rowStart[n]];
        double[] conductances = new double[rowStart[n]];
        double[] strengths = new double[n];
        Parallel.ForEach(Partitioner.Create(0, n), range =>
        {
            for (int i = range.Item1; i < range.Item2; i++)
                BuildRow(i);
        });
        return new Laplacian(rowStart, neighbours, conductances, strengths);

        // The links that were there come in order; what elimination added may be parallel to one of them, but not to each other.
        void BuildRow(int i)
        {
            int v = Core[i] - start;
            Span<int> to = neighbours.AsSpan((int)rowStart[i], degree[v]);
            Span<double> weights = conductances.AsSpan((int)rowStart[i], degree[v]);
            int count = 0;
            for (long k = laplacian.RowStart[start + v]; k < laplacian.RowStart[start + v + 1]; k++)
            {
                int u = laplacian.Neighbours[k] - start;
                if (gone[u])
                    continue;
                to[count] = place[u];
                weights[count++] = laplacian.Conductance(k);
            }
            int original = count;
            for (int link = fill.First(v); link >= 0; link = fill.Next(link))
            {
                if (gone[fill.To(link)])
                    continue;
                int u = place[fill.To(link)], same = to[..original].BinarySearch(u);
                if (same >= 0)
                {
                    weights[same] += fill.Weight(link);
                    continue;
                }
                to[count] = u;
                weights[count++] = fill.Weight(link);
            }
            if (count != degree[v])
                throw new InvalidOperationException("A degree of the core was miscounted.");
            if (count > original)
                to.Sort(weights);
            foreach (double weight in weights)
                strengths[i] += weight;
        }
    }
}
