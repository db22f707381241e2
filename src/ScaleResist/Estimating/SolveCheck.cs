// How far the solves of a panel are off, found by solving for what they left over.
// Invariant: what is returned is a lower bound of the true error, whatever the second solve is worth, less what rounding z to floats can do:
//     e = L+ r,  r = b - L z (in doubles):     |e|_L >= w'r / |w|_L  for any w,      |rounding|_L^2 <= 2 sum d_u |rounding of z_u|^2.
// With w = L+ r to three tenths the bound is within 5 % of the truth. It costs two passes over the links and an iteration or few of one panel.

using ScaleResist.Graphs;
using ScaleResist.Kernels;
using ScaleResist.Solving;

namespace ScaleResist.Estimating;

/// <summary>The check of a solved panel.</summary>
internal static unsafe class SolveCheck
{
    private const double Tolerance = 0.3;
    private const double Rounding = 2.4e-7; // of z by element, relative: that of its storage and of its centring, twofold
    private const int Width = ProbePanel.Width;

    /// <summary>The largest mode error of a panel's columns (<see cref="LaplacianSolver.SolveProbes"/>), over all components.</summary>
    /// <param name="network">The network.</param>
    /// <param name="panel">Drawn and solved.</param>
    /// <param name="solver">Of the network.</param>
    /// <param name="workspace">Of the solver.</param>
    /// <param name="threads">For the passes; the result does not depend on them.</param>
    /// <param name="cancel">Checked once an iteration.</param>
    public static double ModeError(
        Network network, ProbePanel panel, LaplacianSolver solver, SolverWorkspace<float> workspace, int threads, CancellationToken cancel)
    {
        using Panel<float> r = new(network.NodeCount), w = new(network.NodeCount);
        ParallelOptions options = new() { MaxDegreeOfParallelism = threads };
        List<(int Component, int Start, int End)> pieces = PiecesOf(network);
        Parallel.ForEach(pieces, options, piece => FillResidual(network, panel, r, piece.Start, piece.End));
        for (int c = 0; c < network.Components.Count; c++)
            PanelKernels.Centre(r, network.Components[c].Start, network.Components[c].End);
        solver.Solve(r, w, panel.Probes, Tolerance, workspace, new SolveStatistics(), cancel);
        Sums[] sums = new Sums[pieces.Count];
        Parallel.For(0, pieces.Count, options, i => sums[i] = SumsOf(network, panel, r, w, pieces[i].Start, pieces[i].End));
        double worst = 0;
        for (int i = 0; i < pieces.Count;)
        {
            int component = pieces[i].Component;
            Sums total = new();
            for (; i < pieces.Count && pieces[i].Component == component; i++)
                total.Add(sums[i]);
            worst = Math.Max(worst, total.WorstModeError(network.Components[component].Nodes, panel.Probes));
        }
        return worst;
    }

    // Components of one node have nothing to solve.
    private static List<(int, int, int)> PiecesOf(Network network)
    {
        List<(int, int, int)> pieces = [];
        for (int c = 0; c < network.Components.Count; c++)
        {
            Component component = network.Components[c];
            for (int start = component.Start; component.Nodes > 1 && start < component.End; start += LaneSums.ChunkRows)
                pieces.Add((c, start, Math.Min(component.End, start + LaneSums.ChunkRows)));
        }
        return pieces;
    }

    private static void FillResidual(Network network, ProbePanel panel, Panel<float> r, int start, int end)
    {
        double* row = stackalloc double[Width];
        for (int u = start; u < end; u++)
        {
            MultiplyRow(network, panel.Z, u, row);
            float* b = Row(panel.B, u), to = Row(r, u);
            for (int j = 0; j < Width; j++)
                to[j] = (float)(b[j] - row[j]);
        }
    }

    private static Sums SumsOf(Network network, ProbePanel panel, Panel<float> r, Panel<float> w, int start, int end)
    {
        Sums sums = new();
        double* row = stackalloc double[Width];
        for (int u = start; u < end; u++)
        {
            MultiplyRow(network, w, u, row);
            float* residual = Row(r, u), found = Row(w, u), z = Row(panel.Z, u), b = Row(panel.B, u);
            double strength = network.Strengths[u];
            for (int j = 0; j < Width; j++)
            {
                sums.Products[j] += (double)found[j] * residual[j];
                sums.Energies[j] += found[j] * row[j];
                sums.Probes[j] += (double)z[j] * b[j];
                sums.Roundings[j] += strength * z[j] * z[j];
            }
        }
        return sums;
    }

    // (Lx)_u
    private static void MultiplyRow(Network network, Panel<float> x, int u, double* row)
    {
        new Span<double>(row, Width).Clear();
        float* own = Row(x, u);
        for (long k = network.RowStart[u]; k < network.RowStart[u + 1]; k++)
            DeflationKernels.AddDifference(own, Row(x, network.Neighbours[k]), network.Conductance(k), row);
    }

    private static float* Row(Panel<float> panel, int node) => panel.Pointer + ((long)node * Width);

    private sealed class Sums
    {
        public readonly double[] Products = new double[Width]; // w'r
        public readonly double[] Energies = new double[Width]; // w'L w
        public readonly double[] Probes = new double[Width]; // z'b = |z|_L^2
        public readonly double[] Roundings = new double[Width]; // sum of d z^2

        public void Add(Sums other)
        {
            for (int j = 0; j < Width; j++)
            {
                Products[j] += other.Products[j];
                Energies[j] += other.Energies[j];
                Probes[j] += other.Probes[j];
                Roundings[j] += other.Roundings[j];
            }
        }

        public double WorstModeError(int nodes, int columns)
        {
            double worst = 0;
            for (int j = 0; j < columns; j++)
            {
                double error = Energies[j] > 0 ? Math.Abs(Products[j]) / Math.Sqrt(Energies[j]) : 0;
                double left = error - (Rounding * Math.Sqrt(2 * Roundings[j]));
                if (left > 0)
                    worst = Math.Max(worst, left * Math.Sqrt((nodes - 1) / Probes[j]));
            }
            return worst;
        }
    }
}
