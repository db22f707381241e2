// Help that fits a screen of 80 by 40, each with one example that works as it stands.

namespace ScaleResist.Cli;

/// <summary>The texts of <c>--help</c>.</summary>
internal static class HelpText
{
    public const string Program = """
        scaleresist: resistance distances, spanning probabilities and the Kirchhoff
        index of large networks, with error bars, as Parquet tables in a data lake.

        Usage: scaleresist estimate NETWORK --lake DIR [options]   the main job
               scaleresist survey NETWORK [options]                what it would take
               scaleresist tune NETWORK [options]                  accuracy against time
               scaleresist VERB --help
               scaleresist --version

        Example: scaleresist estimate power.tsv --lake lake --probes 64

        Exit codes: 0 done, 1 a fault of ours, 2 wrong command line, 3 bad input,
        4 more memory or time than there is, 5 interrupted, 6 writing failed.

        """;

    public const string Estimate = """
        scaleresist estimate NETWORK --lake DIR [options]

        NETWORK is .csv .tsv .txt .edges (also .gz .zst), .mtx, or .parquet (file or
        folder). Tables appear as DIR/run=ID/<table>/part-*.parquet in one step.

          --lake DIR            folder of the lake; made where it is not there
          --run-id ID           name of the run; else from the file's name and the time
          --want LIST           index,components,nodes,links (all four unless said),
                                pairs,coordinates; less is faster
          --weights MEANING     none, conductance or resistance: what column 3 means
          --columns SRC,DST[,W] columns by name or number
          --pairs FILE          pairs of nodes whose resistance is wanted
          --node-weights FILE   weights for the node-weighted Kirchhoff index
          --route ROUTE         exact, probe, or auto (unless said): exact where a
                                factor is affordable, else 64 probes
          --probes K            probe with 4 to 4096 random probes; four times the
                                probes halve the error and take four times as long
          --target-error E      or as many as it takes for 95 % of the relative
                                standard errors to be below E, such as 0.02
          --time-budget T       4h, 90m, 30s: at most as many as fit; with --probes
                                refuse a run foreseen to take longer
          --memory-budget M     16GiB, 500MB: refuse a run foreseen to need more
          --confidence P        of the intervals (0.95 unless said)
          --seed S              of the random signs (1 unless said)
          --threads T           1 to 256 (all cores unless said); results are the same
          --restart             discard what an unfinished run of this id left
          --verbose             show the stack of a fault
        Not in this version: --shard, --terminals.

        Example: scaleresist estimate roads.csv --lake lake --columns from,to,km
                 --weights resistance --want index,links --probes 64

        """;

    public const string Survey = """
        scaleresist survey NETWORK [options]

        Reads the network and says what is in it, which route an estimate of
        index, components, nodes and links would take, and the time and memory
        it would need. It writes nothing.

          --weights MEANING     none, conductance or resistance: what column 3 means
          --columns SRC,DST[,W] columns by name or number
          --probes K            foresee this many probes (64 unless said)
          --time-budget T       4h, 90m, 30s: what the exact route may take
          --memory-budget M     16GiB, 500MB: what it may need
          --threads T           1 to 256 (all cores unless said)
          --verbose             show the stack of a fault

        Example: scaleresist survey roads.csv --columns from,to,km
                 --weights resistance

        """;

    public const string Tune = """
        scaleresist tune NETWORK [options]

        Measures this network on this machine (a run of 64 probes, a few panels of
        larger ones, the exact route where it is affordable) and prints how accuracy
        and time trade, each point with its command. Takes a few such runs' time.

          --lake DIR            also write the points as table frontier in this lake
          --run-id ID           name of that run; else from the file's name and the time
          --want LIST           index,components,nodes,links (all four unless said),
                                coordinates: what the estimate would write
          --weights MEANING     none, conductance or resistance: what column 3 means
          --columns SRC,DST[,W] columns by name or number
          --memory-budget M     16GiB, 500MB: leave out what is foreseen to need more
          --confidence P        of the intervals (0.95 unless said)
          --seed S              of the random signs (1 unless said)
          --threads T           1 to 256 (all cores unless said)
          --verbose             show the stack of a fault

        Example: scaleresist tune roads.csv --columns from,to,km
                 --weights resistance --want index,links

        """;
}
