// Enclosures against exact rational resistances, closed forms of large networks, and the demand that they be narrow.

using System.Numerics;
using ScaleResist.DataGen.Networks;
using ScaleResist.Estimating;
using ScaleResist.Graphs;
using ScaleResist.Runs;
using ScaleResist.Solving;
using ScaleResist.Tests.Runs;

namespace ScaleResist.Tests.Estimating;

public class CertifiedPairsTests
{
    [Fact]
    public void A_thousand_exact_rationals_lie_in_their_enclosures() => Assert.True(Enclosed(1_000, 1) >= 1_000);

    [Fact]
    [Trait("Category", "Slow")]
    public void Ten_thousand_exact_rationals_lie_in_their_enclosures() => Assert.True(Enclosed(10_000, 2) >= 10_000);

    // R(u,v) = det(L without u, v) / det(L without u) (all-minors matrix tree theorem), in integers: no tolerance anywhere. Conductances are
    // integers times powers of two over three, seven or twelve decades, and all pairs of a network are asked for.
    private static int Enclosed(int least, int seed)
    {
        int cases = 0;
        double widest = 0, widestOfAll = 0;
        for (Random random = new(seed); cases < least;)
        {
            int n = random.Next(3, 10), spread = random.Next(3) * 15;
            Dictionary<(int, int), long> links = [];
            for (int v = 1; v < n; v++)
                links[(random.Next(v), v)] = 0;
            for (int extra = random.Next(2 * n); extra > 0; extra--)
            {
                (int u, int v) = (random.Next(n), random.Next(n));
                if (u != v)
                    links[(Math.Min(u, v), Math.Max(u, v))] = 0;
            }
            foreach ((int, int) link in links.Keys)
                links[link] = random.Next(1, 1000) * (1L << random.Next(spread + 1));
            Network network = TestNetworks.Of([.. links.Select(link => ((long)link.Key.Item1, (long)link.Key.Item2, (double)link.Value))]);
            (int U, int V)[] pairs = [.. Enumerable.Range(0, n).SelectMany(v => Enumerable.Range(0, v).Select(u => (u, v)))];
            CertifiedPairs certified = CertifiedPairs.Solve(network, new LaplacianSolver(network), pairs);
            BigInteger[,] laplacian = Integers(network);
            for (int i = 0; i < pairs.Length; i++)
            {
                BigInteger above = Determinant(laplacian, pairs[i].U, pairs[i].V), below = Determinant(laplacian, pairs[i].U, -1);
                Assert.True(AtMost(certified[i].Lower, above, below), $"lower {certified[i].Lower:R} of {pairs[i]}, case {cases}");
                Assert.False(Below(certified[i].Upper, above, below), $"upper {certified[i].Upper:R} of {pairs[i]}, case {cases}");
                widestOfAll = Math.Max(widestOfAll, certified[i].RelativeWidth);
                widest = spread == 30 ? widest : Math.Max(widest, certified[i].RelativeWidth);
                cases++;
            }
        }
        Assert.InRange(widest, 0, 1e-7); // beyond a few decades rounding in the solve shows
        Assert.InRange(widestOfAll, 0, 1e-6);
        return cases;
    }

    [Theory]
    [InlineData(Family.Grid, 316 * 316, 0)]
    [InlineData(Family.Road, 100_000, 0)]
    [InlineData(Family.Road, 100_000, 2)]
    public void Enclosures_on_meshes_are_narrower_than_1e_8(Family family, int nodes, double decades)
    {
        Network network = TestNetworks.Of(family, nodes, decades: decades);
        Random random = new(3);
        (int, int)[] pairs = [.. Enumerable.Range(0, 16).Select(_ => (random.Next(network.Components[0].End), random.Next(network.Components[0].End)))];
        CertifiedPairs certified = CertifiedPairs.Solve(network, new LaplacianSolver(network), pairs, 2);
        Assert.All(Enumerable.Range(0, 16), i => Assert.InRange(certified[i].RelativeWidth, 0, 1e-8));
        Assert.All(Enumerable.Range(0, 16), i => Assert.True(certified[i].Lower > 0));
    }

    [Fact]
    public void Pairs_of_a_torus_lie_at_its_spectral_sum()
    {
        // R = (1/N) sum over (k, l) != 0 of (1 - cos(2 pi (k a + l b) / s)) / (2 - cos(2 pi k / s) - cos(2 pi l / s)), N = s^2: the spectral formula
        // (Gutman & Mohar 1996) with the torus's eigenvectors. The sum's own rounding is below 1e-11.
        const int Side = 316;
        Network network = TestNetworks.Of(Family.Torus, Side * Side);
        (int A, int B)[] offsets = [(1, 0), (1, 1), (7, 3), (158, 158), (0, 158), (40, 2)];
        (int, int)[] pairs = [.. offsets.Select(o => (network.Node((5 * Side) + 9), network.Node(((5 + o.A) * Side) + ((9 + o.B) % Side))))];
        CertifiedPairs certified = CertifiedPairs.Solve(network, new LaplacianSolver(network), pairs);
        for (int i = 0; i < offsets.Length; i++)
        {
            double sum = 0;
            for (int k = 0; k < Side; k++)
            {
                double row = 0;
                for (int l = k == 0 ? 1 : 0; l < Side; l++)
                {
                    double angle = 2 * Math.PI * (((k * offsets[i].A) + (l * offsets[i].B)) % Side) / Side;
                    row += Math.Pow(Math.Sin(angle / 2), 2)
                        / (Math.Pow(Math.Sin(Math.PI * k / Side), 2) + Math.Pow(Math.Sin(Math.PI * l / Side), 2));
                }
                sum += row;
            }
            double exact = sum / Side / Side;
            Assert.InRange(exact, certified[i].Lower * (1 - 1e-11), certified[i].Upper * (1 + 1e-11));
            Assert.InRange(certified[i].RelativeWidth, 0, 1e-8);
        }
    }

    [Fact]
    public void Nodes_apart_are_infinitely_far_and_a_pair_is_the_same_from_both_ends()
    {
        Network network = TestNetworks.Of((1, 2, 1), (2, 3, 0.1), (3, 1, 4), (10, 11, 2), (11, 12, 2), (12, 10, 2));
        (int one, int two, int ten, int eleven) = (network.Node(1), network.Node(2), network.Node(10), network.Node(11));
        CertifiedPairs certified = CertifiedPairs.Solve(
            network, new LaplacianSolver(network), [(one, ten), (two, two), (one, two), (two, one), (ten, eleven)]);
        Assert.Equal(new Enclosure(double.PositiveInfinity, double.PositiveInfinity), certified[0]);
        Assert.Equal(double.PositiveInfinity, certified[0].Middle);
        Assert.Equal(new Enclosure(0, 0), certified[1]);
        Assert.Equal(certified[2], certified[3]);
        double series = 1 / ((1 / 0.1) + (1 / 4.0));
        Assert.Equal(1 / (1 + series), certified[2].Middle, 1e-12);
        Assert.Equal(1.0 / 3, certified[4].Middle, 1e-12);
    }

    [Fact]
    public void Enclosures_do_not_depend_on_threads()
    {
        Network network = TestNetworks.Of(Family.Road, 3_000, decades: 1);
        Random random = new(6);
        (int, int)[] pairs = [.. Enumerable.Range(0, 100).Select(_ => (random.Next(network.NodeCount), random.Next(network.NodeCount)))];
        LaplacianSolver solver = new(network);
        CertifiedPairs one = CertifiedPairs.Solve(network, solver, pairs), three = CertifiedPairs.Solve(network, solver, pairs, 3);
        Assert.All(Enumerable.Range(0, 100), i => Assert.Equal(one[i], three[i]));
    }

    [Fact]
    public void A_run_solves_as_many_pairs_as_it_has_probes_and_estimates_more()
    {
        Network network = TestNetworks.Of(Family.Grid, 400);
        (int, int)[] pairs = [.. Enumerable.Range(1, 17).Select(i => (0, 20 * i))];
        Assert.All(Methods(pairs[..16]), method => Assert.Equal("solve", method));
        Assert.All(Methods([.. pairs[..16], (3, 3)]).SkipLast(1), method => Assert.Equal("solve", method));
        Assert.All(Methods(pairs), method => Assert.Equal("probe", method));

        string[] Methods((int, int)[] wanted)
        {
            MemorySink sink = new();
            EstimateRun.Execute(network, new EstimatePlan { Want = Want.Pairs, Route = Route.Probe, Probes = 16 }, new EstimateInputs { Pairs = wanted },
                sink, new SilentObserver(), default);
            return sink["pairs"].Column<string>("method");
        }
    }

    private static BigInteger[,] Integers(Network network)
    {
        BigInteger[,] laplacian = new BigInteger[network.NodeCount, network.NodeCount];
        for (int u = 0; u < network.NodeCount; u++)
        {
            for (long k = network.RowStart[u]; k < network.RowStart[u + 1]; k++)
            {
                laplacian[u, network.Neighbours[k]] = -new BigInteger(network.Conductance(k));
                laplacian[u, u] += new BigInteger(network.Conductance(k));
            }
        }
        return laplacian;
    }

    // Bareiss's fraction-free elimination (1968); a grounded Laplacian is positive definite, so no pivot is zero.
    private static BigInteger Determinant(BigInteger[,] laplacian, int without, int andWithout)
    {
        int[] kept = [.. Enumerable.Range(0, laplacian.GetLength(0)).Where(u => u != without && u != andWithout)];
        int n = kept.Length;
        BigInteger[,] a = new BigInteger[n, n];
        for (int i = 0; i < n; i++)
        {
            for (int j = 0; j < n; j++)
                a[i, j] = laplacian[kept[i], kept[j]];
        }
        BigInteger last = 1;
        for (int k = 0; k < n - 1; k++)
        {
            for (int i = k + 1; i < n; i++)
            {
                for (int j = k + 1; j < n; j++)
                    a[i, j] = ((a[i, j] * a[k, k]) - (a[i, k] * a[k, j])) / last;
            }
            last = a[k, k];
        }
        return a[n - 1, n - 1];
    }

    private static bool AtMost(double value, BigInteger above, BigInteger below) => Compare(value, above, below) <= 0;

    private static bool Below(double value, BigInteger above, BigInteger below) => Compare(value, above, below) < 0;

    // value against above / below, exactly: a double is an integer times a power of two.
    private static int Compare(double value, BigInteger above, BigInteger below)
    {
        int exponent = Math.ILogB(value) - 52;
        BigInteger digits = new(Math.ScaleB(value, -exponent));
        return exponent >= 0 ? ((digits << exponent) * below).CompareTo(above) : (digits * below).CompareTo(above << -exponent);
    }
}
