// What the structure foretells: counts against elimination of a dense pattern, rows among the parent's, memory against the process's own.

using System.Globalization;
using ScaleResist.DataGen.Networks;
using ScaleResist.Graphs;
using ScaleResist.Solving;

namespace ScaleResist.Tests.Solving;

public class SymbolicCholeskyTests
{
    [Fact]
    public void Counted_entries_are_those_of_a_dense_symbolic_elimination()
    {
        for (int seed = 1; seed <= 60; seed++)
        {
            Random random = new(seed);
            int n = random.Next(2, 70);
            Network network = TestNetworks.Random(n, Math.Min(n * (n - 1) / 2, random.Next(n - 1, 3 * n)), seed, 0);
            int[] order = [.. Enumerable.Range(0, n)];
            random.Shuffle(order);
            SymbolicCholesky symbolic = SymbolicCholesky.Of(network.Laplacian, order);
            Assert.Equal(DenseEntries(network, order), symbolic.Entries);
            AssertSound(network, symbolic);
        }
    }

    private static long DenseEntries(Network network, int[] order)
    {
        int n = order.Length;
        bool[,] linked = new bool[n, n];
        for (int i = 0; i < n; i++)
        {
            for (int j = 0; j < n; j++)
                linked[i, j] = network.FindArc(order[i], order[j]) >= 0;
        }
        long entries = 0;
        for (int k = 0; k < n - 1; k++)
        {
            int[] later = [.. Enumerable.Range(k + 1, n - 2 - k).Where(i => linked[i, k])];
            entries += 1 + later.Length;
            foreach (int i in later)
            {
                foreach (int j in later)
                    linked[i, j] |= i != j;
            }
        }
        return entries;
    }

    // The structure holds the factor's pattern in the order of its places, and every row is the parent's.
    private static void AssertSound(Network network, SymbolicCholesky symbolic)
    {
        int ground = network.NodeCount - 1;
        Assert.Equal(ground, symbolic.First[^1]);
        Assert.Equal(Enumerable.Range(0, network.NodeCount), symbolic.Nodes.Order());
        Assert.True(symbolic.StoredEntries >= symbolic.Entries);
        for (int f = 0; f < symbolic.Count; f++)
        {
            int[] rows = symbolic.Rows[(int)symbolic.RowStart[f]..(int)symbolic.RowStart[f + 1]];
            Assert.Equal(rows.Order(), rows);
            Assert.Equal(symbolic.Parent[f] < 0, rows.Length == 0);
            for (int place = symbolic.First[f]; place < symbolic.First[f + 1]; place++)
            {
                int node = symbolic.Nodes[place];
                for (long k = network.RowStart[node]; k < network.RowStart[node + 1]; k++)
                {
                    int row = symbolic.Places[network.Neighbours[k]];
                    Assert.True(row < symbolic.First[f + 1] || row == ground || rows.Contains(row));
                }
            }
            if (rows.Length == 0)
                continue;
            int parent = symbolic.Parent[f], own = symbolic.Own(parent);
            Assert.True(parent > f);
            for (int i = 0; i < rows.Length; i++)
            {
                int at = symbolic.Relative[symbolic.RowStart[f] + i];
                Assert.Equal(rows[i], at < own ? symbolic.First[parent] + at : symbolic.Rows[symbolic.RowStart[parent] + at - own]);
            }
        }
    }

    [Fact]
    public void Stored_values_and_operations_are_the_sums_over_panels_of_a_clique()
    {
        // K_21 grounded: one front of 20 places, panels of 8, 8 and 4: 8*20 + 8*12 + 4*4 values.
        Network network = TestNetworks.Of(Family.Complete, 21);
        SymbolicCholesky symbolic = SymbolicCholesky.Of(network.Laplacian, [.. Enumerable.Range(0, 21)]);
        Assert.Equal(1, symbolic.Count);
        Assert.Equal(20 * 21 / 2, symbolic.Entries);
        Assert.Equal(272, symbolic.StoredEntries);
        Assert.Equal((2 * 512) + (2 * 12 * 64) + (8 * 12 * 13) + (2 * 512) + (2 * 4 * 64) + (8 * 4 * 5) + (2 * 64), symbolic.Operations);
        Assert.Equal((16 * 12 * 20) + (16 * 4 * 12), symbolic.InversionOperations);
    }

    [Fact]
    public void A_network_in_two_parts_is_refused()
    {
        Network network = TestNetworks.Unit((0, 1), (1, 2), (3, 4));
        SolveException refusal = Assert.Throws<SolveException>(() => SymbolicCholesky.Of(network.Laplacian, [0, 1, 2, 3, 4]));
        Assert.Contains("2 components", refusal.Message, StringComparison.Ordinal);
    }
}

/// <summary>Alone in the process while it runs: the process's own peak is what is measured.</summary>
[CollectionDefinition(nameof(FactorMemoryTests), DisableParallelization = true)]
public class FactorMemoryCollection;

[Collection(nameof(FactorMemoryTests))]
public class FactorMemoryTests
{
    [Trait("Category", "Slow")]
    [Theory]
    [InlineData(1)]
    [InlineData(2)]
    public void The_process_peaks_at_no_more_than_is_foreseen_and_a_quarter(int threads)
    {
        if (!OperatingSystem.IsLinux())
            return;
        const int side = 700;
        Network network = TestNetworks.Of(Family.Grid, side * side);
        int[] order = DissectedGrid.Order(network, side);
        GC.Collect();
        GC.WaitForPendingFinalizers();
        long before = Resident("VmRSS");
        File.WriteAllText("/proc/self/clear_refs", "5"); // the peak starts anew (Linux, proc(5))
        SymbolicCholesky symbolic = SymbolicCholesky.Of(network.Laplacian, order);
        using CholeskyFactor factor = CholeskyFactor.Of(symbolic, network.Laplacian, threads, default);
        SelectedInverse inverse = factor.Invert(threads, default);
        Assert.True(inverse.Diagonal(order[0]) > 0);
        double measured = Resident("VmHWM") - before, foreseen = symbolic.PeakBytes(threads);
        Assert.InRange(measured / foreseen, 0.3, 1.25); // from below: what earlier tests left resident is used again
    }

    private static long Resident(string field) => 1024 * long.Parse(
        File.ReadLines("/proc/self/status").First(line => line.StartsWith(field + ":", StringComparison.Ordinal)).Split(':')[1]
            .Replace("kB", "", StringComparison.Ordinal).Trim(),
        CultureInfo.InvariantCulture);
}
