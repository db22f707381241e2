// Single pairs, solved and enclosed: sixteen potentials a refined solve, a certificate for each.
// Invariant: an enclosure holds whatever the solver did; how narrow it is says how well the solver did. Results do not depend on threads.

using ScaleResist.Graphs;
using ScaleResist.Kernels;
using ScaleResist.Solving;

namespace ScaleResist.Estimating;

/// <summary>
/// Lower and upper bounds of the resistance of given pairs, from potentials x of L x = e_u - e_v (see <see cref="Enclosure"/>). The bounds are those
/// of the network's conductances as they are stored, rounding included; numbers that underflow are the one thing not counted.
/// </summary>
public sealed class CertifiedPairs
{
    // The width is the square of the energy error times the stretch of the tree: 10 to 50 on meshes and roads of 10^5 nodes.
    private const double ToleranceOfWidth = 0.04; // times the root of the width
    private const double WidthOfPairs = 1e-8;
    private const double Tightening = 0.01;
    private const int MostRounds = 3;

    private readonly Network network;
    private readonly LaplacianSolver solver;
    private readonly RoutingTree tree;
    private readonly double width;
    private readonly int[] place; // of a pair's enclosure
    private readonly Enclosure[] enclosures;

    private CertifiedPairs(
        Network network, LaplacianSolver solver, IReadOnlyList<(int U, int V)> pairs, double width, int threads, CancellationToken cancel)
    {
        this.width = width;
        this.network = network;
        this.solver = solver;
        tree = new RoutingTree(network);
        int[] componentOf = network.ComponentOfNodes();
        place = new int[pairs.Count];
        List<Enclosure> found = [new(0, 0), Enclosure.Infinite];
        Dictionary<(int, int), int> places = [];
        Dictionary<int, List<Column>> wanted = [];
        for (int i = 0; i < place.Length; i++)
        {
            (int u, int v) = (Math.Min(pairs[i].U, pairs[i].V), Math.Max(pairs[i].U, pairs[i].V));
            if (u == v || componentOf[u] != componentOf[v])
            {
                place[i] = u == v ? 0 : 1;
                continue;
            }
            if (places.TryGetValue((u, v), out place[i]))
                continue;
            places[(u, v)] = place[i] = found.Count;
            if (!wanted.TryGetValue(componentOf[u], out List<Column>? columns))
                wanted[componentOf[u]] = columns = [];
            columns.Add(new Column(u, v, found.Count));
            found.Add(default);
        }
        enclosures = [.. found];
        Work(
            [.. wanted.OrderBy(group => group.Key).SelectMany(group => group.Value.Chunk(PanelPair.Width).Select(some => (group.Key, some)))],
            threads, cancel);
    }

    private readonly record struct Column(int U, int V, int Place);

    /// <summary>How many pairs there are.</summary>
    public int Count => place.Length;

    /// <summary>
    /// Where the resistance of a pair lies: 0 for a node and itself, +infinity between components, else bounds that are at most the width apart, relative,
    /// as far as doubles let the solver get there.
    /// </summary>
    public Enclosure this[int pair] => enclosures[place[pair]];

    /// <summary>Solves and encloses. O(1 / 16) solves a pair, each distinct pair once.</summary>
    /// <param name="network">The network.</param>
    /// <param name="solver">Its solver.</param>
    /// <param name="pairs">Internal nodes, in any components.</param>
    /// <param name="threads">Threads to use, each with panels of its own: some 13 panels of n rows.</param>
    /// <param name="cancel">Checked once an iteration.</param>
    /// <param name="width">Upper - Lower wanted, relative.</param>
    public static CertifiedPairs Solve(
        Network network, LaplacianSolver solver, IReadOnlyList<(int U, int V)> pairs, int threads = 1, CancellationToken cancel = default,
        double width = WidthOfPairs) => new(network, solver, pairs, width, threads, cancel);

    private void Work((int Component, Column[] Columns)[] panels, int threads, CancellationToken cancel)
    {
        int slots = Math.Min(threads, panels.Length);
        Exception?[] failures = new Exception?[slots];
        Parallel.For(0, slots, new ParallelOptions { MaxDegreeOfParallelism = Math.Max(1, threads) }, slot =>
        {
            try
            {
                using Workspace workspace = new(network, solver);
                for (int i = slot; i < panels.Length; i += slots)
                    Enclose(panels[i].Component, panels[i].Columns, workspace, cancel);
            }
            catch (Exception failure)
            {
                failures[slot] = failure;
            }
        });
        // The first slot's error is the one to tell, as it is.
        if (Array.Find(failures, failure => failure is not null) is Exception first)
            System.Runtime.ExceptionServices.ExceptionDispatchInfo.Throw(first);
    }

    // Again, and more tightly, where the tree's stretch is larger than foreseen.
    private void Enclose(int component, Column[] columns, Workspace workspace, CancellationToken cancel)
    {
        double tolerance = ToleranceOfWidth * Math.Sqrt(width);
        for (int round = 0; round < MostRounds; round++)
        {
            double widest = EncloseOnce(component, columns, tolerance, workspace, cancel);
            if (widest <= width)
                return;
            tolerance *= double.IsFinite(widest) ? Math.Max(Tightening, 0.5 * Math.Sqrt(width / widest)) : Tightening;
        }
    }

    private double EncloseOnce(int component, Column[] columns, double tolerance, Workspace workspace, CancellationToken cancel)
    {
        Component range = network.Components[component];
        PanelPair b = workspace.B, x = workspace.X;
        b.Clear(range.Start, range.End);
        SetEnds();
        solver.SolveRefined(component, b, x, columns.Length, tolerance, workspace.Solver, cancel, certified: true);
        double rounding = CertificateKernels.Unit * CertificateKernels.GrowthOf(range.Nodes, tree.MostDegree);
        double widest = 0;
        for (int half = 0; half * PanelPair.Half < columns.Length; half++)
        {
            LaneSums energy = CertificateKernels.Flows(network.Laplacian, x[half], b[half], workspace.Slack, range.Start, range.End);
            LaneSums routed = CertificateKernels.Route(tree.Parent, tree.Resistance, b[half], workspace.Slack, range.Start, range.End);
            Check(half, range.Start);
            for (int j = half * PanelPair.Half; j < Math.Min(columns.Length, (half + 1) * PanelPair.Half); j++)
            {
                double drop = x.At(columns[j].U, j) - x.At(columns[j].V, j);
                Enclosure found = Enclosure.Of(drop, energy[j % PanelPair.Half], routed[j % PanelPair.Half], rounding);
                Enclosure before = enclosures[columns[j].Place];
                // Both hold, if there were two: so does what they share.
                enclosures[columns[j].Place] = before.Upper > 0
                    ? new Enclosure(Math.Max(before.Lower, found.Lower), Math.Min(before.Upper, found.Upper))
                    : found;
                double apart = enclosures[columns[j].Place].RelativeWidth;
                widest = Math.Max(widest, double.IsNaN(apart) ? double.PositiveInfinity : apart);
            }
        }
        return widest;

        void SetEnds()
        {
            for (int j = 0; j < columns.Length; j++)
            {
                b.At(columns[j].U, j) = 1;
                b.At(columns[j].V, j) = -1;
            }
        }

        // What reaches the root is the sum of a true residual, 0, and rounding: were it more than the slack, the slack would be no bound.
        void Check(int half, int root)
        {
            for (int lane = 0; lane < PanelPair.Half; lane++)
            {
                if (Math.Abs(b[half].Row(root)[lane]) > workspace.Slack.Row(root)[lane])
                    throw new InvalidOperationException("The rounding of a routed flow exceeds its bound.");
            }
        }
    }

    private sealed class Workspace(Network network, LaplacianSolver solver) : IDisposable
    {
        public PanelPair B { get; } = new(network.NodeCount);

        public PanelPair X { get; } = new(network.NodeCount);

        public Panel<double> Slack { get; } = new(network.NodeCount);

        public RefinedWorkspace Solver { get; } = solver.NewRefinedWorkspace();

        public void Dispose()
        {
            B.Dispose();
            X.Dispose();
            Slack.Dispose();
            Solver.Dispose();
        }
    }
}
