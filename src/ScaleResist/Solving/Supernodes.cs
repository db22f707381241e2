// Columns of a Cholesky factor with (nearly) the same structure, gathered into supernodes: from parents and counts alone, before any structure
// is formed. Maximal sets come first; then a supernode joins its parent where the zeros that are stored so stay few (Ashcraft & Grimes 1989).
// Invariant: supernodes are in post-order of their own tree, and the columns of one in the order of elimination.

namespace ScaleResist.Solving;

/// <summary>The supernodes of an elimination tree.</summary>
internal sealed class Supernodes
{
    // A merged supernode of at most so many columns may hold so large a share of zeros.
    private static readonly (int Columns, double Zeros)[] Relaxed = [(4, 0.5), (16, 0.3), (48, 0.1), (int.MaxValue, 0.05)];

    private Supernodes(int[] columns, int[] start, int[] rows, int[] parent)
    {
        Columns = columns;
        Start = start;
        Rows = rows;
        Parent = parent;
    }

    /// <summary>Positions in the order of elimination, supernode by supernode.</summary>
    public int[] Columns { get; }

    /// <summary>Offsets into <see cref="Columns"/>, one more than there are supernodes.</summary>
    public int[] Start { get; }

    /// <summary>Later columns in which each supernode has entries.</summary>
    public int[] Rows { get; }

    /// <summary>The parent of each supernode, -1 at a root.</summary>
    public int[] Parent { get; }

    /// <summary>The number of supernodes.</summary>
    public int Count => Rows.Length;

    /// <param name="parent">Of each column, -1 at a root.</param>
    /// <param name="counts">Entries of each column, the diagonal included.</param>
    /// <param name="postOrder">Of the tree.</param>
    public static Supernodes Of(int[] parent, int[] counts, int[] postOrder)
    {
        int n = postOrder.Length;
        int[] rank = new int[n];
        for (int k = 0; k < n; k++)
            rank[postOrder[k]] = k;
        int[] of = new int[n]; // by rank
        int[] size = new int[n], rows = new int[n], last = new int[n];
        int count = 0;
        for (int k = 0; k < n; k++)
        {
            int column = postOrder[k];
            if (k == 0 || parent[postOrder[k - 1]] != column || counts[postOrder[k - 1]] != counts[column] + 1)
                count++;
            of[k] = count - 1;
            size[count - 1]++;
            rows[count - 1] = counts[column] - 1;
            last[count - 1] = column;
        }
        int[] up = new int[count];
        for (int g = 0; g < count; g++)
            up[g] = parent[last[g]] < 0 ? -1 : of[rank[parent[last[g]]]];
        int[] joined = Merge(up, size, rows, count);
        return Gather(postOrder, of, joined, up, rows, count);
    }

    // joined[g] is the parent that g joins, or -1. Children come before parents, so a supernode is complete when it is weighed against its parent.
    private static int[] Merge(int[] up, int[] size, int[] rows, int count)
    {
        int[] joined = new int[count];
        long[] zeros = new long[count];
        int[] width = size.AsSpan(0, count).ToArray();
        for (int g = 0; g < count; g++)
        {
            joined[g] = -1;
            int p = up[g];
            if (p < 0)
                continue;
            long columns = (long)width[g] + width[p];
            long added = zeros[g] + zeros[p] + (width[g] * (width[p] + (long)rows[p] - rows[g]));
            long all = (columns * (columns + 1) / 2) + (columns * rows[p]);
            foreach ((int most, double share) in Relaxed)
            {
                if (columns > most)
                    continue;
                if (added <= share * all)
                {
                    joined[g] = p;
                    width[p] = (int)columns;
                    zeros[p] = added;
                }
                break;
            }
        }
        return joined;
    }

    private static Supernodes Gather(int[] postOrder, int[] of, int[] joined, int[] up, int[] rows, int count)
    {
        int[] top = new int[count], number = new int[count];
        for (int g = count - 1; g >= 0; g--)
            top[g] = joined[g] < 0 ? g : top[joined[g]];
        int kept = 0;
        for (int g = 0; g < count; g++)
            number[g] = top[g] == g ? kept++ : -1;
        int[] start = new int[kept + 1], parent = new int[kept], rowsOf = new int[kept];
        for (int k = 0; k < of.Length; k++)
            start[number[top[of[k]]] + 1]++;
        for (int g = 0; g < kept; g++)
            start[g + 1] += start[g];
        for (int g = 0; g < count; g++)
        {
            if (top[g] != g)
                continue;
            parent[number[g]] = up[g] < 0 ? -1 : number[top[up[g]]];
            rowsOf[number[g]] = rows[g];
        }
        int[] columns = new int[of.Length], cursor = start[..kept];
        for (int k = 0; k < of.Length; k++)
            columns[cursor[number[top[of[k]]]]++] = postOrder[k];
        return new Supernodes(columns, start, rowsOf, parent);
    }
}
