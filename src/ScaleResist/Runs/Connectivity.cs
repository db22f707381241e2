// When and how the weakest cut of the largest component is looked for. Invariant: the network and the plan alone decide, never a clock.
//
// Where all its blocks are exact, their factor solves; where it is probed, the probes' solver does: small networks always, large ones where there are
// so many probes that a few more solves do not show (a tenth of the run is the measure).

using ScaleResist.Estimating;
using ScaleResist.Graphs;
using ScaleResist.Solving;

namespace ScaleResist.Runs;

/// <summary>Algebraic connectivity of the largest component.</summary>
internal static class Connectivity
{
    private const int ManySolves = 14;
    private const int FewSolves = 5;
    private const long SmallLinks = 200_000;
    private const int ManyProbes = 256;
    private const double Tolerance = 1e-6;
    private const double RoughTolerance = 1e-3; // the value is off by its square

    /// <summary>By a factor that holds the component.</summary>
    public static ConnectivityFacts Exactly(ExactResults exact, EstimatePlan plan)
    {
        Network network = exact.Part.Blocks.Network;
        using ExactSolve solve = new(exact, 0);
        return WeakestCut.Of(network, network.Components[0], solve.Solve, IsSmall(network) ? ManySolves : FewSolves, plan.Seed, plan.Threads);
    }

    /// <summary>By solves; null where they would cost too much beside the probes, or where even doubles do not reach what they ask for.</summary>
    public static ConnectivityFacts? BySolves(Network network, LaplacianSolver solver, int probes, EstimatePlan plan, CancellationToken cancel)
    {
        if (network.Components[0].Nodes < 2 || (!IsSmall(network) && probes < ManyProbes))
            return null;
        double tolerance = IsSmall(network) ? Tolerance : RoughTolerance;
        using SolverWorkspace<double> workspace = solver.NewWorkspace<double>();
        try
        {
            return WeakestCut.Of(
                network, network.Components[0], (b, x) => solver.Solve(b, x, 8, tolerance, workspace, cancel),
                IsSmall(network) ? ManySolves : FewSolves, plan.Seed, plan.Threads);
        }
        catch (SolveException)
        {
            return null; // the probes are rougher and stand; the column says that this one number was not found
        }
    }

    private static bool IsSmall(Network network) => network.LinkCount <= SmallLinks;
}
