// The kernels of an iteration on a network that does not fit the caches. Divide a kernel's bytes (the head of VectorKernels.cs) by its time
// and compare with Copy, which moves two panels.

using BenchmarkDotNet.Attributes;
using ScaleResist.DataGen.Networks;
using ScaleResist.Graphs;
using ScaleResist.Kernels;

namespace ScaleResist.Bench;

/// <summary>Panel kernels, vector against scalar twin.</summary>
public unsafe class KernelBenchmarks
{
    private Network network = null!;
    private SplitLaplacian split = null!;
    private Panel<float> x = null!, r = null!, p = null!, q = null!;
    private int n;

    /// <summary>The network.</summary>
    [Params(Family.Grid, Family.Preferential)]
    public Family Family { get; set; }

    /// <summary>Whether the scalar twins run.</summary>
    [Params(false, true)]
    public bool Scalar { get; set; }

    /// <summary>Builds a network of a million nodes and its panels.</summary>
    [GlobalSetup]
    public void SetUp()
    {
        EdgeListBuilder builder = new(weighted: false);
        NetworkGenerator.Generate(new FamilyPlan(Family, 1_000_000), new Sink(builder));
        network = NetworkBuilder.Build(builder.Finish(new InputFacts { Path = "bench", Form = "memory", Sha256 = "", Columns = ["1", "2"] }));
        n = network.NodeCount;
        split = SplitLaplacian.Of(network.Laplacian);
        (x, r, p, q) = (new(n), new(n), new(n), new(n));
        ProbeKernels.Fill(network, 1, 0, 0xFFFF, p, 0, n);
        PanelKernels.Scalar = Scalar;
    }

    /// <summary>The yardstick: one panel copied.</summary>
    [Benchmark(Baseline = true)]
    public void Copy() => Buffer.MemoryCopy(p.Pointer, x.Pointer, n * 64L, n * 64L);

    /// <summary>q = L p.</summary>
    [Benchmark]
    public double Multiply() => PanelKernels.Multiply(network.Laplacian, p, q, 0, n)[0];

    /// <summary>Gauss-Seidel's direction and back sweep.</summary>
    [Benchmark]
    public double Back() => GaussSeidelKernels.Back(split, r, p, q, default, 0, n)[0];

    /// <summary>Gauss-Seidel's forward sweep and step.</summary>
    [Benchmark]
    public double Forward() => GaussSeidelKernels.Forward(split, x, r, p, q, default, 0, n)[0];

    /// <summary>b = B' C^(1/2) q.</summary>
    [Benchmark]
    public void FillProbes() => ProbeKernels.Fill(network, 1, 0, 0xFFFF, r, 0, n);

    private sealed class Sink(EdgeListBuilder builder) : ILinkSink
    {
        public void Link(long source, long target, double conductance) => builder.Add(source, target);
    }
}
