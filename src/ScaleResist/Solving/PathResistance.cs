// The resistance between any two nodes from a factor: only the fronts on their two paths to the root take part.
//
// Eliminating panel after panel from b = e_u - e_v leaves R = b'M b = sum over panels K of y_K' G y_K, all of them squares (G is the inverse
// of K's own grounded block), while y_N += W y_K carries the current on to the later nodes N.
// Invariant: y is zero between calls, for every row that a front writes belongs to a front further up the path, which clears it.

namespace ScaleResist.Solving;

/// <summary>Resistances of pairs by one factor; for one thread at a time.</summary>
internal sealed unsafe class PathResistance
{
    private const int Panel = Kernels.DenseKernels.Tile;
    private readonly CholeskyFactor factor;
    private readonly SymbolicCholesky symbolic;
    private readonly int[] frontOf;
    private readonly double[] y;

    /// <summary>Prepares for a factor: O(n) memory.</summary>
    public PathResistance(CholeskyFactor factor)
    {
        this.factor = factor;
        symbolic = factor.Symbolic;
        y = new double[symbolic.Nodes.Length];
        frontOf = new int[symbolic.Nodes.Length];
        frontOf[^1] = -1; // the ground
        for (int f = 0; f < symbolic.Count; f++)
            frontOf.AsSpan(symbolic.First[f], symbolic.Own(f)).Fill(f);
    }

    /// <summary>R(u,v) of two rows of the factor's Laplacian in one component, the ground's included. O(entries of both paths).</summary>
    public double Between(int u, int v)
    {
        int one = symbolic.Places[u], other = symbolic.Places[v];
        y[one] += 1;
        y[other] -= 1;
        y[^1] = 0;
        double energy = 0;
        for (int f = frontOf[one], g = frontOf[other]; f >= 0 || g >= 0;)
        {
            // The lower number first: parents come after their children.
            int next = f < 0 ? g : g < 0 ? f : Math.Min(f, g);
            energy += Eliminate(next);
            f = f == next ? symbolic.Parent[f] : f;
            g = g == next ? symbolic.Parent[g] : g;
        }
        y[^1] = 0;
        return energy;
    }

    private double Eliminate(int front)
    {
        int s = symbolic.Own(front), r = symbolic.RowCount(front);
        double energy = 0;
        double* value = factor.Values + symbolic.ValueStart[front];
        fixed (double* all = y)
        fixed (int* rows = symbolic.Rows)
        {
            int* later = rows + symbolic.RowStart[front];
            for (int j = 0; j < s; j += Panel)
            {
                int q = Math.Min(Panel, s - j), following = s - j - q;
                double* own = all + symbolic.First[front] + j;
                for (int i = 0; i < q; i++)
                {
                    double sum = 0;
                    for (int k = 0; k < q; k++)
                        sum += *value++ * own[k];
                    energy += own[i] * sum;
                }
                for (int i = 0; i < following + r; i++)
                {
                    double sum = 0;
                    for (int k = 0; k < q; k++)
                        sum += *value++ * own[k];
                    *(i < following ? own + q + i : all + later[i - following]) += sum;
                }
                new Span<double>(own, q).Clear();
            }
        }
        return energy;
    }
}
