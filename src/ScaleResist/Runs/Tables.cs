// The tables of an estimate as readers of the lake know them. Names and kinds are a contract: users' queries stand on them.

namespace ScaleResist.Runs;

/// <summary>Definitions of the tables an estimate writes; node labels are int64 or text.</summary>
public static class Tables
{
    /// <summary>Version of the layout below; it rises when a column changes.</summary>
    public const int SchemaVersion = 1;

    /// <summary>One row a component.</summary>
    public static TableDefinition Index { get; } = new("index",
    [
        new("component_id", ColumnKind.Int64),
        new("nodes", ColumnKind.Int64),
        new("links", ColumnKind.Int64),
        new("total_conductance", ColumnKind.Double),
        new("kirchhoff_index", ColumnKind.Double),
        new("kirchhoff_index_se", ColumnKind.Double),
        new("kirchhoff_index_lower", ColumnKind.Double),
        new("kirchhoff_index_upper", ColumnKind.Double),
        new("mean_resistance", ColumnKind.Double),
        new("degree_kirchhoff_index", ColumnKind.Double),
        new("kemeny_constant", ColumnKind.Double),
        new("node_weighted_kirchhoff_index", ColumnKind.Double, Nullable: true),
        new("foster_sum", ColumnKind.Double),
        new("log_spanning_trees", ColumnKind.Double, Nullable: true),
        new("algebraic_connectivity", ColumnKind.Double, Nullable: true),
        new("method", ColumnKind.Text),
        new("probes", ColumnKind.Int64),
    ]);

    /// <summary>One row a node: its component.</summary>
    public static TableDefinition Components(ColumnKind label) => new("components",
    [
        new("node", label),
        new("component_id", ColumnKind.Int64),
    ]);

    /// <summary>One row a node; with terminals two more columns.</summary>
    public static TableDefinition Nodes(ColumnKind label, bool terminals = false) => new("nodes",
    [
        new("node", label),
        new("component_id", ColumnKind.Int64),
        new("degree", ColumnKind.Int64),
        new("strength", ColumnKind.Double),
        new("resistance_diagonal", ColumnKind.Double),
        new("resistance_diagonal_se", ColumnKind.Double),
        new("total_resistance", ColumnKind.Double),
        new("closeness", ColumnKind.Double),
        new("closeness_rank", ColumnKind.Int64),
        new("rank_lower", ColumnKind.Int64),
        new("rank_upper", ColumnKind.Int64),
        new("method", ColumnKind.Text),
        .. terminals
            ? (ColumnDefinition[])[new("resistance_to_terminals", ColumnKind.Double), new("resistance_to_terminals_se", ColumnKind.Double)]
            : [],
    ]);

    /// <summary>One row a link.</summary>
    public static TableDefinition Links(ColumnKind label) => new("links",
    [
        new("source", label),
        new("target", label),
        new("component_id", ColumnKind.Int64),
        new("conductance", ColumnKind.Double),
        new("resistance", ColumnKind.Double),
        new("resistance_se", ColumnKind.Double),
        new("resistance_lower", ColumnKind.Double),
        new("resistance_upper", ColumnKind.Double),
        new("spanning_probability", ColumnKind.Double),
        new("is_bridge", ColumnKind.Boolean),
        new("nodes_cut_off", ColumnKind.Int64, Nullable: true),
        new("loss_impact", ColumnKind.Double, Nullable: true),
        new("loss_impact_se", ColumnKind.Double, Nullable: true),
        new("method", ColumnKind.Text),
    ]);

    /// <summary>One row a requested pair.</summary>
    public static TableDefinition Pairs(ColumnKind label) => new("pairs",
    [
        new("source", label),
        new("target", label),
        new("resistance", ColumnKind.Double),
        new("resistance_se", ColumnKind.Double),
        new("resistance_lower", ColumnKind.Double),
        new("resistance_upper", ColumnKind.Double),
        new("method", ColumnKind.Text),
    ]);

    /// <summary>One row a node: K coordinates.</summary>
    public static TableDefinition Coordinates(ColumnKind label) => new("coordinates",
    [
        new("node", label),
        new("strength", ColumnKind.Double),
        new("r", ColumnKind.FloatList),
    ]);

    /// <summary>One row a way to run an estimate, as <c>tune</c> foresees it; see <see cref="FrontierPoint"/>.</summary>
    public static TableDefinition Frontier { get; } = new("frontier",
    [
        new("route", ColumnKind.Text),
        new("probes", ColumnKind.Int64, Nullable: true),
        new("predicted_error", ColumnKind.Double, Nullable: true),
        new("predicted_index_error", ColumnKind.Double, Nullable: true),
        new("achieved_error", ColumnKind.Double, Nullable: true),
        new("achieved_index_error", ColumnKind.Double, Nullable: true),
        new("predicted_seconds", ColumnKind.Double),
        new("achieved_seconds", ColumnKind.Double, Nullable: true),
        new("predicted_bytes", ColumnKind.Int64),
        new("on_frontier", ColumnKind.Boolean),
        new("command", ColumnKind.Text),
    ]);

    /// <summary>One row a link or pair that an audit solved.</summary>
    public static TableDefinition Audit(ColumnKind label) => new("audit",
    [
        new("source", label),
        new("target", label),
        new("resistance", ColumnKind.Double),
        new("reference_lower", ColumnKind.Double),
        new("reference_upper", ColumnKind.Double),
        new("relative_error", ColumnKind.Double),
    ]);

    /// <summary>One row a planned case.</summary>
    public static TableDefinition Impact(ColumnKind id) => new("impact",
    [
        new("case", id),
        new("changes", ColumnKind.Int64),
        new("kirchhoff_index_before", ColumnKind.Double),
        new("kirchhoff_index_after", ColumnKind.Double),
        new("change", ColumnKind.Double),
        new("change_se", ColumnKind.Double),
        new("change_lower", ColumnKind.Double),
        new("change_upper", ColumnKind.Double),
        new("components_after", ColumnKind.Int64),
        new("nodes_cut_off", ColumnKind.Int64),
        new("method", ColumnKind.Text),
        new("kirchhoff_index_before_se", ColumnKind.Double),
        new("node_weighted_kirchhoff_index_before", ColumnKind.Double, Nullable: true),
        new("node_weighted_kirchhoff_index_after", ColumnKind.Double, Nullable: true),
    ]);

    /// <summary>One row a planned case and requested pair.</summary>
    public static TableDefinition ImpactPairs(ColumnKind id, ColumnKind label) => new("impact_pairs",
    [
        new("case", id),
        new("source", label),
        new("target", label),
        new("resistance_before", ColumnKind.Double),
        new("resistance_after", ColumnKind.Double),
        new("change", ColumnKind.Double),
        new("change_se", ColumnKind.Double),
        new("method", ColumnKind.Text),
    ]);

    /// <summary>One row an addition suggested, the best first.</summary>
    public static TableDefinition Suggestions(ColumnKind label) => new("suggestions",
    [
        new("rank", ColumnKind.Int64),
        new("source", label),
        new("target", label),
        new("conductance", ColumnKind.Double),
        new("cost", ColumnKind.Double, Nullable: true),
        new("gain", ColumnKind.Double),
        new("gain_se", ColumnKind.Double),
        new("gain_per_cost", ColumnKind.Double, Nullable: true),
        new("kirchhoff_index_after", ColumnKind.Double),
        new("method", ColumnKind.Text),
    ]);
}
