// The yardstick: conjugate gradient for one right-hand side, with the library's elimination, preconditioner and node order, in plain
// scalar loops on one thread. Invariant: the steps are those of the library's panels, so what differs in time is the panel.

using System.Numerics;
using ScaleResist.Graphs;
using ScaleResist.Kernels;
using ScaleResist.Solving;

namespace ScaleResist.Bench;

/// <summary>One component, one column of T. Stops by the residual of the recurrence beside the whole right-hand side.</summary>
internal sealed class OneColumn<T>
    where T : unmanaged, IBinaryFloatingPointIeee754<T>
{
    private readonly EliminationStep[] steps;
    private readonly int[] rows; // the network's node at each row of the core
    private readonly long[] start;
    private readonly int[] neighbours;
    private readonly T[]? conductances;
    private readonly T[] strengths, inverse;
    private readonly Half? byRows, byColumns; // null: symmetric Gauss-Seidel
    private readonly T[] x, r, p, q;

    private sealed record Half(long[] Start, int[] Index, T[] Share);

    public OneColumn(Elimination elimination, Laplacian core, SampledFactor? factor)
    {
        steps = [.. elimination.Steps];
        rows = elimination.Core;
        if (factor is not null)
        {
            rows = [.. factor.Order.Select(row => elimination.Core[row])];
            core = Renumbered(core, factor.Order);
            byRows = new(factor.RowStart, factor.Predecessors, [.. factor.RowShares.Select(T.CreateTruncating)]);
            byColumns = new(factor.ColumnStart, factor.Successors, [.. factor.ColumnShares.Select(T.CreateTruncating)]);
        }
        (start, neighbours) = (core.RowStart, core.Neighbours);
        conductances = core.Conductances?.Select(T.CreateTruncating).ToArray();
        strengths = [.. core.Strengths.Select(T.CreateTruncating)];
        inverse = factor is null ? [.. strengths.Select(d => T.One / d)] : [.. factor.Inverse.Select(T.CreateTruncating)];
        int n = rows.Length;
        (x, r, p, q) = (new T[n], new T[n], new T[n], new T[n]);
    }

    public int Iterations { get; private set; }

    /// <summary>
    /// z = L+ b up to a constant, to |b - L z| &lt;= tolerance |b| by the recurrence; z is as long as the network has nodes.
    /// </summary>
    public void Solve(T[] b, T[] z, double tolerance)
    {
        double target = tolerance * tolerance * Dot(b, b);
        b.CopyTo(z, 0);
        foreach (EliminationStep step in steps)
        {
            T value = z[step.Node];
            z[step.A] += T.CreateTruncating(step.ShareA) * value;
            if (step.B >= 0)
                z[step.B] += T.CreateTruncating(step.ShareB) * value;
            if (step.C >= 0)
                z[step.C] += T.CreateTruncating(step.ShareC) * value;
        }
        for (int i = 0; i < rows.Length; i++)
            r[i] = z[rows[i]];
        Iterate(target);
        for (int i = 0; i < rows.Length; i++)
            z[rows[i]] = x[i];
        for (int i = steps.Length - 1; i >= 0; i--)
        {
            EliminationStep step = steps[i];
            T value = (T.CreateTruncating(step.Inverse) * z[step.Node]) + (T.CreateTruncating(step.ShareA) * z[step.A]);
            if (step.B >= 0)
                value += T.CreateTruncating(step.ShareB) * z[step.B];
            if (step.C >= 0)
                value += T.CreateTruncating(step.ShareC) * z[step.C];
            z[step.Node] = value;
        }
    }

    private void Iterate(double target)
    {
        Array.Clear(x);
        double rs = Precondition();
        q.CopyTo(p, 0);
        for (Iterations = 1; Iterations <= 100_000; Iterations++)
        {
            T a = T.CreateTruncating(rs / Multiply());
            double rr = 0;
            for (int i = 0; i < r.Length; i++)
            {
                x[i] += a * p[i];
                T value = r[i] - (a * q[i]);
                r[i] = value;
                rr += double.CreateTruncating(value * value);
            }
            if (rr <= target)
                return;
            double newRs = Precondition();
            T beta = T.CreateTruncating(newRs / rs);
            rs = newRs;
            for (int i = 0; i < p.Length; i++)
                p[i] = q[i] + (beta * p[i]);
        }
        throw new InvalidOperationException("the yardstick does not converge");
    }

    // q = L p; gives p'q.
    private double Multiply()
    {
        double pq = 0;
        int[] to = neighbours;
        T[] from = p;
        for (int i = 0; i < q.Length; i++)
        {
            T sum = T.Zero;
            int first = (int)start[i], end = (int)start[i + 1];
            if (conductances is null)
            {
                for (int k = first; k < end; k++)
                    sum += from[to[k]];
            }
            else
            {
                for (int k = first; k < end; k++)
                    sum += conductances[k] * from[to[k]];
            }
            T value = (strengths[i] * from[i]) - sum;
            q[i] = value;
            pq += double.CreateTruncating(value * from[i]);
        }
        return pq;
    }

    // q = M r; gives r'q.
    private double Precondition()
    {
        double rs = 0;
        if (byRows is not null)
        {
            for (int i = 0; i < q.Length; i++)
                q[i] = r[i] + Gather(byRows, i);
            for (int i = q.Length - 1; i >= 0; i--)
            {
                T value = (inverse[i] * q[i]) + Gather(byColumns!, i);
                q[i] = value;
                rs += double.CreateTruncating(value * r[i]);
            }
            return rs;
        }
        // q = (D+Lo)^-1 r, then (D+Up)^-1 D q: rows are sorted by neighbour.
        for (int i = 0; i < q.Length; i++)
        {
            T sum = r[i];
            for (int k = (int)start[i]; k < (int)start[i + 1] && neighbours[k] < i; k++)
                sum += conductances is null ? q[neighbours[k]] : conductances[k] * q[neighbours[k]];
            q[i] = inverse[i] * sum;
        }
        for (int i = q.Length - 1; i >= 0; i--)
        {
            T sum = T.Zero;
            for (int k = (int)start[i + 1] - 1; k >= (int)start[i] && neighbours[k] > i; k--)
                sum += conductances is null ? q[neighbours[k]] : conductances[k] * q[neighbours[k]];
            T value = q[i] + (inverse[i] * sum);
            q[i] = value;
            rs += double.CreateTruncating(value * r[i]);
        }
        return rs;
    }

    private T Gather(Half half, int row)
    {
        (int[] index, T[] share, T[] from) = (half.Index, half.Share, q);
        T sum = T.Zero;
        int end = (int)half.Start[row + 1];
        for (int k = (int)half.Start[row]; k < end; k++)
            sum += share[k] * from[index[k]];
        return sum;
    }

    private static double Dot(T[] a, T[] b)
    {
        double sum = 0;
        for (int i = 0; i < a.Length; i++)
            sum += double.CreateTruncating(a[i]) * double.CreateTruncating(b[i]);
        return sum;
    }

    private static Laplacian Renumbered(Laplacian laplacian, int[] order)
    {
        int n = order.Length;
        int[] place = new int[n];
        for (int i = 0; i < n; i++)
            place[order[i]] = i;
        long[] start = new long[n + 1];
        List<int> neighbours = new(laplacian.Neighbours.Length);
        List<double> conductances = new(laplacian.Neighbours.Length);
        for (int i = 0; i < n; i++)
        {
            for (long k = laplacian.RowStart[order[i]]; k < laplacian.RowStart[order[i] + 1]; k++)
            {
                neighbours.Add(place[laplacian.Neighbours[k]]);
                conductances.Add(laplacian.Conductance(k));
            }
            start[i + 1] = neighbours.Count;
        }
        return new Laplacian(start, [.. neighbours], [.. conductances], [.. order.Select(row => laplacian.Strengths[row])]);
    }
}
