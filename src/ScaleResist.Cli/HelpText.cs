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
               scaleresist impact NETWORK --lake DIR [options]     planned changes
               scaleresist distances NETWORK --lake DIR [options]  lightest routes
               scaleresist estimate --help, and so for every verb
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
          --terminals FILE      nodes shorted into one: each node's resistance to it
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
        Not in this version: --shard.

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

    public const string Impact = """
        scaleresist impact NETWORK --changes FILE --lake DIR [options]
        scaleresist impact NETWORK --suggest N --lake DIR [options]

        What losing, adding or changing links would do to the Kirchhoff index: for
        planned cases, or the N additions that lower it most, one after the other.

          --changes FILE        columns case, action, source, target, conductance; the
                                action is lose, add (in parallel) or set (to a new
                                conductance); lose without a target loses a node;
                                rows of the same case happen together
          --pairs FILE          pairs whose resistance is wanted in every case
          --suggest N           1 to 1000 additions
          --candidates FILE     columns source, target, conductance and, if wanted,
                                cost; else pairs that are far apart are tried
          --budget B            the most gain per cost, for B in all
          --node-weights FILE   also the node-weighted index; suggestions lower it
          --lake DIR            folder of the lake; made where it is not there
          --run-id ID           name of the run; else from the file's name and the time
          --weights MEANING     none, conductance or resistance: what column 3 means
          --columns SRC,DST[,W] columns by name or number
          --route ROUTE         exact, probe, or auto (unless said): a factor where it
                                is affordable, else solves
          --memory-budget M     16GiB, 500MB: refuse a run foreseen to need more
          --confidence P        of the intervals (0.95 unless said)
          --seed S              of the random signs (1 unless said)
          --threads T           1 to 256 (all cores unless said); results are the same
          --restart             discard what an unfinished run of this id left
          --verbose             show the stack of a fault

        Example: scaleresist impact mains.csv --changes works.csv --lake lake
                 --weights conductance

        """;

    public const string Distances = """
        scaleresist distances NETWORK --lake DIR [options]

        Distances where the cost of a route is the weight of the nodes it enters (its
        end counts, its start does not), or one a step: of pairs; the eccentricity of
        every node, diameter and radius; Wiener index and share of pairs by distance.

          --lake DIR            folder of the lake; made where it is not there
          --run-id ID           name of the run; else from the file's name and the time
          --want LIST           eccentricity,summary (both unless said),profile,pairs
          --node-weights FILE   node and weight, from zero up; every node counts 1
                                without, or 0 where links have lengths
          --lengths             the third column holds lengths of links, from zero up,
                                which add; without, a third column is not looked at
          --columns SRC,DST[,W] columns by name or number
          --pairs FILE          pairs of nodes whose distance is wanted
          --beside RUN          a run of estimate in this lake: the resistance of each
                                pair beside its distance, and their ratio
          --sources FILE        nodes: eccentricity, summary and profile of these alone
          --target-error E      relative standard error of Wiener indices that must be
                                sampled (0.005 unless said: 95 % within one per cent)
          --confidence P        of their intervals (0.95 unless said)
          --seed S              of the sample (1 unless said)
          --threads T           1 to 256 (all cores unless said); results are the same
          --restart             discard what an unfinished run of this id left
          --verbose             show the stack of a fault

        Example: scaleresist distances streets.csv --lake lake --run-id monday
                 --node-weights junctions.csv --pairs trips.csv

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
