// What is measured: whole jobs by phase, and the kernels of an iteration.

using BenchmarkDotNet.Running;
using ScaleResist.Bench;
using ScaleResist.Bench.Coverage;

switch (args)
{
    case ["kernels", .. string[] rest]:
        BenchmarkSwitcher.FromTypes([typeof(KernelBenchmarks)]).Run(rest.Length > 0 ? rest : ["--filter", "*"]);
        return 0;
    case ["traffic"]:
        TrafficTable.Run();
        return 0;
    case ["job", string file]:
        WholeJob.Run(file, 16);
        return 0;
    case ["job", string file, string probes] when int.TryParse(probes, out int count):
        WholeJob.Run(file, count);
        return 0;
    case ["solver"]:
        SolverBench.Run(null, 64);
        return 0;
    case ["solver", string family]:
        SolverBench.Run(family == "all" ? null : family, 64);
        return 0;
    case ["solver", string family, string solves] when int.TryParse(solves, out int count):
        SolverBench.Run(family == "all" ? null : family, count);
        return 0;
    case ["setup"]:
        SetUpBench.Run(null);
        return 0;
    case ["setup", string family]:
        SetUpBench.Run(family);
        return 0;
    case ["exact"]:
        ExactBench.Run(null);
        return 0;
    case ["exact", string family]:
        ExactBench.Run(family == "all" ? null : family);
        return 0;
    case ["distances"]:
        DistanceBench.Run(null);
        return 0;
    case ["distances", string family]:
        DistanceBench.Run(family);
        return 0;
    case ["links", string file, string probes, string references] when int.TryParse(probes, out int count) && int.TryParse(references, out int many):
        LinkErrorBench.Run(file, count, many);
        return 0;
    case ["coverage"]:
        CoverageBench.Run(null, 400);
        return 0;
    case ["coverage", string family]:
        CoverageBench.Run(family == "all" ? null : family, 400);
        return 0;
    case ["coverage", string family, string seeds] when int.TryParse(seeds, out int count):
        CoverageBench.Run(family == "all" ? null : family, count);
        return 0;
    default:
        Console.Error.WriteLine(
            "say: kernels [BenchmarkDotNet options] | traffic | job FILE [PROBES] | solver [FAMILY | all [SOLVES]] | setup [FAMILY] "
            + "| exact [FAMILY | all] | distances [road | preferential | grid] | coverage [FAMILY | all [SEEDS]] | links FILE PROBES REFERENCES");
        return 2;
}
