// Trees and counts against symbolic elimination on a dense pattern, and against closed forms.

using CsCheck;
using ScaleResist.DataGen.Networks;
using ScaleResist.Graphs;
using ScaleResist.Solving;

namespace ScaleResist.Tests.Solving;

public class EliminationTreeTests
{
    [Fact]
    public void Parents_and_counts_are_those_of_a_dense_symbolic_elimination()
    {
        Gen.Int[0, 100_000].Sample(
            seed =>
            {
                Random random = new(seed);
                int n = 2 + random.Next(40);
                Network network = TestNetworks.Random(n, Math.Min(n * (n - 1) / 2, n - 1 + random.Next(2 * n)), seed, decades: 0);
                int[] order = [.. Enumerable.Range(0, n)];
                random.Shuffle(order);
                EliminationTree tree = EliminationTree.Of(network.Laplacian, order);
                (int[] parent, int[] counts) = Eliminate(network, order);
                Assert.Equal(parent, tree.Parent);
                Assert.Equal(counts, tree.ColumnCounts);
                Assert.Equal(counts.Sum(c => (long)c), tree.Entries);
                Assert.Equal(counts.Sum(c => (long)c * c), tree.Operations);
            },
            iter: 500, seed: "0N0XIzNsQ0O2");
    }

    [Theory]
    [InlineData(Family.Grid, 10_000)]
    [InlineData(Family.Road, 10_000)]
    [InlineData(Family.Fringe, 2_000)]
    public void Post_order_puts_every_subtree_in_one_run_before_its_root(Family family, int nodes)
    {
        Network network = TestNetworks.Of(family, nodes);
        EliminationTree tree = EliminationTree.Of(network.Laplacian, [.. Enumerable.Range(0, network.NodeCount)]);
        int[] size = new int[nodes], rank = new int[nodes], first = new int[nodes];
        Array.Fill(first, int.MaxValue);
        for (int k = 0; k < nodes; k++)
            rank[tree.PostOrder[k]] = k;
        Assert.Equal(Enumerable.Range(0, nodes), tree.PostOrder.Order());
        foreach (int i in tree.PostOrder)
        {
            size[i]++;
            first[i] = Math.Min(first[i], rank[i]);
            Assert.Equal(rank[i] - size[i] + 1, first[i]);
            if (tree.Parent[i] < 0)
                continue;
            Assert.True(tree.Parent[i] > i && rank[tree.Parent[i]] > rank[i]);
            size[tree.Parent[i]] += size[i];
            first[tree.Parent[i]] = Math.Min(first[tree.Parent[i]], first[i]);
        }
    }

    [Fact]
    public void A_path_of_a_million_nodes_has_two_entries_a_column_from_end_to_end()
    {
        Network network = TestNetworks.Of(Family.Path, 1_000_000);
        int[] order = [.. Enumerable.Range(0, network.NodeCount).Select(label => network.Node(label))];
        EliminationTree tree = EliminationTree.Of(network.Laplacian, order);
        Assert.Equal((2 * 1_000_000) - 1, tree.Entries);
        Assert.Equal((4 * 999_999) + 1, tree.Operations);
        Assert.Equal(Enumerable.Range(0, 1_000_000), tree.PostOrder);
    }

    [Fact]
    public void A_star_fills_up_when_its_centre_goes_first_and_not_at_all_when_it_goes_last()
    {
        Network network = TestNetworks.Of(Family.Star, 300);
        int centre = network.Node(0);
        int[] leaves = [.. Enumerable.Range(0, 300).Where(u => u != centre)];
        Assert.Equal(300 * 301 / 2, EliminationTree.Of(network.Laplacian, [centre, .. leaves]).Entries);
        Assert.Equal(299 + 300, EliminationTree.Of(network.Laplacian, [.. leaves, centre]).Entries);
    }

    [Fact]
    public void An_order_that_is_no_permutation_is_refused()
    {
        Network network = TestNetworks.Of(Family.Path, 3);
        Assert.Throws<ArgumentException>(() => EliminationTree.Of(network.Laplacian, [0, 1]));
        Assert.Throws<ArgumentException>(() => EliminationTree.Of(network.Laplacian, [0, 1, 1]));
        Assert.Throws<ArgumentException>(() => EliminationTree.Of(network.Laplacian, [0, 1, 3]));
    }

    private static (int[] Parent, int[] Counts) Eliminate(Network network, int[] order)
    {
        int n = order.Length;
        bool[,] filled = new bool[n, n];
        for (int i = 0; i < n; i++)
        {
            for (int j = 0; j < n; j++)
                filled[i, j] = i == j || network.FindArc(order[i], order[j]) >= 0;
        }
        int[] parent = new int[n], counts = new int[n];
        for (int k = 0; k < n; k++)
        {
            int[] rows = [.. Enumerable.Range(k, n - k).Where(i => filled[i, k])];
            counts[k] = rows.Length;
            parent[k] = rows.Length > 1 ? rows[1] : -1;
            foreach (int i in rows)
            {
                foreach (int j in rows)
                    filled[i, j] = true;
            }
        }
        return (parent, counts);
    }
}
