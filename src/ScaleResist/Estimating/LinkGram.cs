// The Gram matrix of a link's basis and its small solve: 2s vectors p_k(u), -p_k(v), in the order of LinkSteps.
// Invariant: the gain is computed from the corrections as they are kept, rounded.

namespace ScaleResist.Estimating;

/// <summary>A workspace for one link at a time.</summary>
internal sealed class LinkGram
{
    private readonly int steps;
    private readonly int size;
    private readonly double[] gram;
    private readonly double[] factor;
    private readonly double[] right;
    private readonly double[] solution;
    private readonly double[] between;
    private readonly double[] backU;
    private readonly double[] backV;
    private double du;
    private double dv;

    /// <summary>Room for s steps.</summary>
    public LinkGram(int steps)
    {
        this.steps = steps;
        size = 2 * steps;
        (gram, factor) = (new double[size * size], new double[size * size]);
        (right, solution) = (new double[size], new double[size]);
        Rounded = new ushort[size];
        (between, backU, backV) = (new double[size], new double[size], new double[size]);
    }

    /// <summary>The corrections, each the upper half of a float; the first two as factors of b.</summary>
    public ushort[] Rounded { get; }

    /// <summary>G and h of a link.</summary>
    public void Fill(
        double c, double du, double dv, bool passU, bool passV, ReadOnlySpan<double> ofU, ReadOnlySpan<double> ofV, ReadOnlySpan<double> ofLink)
    {
        (this.du, this.dv) = (du, dv);
        (backU[0], backU[1], backV[0], backV[1], between[0], between[1]) = (1 / du, 0, 1 / dv, 0, 0, c / (du * dv));
        ofU.CopyTo(backU.AsSpan(2));
        ofV.CopyTo(backV.AsSpan(2));
        ofLink.CopyTo(between.AsSpan(2));
        double wu = passU ? 1 : 0, wv = passV ? 1 : 0;
        for (int j = 0; j < steps; j++)
        {
            for (int k = 0; k < steps; k++)
            {
                // The vector without a step, where the other has some, lies at a node that may not be passed.
                double first = j == 0 && k > 0 ? wu : k == 0 && j > 0 ? wu : 1, second = j == 0 && k > 0 ? wv : k == 0 && j > 0 ? wv : 1;
                double mixed = j == 0 && k > 0 ? wu : k == 0 && j > 0 ? wv : 1;
                gram[(2 * j * size) + (2 * k)] = (first * backU[j + k]) - backU[j + k + 1];
                gram[(((2 * j) + 1) * size) + (2 * k) + 1] = (second * backV[j + k]) - backV[j + k + 1];
                gram[(2 * j * size) + (2 * k) + 1] = between[j + k + 1] - (mixed * between[j + k]);
                gram[(((2 * k) + 1) * size) + (2 * j)] = gram[(2 * j * size) + (2 * k) + 1];
            }
            right[2 * j] = ((j == 0 ? 1 : wu) * backU[j]) - (wv * between[j]);
            right[(2 * j) + 1] = ((j == 0 ? 1 : wv) * backV[j]) - (wu * between[j]);
        }
    }

    /// <summary>Solves for the corrections to the one-step residual; returns what they gain, not above 0 where they are of no use.</summary>
    public double Solve(in LinkBounds bounds, double leastPivot)
    {
        // What one step leaves: the first two vanish, for it is the best of delta_u and delta_v.
        double stepU = bounds.FactorU * du, stepV = bounds.FactorV * dv;
        right[0] = right[1] = 0;
        for (int i = 2; i < size; i++)
            right[i] -= (stepU * gram[i * size]) + (stepV * gram[(i * size) + 1]);
        Factorise(leastPivot);
        Substitute();
        for (int i = 0; i < size; i++)
        {
            double scale = i == 0 ? du : i == 1 ? dv : 1;
            Rounded[i] = Round(solution[i] / scale);
            solution[i] = LinkSteps.Widen(Rounded[i]) * scale;
        }
        double gain = 0;
        for (int i = 0; i < size; i++)
        {
            double product = 0;
            for (int j = 0; j < size; j++)
                product += gram[(i * size) + j] * solution[j];
            gain += solution[i] * ((2 * right[i]) - product);
        }
        return gain;
    }

    // G = F F'; a vector that adds no direction gets no part of the solution.
    private void Factorise(double leastPivot)
    {
        for (int i = 0; i < size; i++)
        {
            for (int j = 0; j <= i; j++)
            {
                double rest = gram[(i * size) + j];
                for (int k = 0; k < j; k++)
                    rest -= factor[(i * size) + k] * factor[(j * size) + k];
                if (j < i)
                    factor[(i * size) + j] = factor[(j * size) + j] == 0 ? 0 : rest / factor[(j * size) + j];
                else
                    factor[(i * size) + i] = rest > leastPivot * gram[(i * size) + i] ? Math.Sqrt(rest) : 0;
            }
        }
    }

    private void Substitute()
    {
        for (int i = 0; i < size; i++)
        {
            double rest = right[i];
            for (int k = 0; k < i; k++)
                rest -= factor[(i * size) + k] * solution[k];
            solution[i] = factor[(i * size) + i] == 0 ? 0 : rest / factor[(i * size) + i];
        }
        for (int i = size - 1; i >= 0; i--)
        {
            double rest = solution[i];
            for (int k = i + 1; k < size; k++)
                rest -= factor[(k * size) + i] * solution[k];
            solution[i] = factor[(i * size) + i] == 0 ? 0 : rest / factor[(i * size) + i];
        }
    }

    // To the nearest float of 8 significant bits.
    private static ushort Round(double value) => (ushort)((BitConverter.SingleToUInt32Bits((float)value) + 0x8000) >> 16);
}
