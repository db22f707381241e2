// The audit: its references against a dense inverse, its silence on sound runs, its voice on broken ones.

using MathNet.Numerics.LinearAlgebra;
using ScaleResist.DataGen.Networks;
using ScaleResist.Estimating;
using ScaleResist.Graphs;
using ScaleResist.Runs;
using ScaleResist.Solving;

namespace ScaleResist.Tests.Runs;

public sealed class AuditTests
{
    [Theory]
    [InlineData(Family.Grid, 0)]
    [InlineData(Family.Preferential, 0)]
    [InlineData(Family.Road, 0)]
    [InlineData(Family.SmallWorld, 4)]
    public void References_enclose_the_truth_and_links_are_those_of_their_table(Family family, double decades)
    {
        Network network = TestNetworks.Of(family, 500, decades: decades);
        Matrix<double> dense = network.DensePseudoInverse();
        MemorySink sink = Run(network, new EstimatePlan { Route = Route.Probe, Probes = 32 }, out EstimateSummary summary);
        MemoryTable audit = sink["audit"], links = sink["links"];
        Dictionary<(long, long), double> table = links.Column<long>("source").Zip(links.Column<long>("target"))
            .Zip(links.Column<double>("resistance")).ToDictionary(row => row.First, row => row.Second);
        long[] source = audit.Column<long>("source"), target = audit.Column<long>("target");
        double[] lower = audit.Column<double>("reference_lower"), upper = audit.Column<double>("reference_upper");
        double[] found = audit.Column<double>("resistance"), error = audit.Column<double>("relative_error");
        Assert.Equal(16, source.Length);
        Assert.Equal(16, source.Zip(target).Distinct().Count());
        int ofLinks = 0;
        for (int i = 0; i < source.Length; i++)
        {
            double truth = dense.Resistance(network.Node(source[i]), network.Node(target[i]));
            Assert.InRange(truth, lower[i] * (1 - 1e-9), upper[i] * (1 + 1e-9)); // of the dense inverse
            Assert.InRange(upper[i] / lower[i], 1, 1 + 1e-3);
            Assert.Equal((found[i] / truth) - 1, error[i], 1e-3);
            if (table.TryGetValue((source[i], target[i]), out double resistance))
            {
                ofLinks++;
                Assert.Equal(1, found[i] / resistance, 1e-6);
            }
        }
        Assert.InRange(ofLinks, 8, 16);
        AuditFacts facts = summary.Audit!;
        Assert.Equal((16, 0, (string?)null), (facts.Compared, facts.TooWide, facts.Warning));
        Assert.Equal(error.Max(Math.Abs), facts.WorstError);
        Assert.InRange(facts.MedianError!.Value, 0, facts.Percentile95Error!.Value);
    }

    // Of 240 audits of sound runs about one in four hundred may blame the error bars (two tests at 0.001, one of them never this large).
    [Fact]
    public void Sound_runs_are_not_blamed_and_intervals_hold_as_often_as_they_say()
    {
        int blamed = 0, held = 0, intervals = 0;
        foreach (Family family in new[] { Family.Grid, Family.Road, Family.Preferential, Family.SmallWorld, Family.Ladder, Family.Cycle })
        {
            Network network = TestNetworks.Of(family, 400);
            for (ulong seed = 1; seed <= 40; seed++)
            {
                Run(network, new EstimatePlan { Route = Route.Probe, Want = Want.Links, Probes = 64, Seed = seed, Threads = 1 }, out EstimateSummary summary);
                blamed += summary.Audit!.Warning is null ? 0 : 1;
                held += summary.Audit.LinksHeld;
                intervals += summary.Audit.LinkIntervals;
            }
        }
        Assert.InRange(blamed, 0, 2);
        Assert.InRange((double)held / intervals, 0.92, 0.97);
    }

    // A tolerance of 0.3 where 0.0044 to 0.0088 is needed leaves links as they were (0.3 of a mode is 0.3/sqrt(n) of the energy) but may take a tenth
    // off the smoothest modes, which are most of the index of a mesh. A relative error of 0.3 in the energy norm, 0.3 sqrt(n), spoils everything.
    [Theory]
    [MemberData(nameof(Broken))]
    public void Solves_that_stop_too_early_are_reported(Family family, int probes)
    {
        Network network = TestNetworks.Of(family, 2000);
        EstimatePlan plan = new() { Route = Route.Probe, Probes = probes };
        Run(network, plan, out EstimateSummary sound);
        Assert.Null(sound.Audit!.Warning);
        Assert.InRange(sound.Audit.SolverError!.Value, 0, sound.Audit.SolverErrorAllowed);
        foreach (double error in new[] { 0.3, 0.3 * Math.Sqrt(network.NodeCount) })
        {
            Run(network, plan with { ModeError = error }, out EstimateSummary broken);
            Assert.Contains("solves of probes are off by", broken.Audit!.Warning, StringComparison.Ordinal);
        }
        Run(network, plan with { ModeError = 0.3, Want = Want.Index }, out EstimateSummary index);
        Assert.Contains("solves of probes are off by", index.Audit!.Warning, StringComparison.Ordinal);
    }

    public static TheoryData<Family, int> Broken
    {
        get
        {
            TheoryData<Family, int> data = [];
            foreach (Family family in new[] { Family.Grid, Family.Torus, Family.Cube, Family.Hypercube, Family.Road, Family.Preferential,
                Family.PowerLaw, Family.SmallWorld, Family.Fringe })
            {
                data.Add(family, 256);
                if (family is not (Family.Preferential or Family.PowerLaw)) // one step is nearly enough there: off by 2.3 times what is allowed
                    data.Add(family, 64);
            }
            return data;
        }
    }

    [Theory]
    [InlineData(Family.Grid, 0)]
    [InlineData(Family.Preferential, 0)]
    [InlineData(Family.Road, 6)]
    public void The_check_of_a_panel_finds_the_error_that_a_dense_inverse_finds(Family family, double decades)
    {
        Network network = TestNetworks.Of(family, 400, decades: decades);
        Matrix<double> inverse = network.DensePseudoInverse(), laplacian = network.DenseLaplacian();
        LaplacianSolver solver = new(network);
        using SolverWorkspace<float> workspace = solver.NewWorkspace<float>();
        using ProbePanel panel = new(network, 1);
        panel.Draw(0, 16, 1);
        panel.Solve(solver, 0.5, workspace, default);
        double worst = 0;
        for (int j = 0; j < 16; j++)
        {
            Vector<double> z = Vector<double>.Build.Dense(network.NodeCount, u => panel.Z.Row(u)[j]);
            Vector<double> truth = inverse * Vector<double>.Build.Dense(network.NodeCount, u => panel.B.Row(u)[j]);
            double error = (z - truth) * (laplacian * (z - truth)), energy = truth * (laplacian * truth);
            worst = Math.Max(worst, Math.Sqrt(error / energy * (network.NodeCount - 1)));
        }
        Assert.InRange(worst, 0.01, 0.5);
        Assert.InRange(SolveCheck.ModeError(network, panel, solver, workspace, 2, default) / worst, 0.94, 1);
    }

    [Fact]
    public void Pairs_alone_are_audited_too_and_an_exact_run_is_not()
    {
        Network network = TestNetworks.Of(Family.Grid, 400);
        (int, int)[] wanted = [.. Enumerable.Range(0, 100).Select(i => (i, 399 - i))];
        MemorySink sink = new();
        EstimateRun.Execute(network, new EstimatePlan { Route = Route.Probe, Want = Want.Pairs, Probes = 16 }, new EstimateInputs { Pairs = wanted },
            sink, new SilentObserver(), default);
        Assert.Equal(["pairs", "audit"], sink.Tables.Keys);
        Assert.Equal(16, sink["audit"].Complete());
        Assert.False(Run(network, new EstimatePlan { Route = Route.Exact }, out EstimateSummary exact).Tables.ContainsKey("audit"));
        Assert.Null(exact.Audit);
        Assert.Null(exact.Probing);
    }

    private static MemorySink Run(Network network, EstimatePlan plan, out EstimateSummary summary)
    {
        MemorySink sink = new();
        summary = EstimateRun.Execute(network, plan, new EstimateInputs(), sink, new SilentObserver(), default);
        return sink;
    }
}
