// Planned cases of a network: links lost, added or set, and nodes lost, as a table gives them row by row.
// Invariant: within a case every link stands once, with its conductance before and after; a lost node has lost all its links.

using System.Globalization;

namespace ScaleResist.Graphs;

/// <summary>A link whose conductance changes; 0 where it is not there.</summary>
/// <param name="U">The smaller internal node.</param>
/// <param name="V">The larger internal node.</param>
/// <param name="Before">Conductance before.</param>
/// <param name="After">Conductance after.</param>
public readonly record struct LinkChange(int U, int V, double Before, double After);

/// <summary>What happens together.</summary>
/// <param name="Id">The case's name.</param>
/// <param name="Rows">How many rows of the table it has.</param>
/// <param name="Links">Every link that changes, those of lost nodes among them, ascending.</param>
/// <param name="LostNodes">Nodes that are lost, ascending.</param>
public sealed record PlannedCase(string Id, int Rows, IReadOnlyList<LinkChange> Links, IReadOnlyList<int> LostNodes);

/// <summary>Reads planned cases.</summary>
public static class ChangeReader
{
    /// <summary>The columns of the table.</summary>
    public static NamedColumns Columns { get; } = new(["case", "action", "source", "target", "conductance"], []);

    /// <summary>Reads all rows, which need not be in the order of cases; cases come in the order of their first rows.</summary>
    /// <exception cref="InputException">A row cannot be used; the message names it.</exception>
    public static List<PlannedCase> Read(INamedRows rows, Network network)
    {
        Dictionary<string, Draft> drafts = [];
        List<Draft> order = [];
        while (rows.Read())
        {
            string id = rows[0];
            if (id.Length is 0 or > RowRequest.LongestLabel)
                throw Fault(rows, "the case has no id, or too long a one", $"give every row a case of 1 to {RowRequest.LongestLabel} characters");
            if (!drafts.TryGetValue(id, out Draft? draft))
                order.Add(drafts[id] = draft = new Draft(id, network));
            draft.Add(rows);
        }
        if (order.Count == 0)
            throw new InputException(rows.Path, null, "has no data rows", "give at least one row");
        return order.ConvertAll(draft => draft.Finish(rows.Path));
    }

    /// <summary>The node that a cell names.</summary>
    internal static int Node(INamedRows rows, Network network, string label)
    {
        if (label.Length == 0)
            throw Fault(rows, "a node id is empty", "name source and target");
        int node = network.Labels.IndexOf(label);
        return node >= 0 ? node : throw Fault(rows, $"the network has no node '{InputException.Show(label)}'",
            "name nodes of the network, spelled as in its file");
    }

    /// <summary>A positive number within the range of conductances.</summary>
    internal static double Conductance(INamedRows rows, string cell)
    {
        if (!double.TryParse(cell, NumberStyles.Float, CultureInfo.InvariantCulture, out double c) || !(c > 0) || !double.IsFinite(c))
        {
            throw Fault(rows, $"the conductance '{InputException.Show(cell)}' is not a finite positive number",
                "give a number above zero, such as 0.5; a link that goes is lost, not set to 0");
        }
        return c is >= EdgeListReader.SmallestWeight and <= EdgeListReader.LargestWeight ? c
            : throw Fault(rows, $"the conductance {InputException.Show(cell)} is not within 1e-18 to 1e18", "use the unit of the network's links");
    }

    internal static InputException Fault(INamedRows rows, string problem, string mend) => new(rows.Path, rows.Line, problem, mend);

    private sealed class Draft(string id, Network network)
    {
        private readonly SortedDictionary<(int U, int V), (LinkChange Change, long Line)> links = [];
        private readonly SortedSet<int> lost = [];
        private int count;

        public void Add(INamedRows rows)
        {
            count++;
            string action = rows[1], target = rows[3], cell = rows[4];
            if (action is not ("lose" or "add" or "set"))
            {
                throw Fault(rows, action.Length == 0 ? "there is no action" : $"the action '{InputException.Show(action)}' is unknown",
                    "write lose, add or set");
            }
            int u = Node(rows, network, rows[2]);
            if (action == "lose" && cell.Length > 0)
            {
                throw Fault(rows, $"a loss has no conductance, and '{InputException.Show(cell)}' is given",
                    "leave it empty, or write set with what is left of the link");
            }
            if (target.Length == 0)
            {
                if (action != "lose")
                    throw Fault(rows, $"there is no target to {action} a link to", "name source and target; only lose may name a node alone");
                lost.Add(u);
                return;
            }
            int v = Node(rows, network, target);
            if (u == v)
                throw Fault(rows, $"source and target are both '{InputException.Show(target)}'", "name the two ends of a link");
            (u, v) = (Math.Min(u, v), Math.Max(u, v));
            long arc = network.FindArc(u, v);
            double before = arc < 0 ? 0 : network.Conductance(arc);
            if (action != "add" && arc < 0)
            {
                throw Fault(rows, $"there is no link between '{InputException.Show(rows[2])}' and '{InputException.Show(target)}' to {action}",
                    action == "set" ? "write add, or name a link of the network" : "name a link of the network");
            }
            double after = action == "lose" ? 0 : Conductance(rows, cell) + (action == "add" ? before : 0);
            if (links.TryGetValue((u, v), out (LinkChange, long Line) other))
            {
                throw Fault(rows, $"the link stands in case '{InputException.Show(id)}' already, at line {other.Line}",
                    "give each link one row a case");
            }
            links[(u, v)] = (new LinkChange(u, v, before, after), rows.Line);
        }

        public PlannedCase Finish(string path)
        {
            foreach ((LinkChange change, long line) in links.Values)
            {
                if (change.After > 0 && (lost.Contains(change.U) || lost.Contains(change.V)))
                {
                    int node = lost.Contains(change.U) ? change.U : change.V;
                    throw new InputException(path, line,
                        $"the case loses the node '{InputException.Show(network.Labels[node])}' and keeps a link of it", "leave the link out, or keep the node");
                }
            }
            foreach (int u in lost)
            {
                for (long k = network.RowStart[u]; k < network.RowStart[u + 1]; k++)
                {
                    int v = network.Neighbours[k];
                    (int, int) ends = (Math.Min(u, v), Math.Max(u, v));
                    links.TryAdd(ends, (new LinkChange(ends.Item1, ends.Item2, network.Conductance(k), 0), 0));
                }
            }
            return new PlannedCase(id, count, [.. links.Values.Select(link => link.Change)], [.. lost]);
        }
    }
}
