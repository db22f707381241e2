// How often intervals hold: the probed route over many seeds against the exact route of the same network.
// Invariant: seeds are 1 .. S and are added in their order, so that a cell depends on network, probes and number of seeds alone. What is not
// probed (bridges, nodes and indices made of them) counts in no share; how far it lies from the exact route is kept apart.

using ScaleResist.Estimating;
using ScaleResist.Graphs;
using ScaleResist.Runs;
using ScaleResist.Solving;

namespace ScaleResist.Bench.Coverage;

/// <summary>What is counted.</summary>
internal enum Quantity
{
    /// <summary>Resistances of links that are no bridges.</summary>
    Links,

    /// <summary>Diagonals of L+.</summary>
    Nodes,

    /// <summary>The same with the interval value +- t x standard error that a reader of the table would take.</summary>
    NodesByError,

    /// <summary>Total resistances: errors only, the table has no interval of them.</summary>
    Totals,

    /// <summary>Closeness ranks: whether the true one lies within its bounds.</summary>
    Ranks,

    /// <summary>Random pairs.</summary>
    Pairs,

    /// <summary>The Kirchhoff index of the largest component.</summary>
    Index,
}

/// <summary>Shares and errors of one quantity: by seed, how many were estimated, how many intervals held, the squares of relative errors.</summary>
internal sealed class Count(int seeds)
{
    private const double Rounding = 1e-12; // of the exact route
    private readonly long[] rows = new long[seeds];
    private readonly long[] held = new long[seeds];
    private readonly double[] squares = new double[seeds];

    /// <summary>Whether anything was estimated at all.</summary>
    public bool Any => rows.Any(count => count > 0);

    /// <summary>Share of the intervals that held.</summary>
    public double Share => (double)held.Sum() / rows.Sum();

    /// <summary>Standard error of the share, from the spread between seeds: rows of one seed are not independent.</summary>
    public double ShareError
    {
        get
        {
            double share = Share;
            double spread = held.Zip(rows, (h, n) => n == 0 ? 0 : Math.Pow(((double)h / n) - share, 2)).Sum();
            return Math.Sqrt(spread / (rows.Length - 1.0) / rows.Length);
        }
    }

    /// <summary>Root-mean-square relative error.</summary>
    public double Error => Math.Sqrt(squares.Sum() / rows.Sum());

    public void Add(int seed, bool holds, double relativeError)
    {
        rows[seed]++;
        held[seed] += holds ? 1 : 0;
        squares[seed] += relativeError * relativeError;
    }

    public void Add(int seed, double truth, Estimate found) =>
        Add(seed, truth >= found.Lower * (1 - Rounding) && truth <= found.Upper * (1 + Rounding), (found.Value / truth) - 1);
}

/// <summary>One network with its exact values.</summary>
internal sealed class CoverageTrial
{
    private const double Confidence = 0.95;
    private const double Tie = 1e-9;
    private static readonly double Normal = Quantiles.Normal(Confidence);
    private readonly Blocks blocks;
    private readonly (int U, int V)[] pairs;
    private readonly double[] links, diagonals, totals, resistances;
    private readonly (int Least, int Most)[] ranks; // of a node among equals

    /// <summary>Solves the network exactly.</summary>
    /// <param name="network">Connected or not.</param>
    /// <param name="pairs">How many random pairs; more than probes, so that they are not solved.</param>
    public CoverageTrial(Network network, int pairs)
    {
        Network = network;
        blocks = Blocks.Find(network);
        Random random = new(5);
        int n = network.Components[0].Nodes;
        HashSet<(int, int)> drawn = [];
        for (int tries = 0; tries < 50 * pairs && drawn.Count < pairs; tries++)
        {
            (int one, int other) = (random.Next(n), random.Next(n));
            if (one != other)
                drawn.Add((Math.Min(one, other), Math.Max(one, other)));
        }
        this.pairs = [.. drawn];
        KeepingSink sink = new();
        EstimateRun.Execute(
            network, new EstimatePlan { Route = Route.Exact, Want = Want.Index | Want.Nodes | Want.Links | Want.Pairs, Threads = 1 },
            new EstimateInputs { Pairs = this.pairs }, sink, new NoObserver(), default);
        links = sink.Column("links", "resistance");
        diagonals = sink.Column("nodes", "resistance_diagonal");
        totals = sink.Column("nodes", "total_resistance");
        resistances = sink.Column("pairs", "resistance");
        Kirchhoff = sink.Column("index", "kirchhoff_index")[0];
        Foster = sink.Column("index", "foster_sum")[0];
        ranks = [.. Enumerable.Range(0, network.NodeCount).Select(RankOf)];
    }

    public Network Network { get; }

    /// <summary>The exact Kirchhoff index of the largest component.</summary>
    public double Kirchhoff { get; }

    /// <summary>The sum of c R over its links.</summary>
    public double Foster { get; }

    /// <summary>The largest relative difference from the exact route of what the probed route did not probe.</summary>
    public double WorstUnprobed { get; private set; }

    /// <summary>Runs the probed route for so many seeds.</summary>
    public Dictionary<Quantity, Count> Measure(int probes, int seeds, int threads)
    {
        Dictionary<Quantity, Count> counts = Enum.GetValues<Quantity>().ToDictionary(quantity => quantity, _ => new Count(seeds));
        LaplacianSolver solver = new(Network, probes);
        double[] worst = new double[seeds];
        Parallel.For(0, seeds, new ParallelOptions { MaxDegreeOfParallelism = threads }, i => worst[i] = Run(i, probes, solver, counts));
        WorstUnprobed = Math.Max(WorstUnprobed, worst.Max());
        return counts;
    }

    private double Run(int i, int probes, LaplacianSolver solver, Dictionary<Quantity, Count> counts)
    {
        EstimatePlan plan = new()
        {
            Route = Route.Probe,
            Want = Want.Index | Want.Nodes | Want.Links | Want.Pairs,
            Probes = probes,
            Seed = (ulong)i + 1,
            Threads = 1,
        };
        ProbedEstimates sums = ProbedEstimates.Run(
            blocks, plan, new EstimateInputs { Pairs = pairs }, null, null, true, null, solver, new NoObserver(), default);
        double worst = 0;
        LinkResult[] found = new LinkResult[Network.LinkCount];
        new LinkResistances(Network, blocks.Bridges, sums.Links!, Confidence).Fill(0, found);
        for (int e = 0; e < found.Length; e++)
            Add(Quantity.Links, links[e], found[e].Resistance, found[e].Method == ResistanceMethod.Probe);

        Estimate[] nodes = sums.Nodes!.Diagonals(Normal);
        Estimate index = sums.Nodes.KirchhoffIndex(0, Confidence);
        int[] componentOf = Network.ComponentOfNodes();
        Runs.Ranks bounds = Runs.Ranks.Of(Network, nodes);
        for (int u = 0; u < nodes.Length; u++)
        {
            Component component = Network.Components[componentOf[u]];
            if (component.Nodes == 1)
                continue;
            Estimate l = nodes[u];
            bool probed = l.StandardError > 0;
            Add(Quantity.Nodes, diagonals[u], l, probed);
            if (!probed)
                continue;
            double half = Normal * l.StandardError;
            counts[Quantity.NodesByError].Add(i, diagonals[u], l with { Lower = l.Value - half, Upper = l.Value + half });
            double trace = sums.Nodes.KirchhoffIndex(componentOf[u], Confidence).Value / component.Nodes;
            counts[Quantity.Totals].Add(i, true, (((component.Nodes * l.Value) + trace) / totals[u]) - 1);
            counts[Quantity.Ranks].Add(
                i, bounds.Lower[u] <= ranks[u].Most && bounds.Upper[u] >= ranks[u].Least, (double)(bounds.Upper[u] - bounds.Lower[u]) / component.Nodes);
        }
        for (int j = 0; j < pairs.Length; j++)
        {
            (Estimate resistance, ResistanceMethod method) = sums.Pairs!.Estimate(j, Normal);
            Add(Quantity.Pairs, resistances[j], resistance, method == ResistanceMethod.Probe);
        }
        Add(Quantity.Index, Kirchhoff, index, !sums.Nodes.IsExact(0));
        return worst;

        void Add(Quantity quantity, double truth, Estimate estimate, bool probed)
        {
            if (probed)
                counts[quantity].Add(i, truth, estimate);
            else
                worst = Math.Max(worst, Math.Abs((estimate.Value / truth) - 1));
        }
    }

    private (int Least, int Most) RankOf(int node)
    {
        Component component = Network.Components.First(c => node < c.End);
        int below = 0, equal = 0;
        for (int v = component.Start; v < component.End; v++)
        {
            double difference = (diagonals[v] / diagonals[node]) - 1;
            below += difference < -Tie ? 1 : 0;
            equal += Math.Abs(difference) <= Tie ? 1 : 0;
        }
        return (below + 1, below + equal);
    }

    private sealed class KeepingSink : ITableSink
    {
        private readonly Dictionary<string, Table> tables = [];

        public ITableWriter Open(TableDefinition table) => tables[table.Name] = new Table(table);

        public double[] Column(string table, string column) => tables[table].Column(column);

        private sealed class Table(TableDefinition definition) : ITableWriter
        {
            private readonly List<RowBatch> batches = [];

            public void Write(RowBatch batch) => batches.Add(batch);

            public long Complete() => batches.Sum(batch => (long)batch.Count);

            public double[] Column(string name)
            {
                int at = definition.Columns.ToList().FindIndex(column => column.Name == name);
                return [.. batches.SelectMany(batch => (double[])batch.Columns[at])];
            }
        }
    }
}
