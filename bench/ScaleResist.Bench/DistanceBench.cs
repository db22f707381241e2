// Single-source searches on one thread, each from the same nine random nodes; rivals/distances.py has the other side.

using System.Diagnostics;
using ScaleResist.DataGen.Networks;
using ScaleResist.Distances;
using ScaleResist.Graphs;

namespace ScaleResist.Bench;

internal static class DistanceBench
{
    private const int Searches = 9;

    private static readonly (string Key, FamilyPlan Plan)[] Families =
    [
        ("road", new(Family.Road, 1_000_000)),
        ("preferential", new(Family.Preferential, 1_000_000, 8_000_000)),
        ("grid", new(Family.Grid, 1_000_000)),
    ];

    public static void Run(string? only)
    {
        Console.WriteLine("| network | costs | search | ms, least | ms, median |\n| --- | --- | --- | --- | --- |");
        foreach ((string key, FamilyPlan plan) in Families)
        {
            if (only is not null && only != key)
                continue;
            Network network = SolverBench.Generate(plan);
            Random random = new(1);
            Row(key, "hops", new DistanceCosts(network));
            Row(key, "1 to 100", new DistanceCosts(network, [.. Enumerable.Range(0, network.NodeCount).Select(_ => (double)random.Next(1, 101))]));
            Row(key, "real", new DistanceCosts(network, [.. Enumerable.Range(0, network.NodeCount).Select(_ => random.NextDouble())]));
        }
    }

    private static void Row(string network, string kind, DistanceCosts costs)
    {
        DistanceSearch search = DistanceSearch.For(costs);
        Random random = new(2);
        double[] times = new double[Searches];
        search.Search(0);
        for (int i = 0; i < Searches; i++)
        {
            int source = random.Next(costs.Network.NodeCount);
            long begin = Stopwatch.GetTimestamp();
            search.Search(source);
            times[i] = Stopwatch.GetElapsedTime(begin).TotalMilliseconds;
        }
        Array.Sort(times);
        Console.WriteLine($"| {network} | {kind} | {search.GetType().Name} | {times[0]:0.0} | {times[Searches / 2]:0.0} |");
    }
}
