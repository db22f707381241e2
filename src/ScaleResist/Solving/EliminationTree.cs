// The elimination tree of an order and the exact lengths of the factor's columns, without the factor: what an order costs, before anything is factored.
// Invariant: everything is by position in the order, every parent comes after its child, and no step recurses: paths of millions of nodes are fine.
//
// Column j of the factor has an entry in row i where j lies in the row subtree T_i, the part of the tree below i that is spanned by i and
// the neighbours of i that are eliminated before it. A count over subtrees thus needs only the leaves of each T_i, and where two
// successive leaves' paths meet.

using ScaleResist.Graphs;

namespace ScaleResist.Solving;

/// <summary>
/// Structure of the Cholesky factor of a matrix with the pattern of a Laplacian in a given order. Parents after Liu (SIAM J. Matrix Anal.
/// Appl. 11:134, 1990), counts after Gilbert, Ng and Peyton (SIAM J. Matrix Anal. Appl. 15:1075, 1994); O(arcs log n) time, O(n) memory.
/// </summary>
internal sealed class EliminationTree
{
    private EliminationTree(int[] parent, int[] postOrder, int[] columnCounts)
    {
        Parent = parent;
        PostOrder = postOrder;
        ColumnCounts = columnCounts;
        foreach (int count in columnCounts)
        {
            Entries += count;
            Operations += (long)count * count;
        }
    }

    /// <summary>n positions: the first row below the diagonal in each column of the factor, -1 at a root (one a component).</summary>
    public int[] Parent { get; }

    /// <summary>n positions, children before parents and every subtree in one run; children of one parent ascend.</summary>
    public int[] PostOrder { get; }

    /// <summary>n lengths of the factor's columns, the diagonal included.</summary>
    public int[] ColumnCounts { get; }

    /// <summary>Entries of the factor, the diagonal included.</summary>
    public long Entries { get; }

    /// <summary>Sum of the squared column lengths: about the multiplications and additions of a factorisation.</summary>
    public long Operations { get; }

    /// <summary>The tree and counts of the n x n pattern of <paramref name="laplacian"/>, nodes eliminated in the order given.</summary>
    /// <exception cref="ArgumentException">The order is no permutation of the nodes.</exception>
    public static EliminationTree Of(Laplacian laplacian, int[] order)
    {
        int[] position = PositionOf(order, laplacian.NodeCount);
        int[] parent = ParentOf(laplacian, order, position);
        int[] postOrder = PostOrderOf(parent);
        return new EliminationTree(parent, postOrder, CountsOf(laplacian, order, position, parent, postOrder));
    }

    private static int[] PositionOf(int[] order, int n)
    {
        int[] position = new int[n];
        Array.Fill(position, -1);
        for (int k = 0; k < order.Length; k++)
        {
            if ((uint)order[k] >= (uint)n || position[order[k]] >= 0)
                throw new ArgumentException($"Entry {k} of the order, {order[k]}, is out of range or comes twice.", nameof(order));
            position[order[k]] = k;
        }
        return order.Length == n ? position : throw new ArgumentException($"The order has {order.Length} of {n} nodes.", nameof(order));
    }

    // Each node's shortcut leads up its tree as grown so far; climbing from an earlier neighbour ends at the root that becomes i's child.
    private static int[] ParentOf(Laplacian laplacian, int[] order, int[] position)
    {
        int[] parent = new int[order.Length];
        int[] shortcut = new int[order.Length];
        for (int i = 0; i < order.Length; i++)
        {
            parent[i] = shortcut[i] = -1;
            for (long arc = laplacian.RowStart[order[i]]; arc < laplacian.RowStart[order[i] + 1]; arc++)
            {
                int j = position[laplacian.Neighbours[arc]];
                if (j >= i)
                    continue;
                while (shortcut[j] >= 0 && shortcut[j] != i)
                    (j, shortcut[j]) = (shortcut[j], i);
                if (shortcut[j] < 0)
                    parent[j] = shortcut[j] = i;
            }
        }
        return parent;
    }

    private static int[] PostOrderOf(int[] parent)
    {
        int n = parent.Length;
        int[] firstChild = new int[n], sibling = new int[n], postOrder = new int[n];
        Array.Fill(firstChild, -1);
        int roots = -1;
        for (int i = n - 1; i >= 0; i--)
        {
            ref int first = ref parent[i] < 0 ? ref roots : ref firstChild[parent[i]];
            (sibling[i], first) = (first, i);
        }
        int count = 0;
        for (int root = roots; root >= 0; root = sibling[root])
        {
            int i = Deepest(root);
            while (true)
            {
                postOrder[count++] = i;
                if (i == root)
                    break;
                i = sibling[i] >= 0 ? Deepest(sibling[i]) : parent[i];
            }
        }
        return postOrder;

        int Deepest(int node)
        {
            while (firstChild[node] >= 0)
                node = firstChild[node];
            return node;
        }
    }

    // Post-order visits the leaves of T_i left to right: j is a new leaf where its subtree starts after all earlier neighbours of i. Sums of
    // `counts` over subtrees: +1 at each leaf of T_i, -1 where its path meets the previous leaf's, and i's own path ends below its parent.
    private static int[] CountsOf(Laplacian laplacian, int[] order, int[] position, int[] parent, int[] postOrder)
    {
        int n = parent.Length;
        int[] rank = new int[n], firstDescendant = new int[n], counts = new int[n];
        Array.Fill(firstDescendant, -1);
        for (int k = 0; k < n; k++)
        {
            rank[postOrder[k]] = k;
            counts[postOrder[k]] = firstDescendant[postOrder[k]] < 0 ? 1 : 0;
            for (int i = postOrder[k]; i >= 0 && firstDescendant[i] < 0; i = parent[i])
                firstDescendant[i] = k;
        }
        int[] lastNeighbour = new int[n], lastLeaf = new int[n], root = new int[n];
        Array.Fill(lastNeighbour, -1);
        Array.Fill(lastLeaf, -1);
        for (int i = 0; i < n; i++)
            root[i] = i;
        foreach (int j in postOrder)
        {
            if (parent[j] >= 0)
                counts[parent[j]]--;
            for (long arc = laplacian.RowStart[order[j]]; arc < laplacian.RowStart[order[j] + 1]; arc++)
            {
                int i = position[laplacian.Neighbours[arc]];
                if (i <= j)
                    continue;
                if (firstDescendant[j] > lastNeighbour[i])
                {
                    counts[j]++;
                    if (lastLeaf[i] >= 0)
                        counts[RootOf(root, lastLeaf[i])]--;
                    lastLeaf[i] = j;
                }
                lastNeighbour[i] = rank[j];
            }
            root[j] = parent[j] >= 0 ? parent[j] : j;
        }
        for (int i = 0; i < n; i++)
        {
            if (parent[i] >= 0)
                counts[parent[i]] += counts[i];
        }
        return counts;
    }

    // The top of the part of the tree that post-order has closed so far: where the paths of two successive leaves meet.
    private static int RootOf(int[] root, int node)
    {
        int top = node;
        while (root[top] != top)
            top = root[top];
        while (root[node] != top)
            (node, root[node]) = (root[node], top);
        return top;
    }
}
