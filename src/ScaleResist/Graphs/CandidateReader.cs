// Links that might be added, as a table gives them.
// Invariant: both ends lie in one component and differ; conductances, and costs where there are any, are finite and positive.

using System.Globalization;

namespace ScaleResist.Graphs;

/// <summary>A link that might be added, in parallel where there is one already.</summary>
/// <param name="U">One end.</param>
/// <param name="V">The other.</param>
/// <param name="Conductance">What it would add.</param>
/// <param name="Cost">What it would cost, in any unit; null where costs are not given.</param>
public readonly record struct Candidate(int U, int V, double Conductance, double? Cost);

/// <summary>Reads candidates.</summary>
public static class CandidateReader
{
    /// <summary>The columns of the table.</summary>
    public static NamedColumns Columns { get; } = new(["source", "target", "conductance"], ["cost"]);

    /// <summary>Reads all rows.</summary>
    /// <exception cref="InputException">A row cannot be used; the message names it.</exception>
    public static List<Candidate> Read(INamedRows rows, Network network)
    {
        int[] componentOf = network.ComponentOfNodes();
        List<Candidate> candidates = [];
        while (rows.Read())
        {
            int u = ChangeReader.Node(rows, network, rows[0]), v = ChangeReader.Node(rows, network, rows[1]);
            if (u == v)
                throw ChangeReader.Fault(rows, $"source and target are both '{InputException.Show(rows[0])}'", "name the two ends of a link");
            if (componentOf[u] != componentOf[v])
            {
                throw ChangeReader.Fault(rows,
                    $"'{InputException.Show(rows[0])}' and '{InputException.Show(rows[1])}' lie in different components",
                    "leave the row out; a case of --changes says what joining them does to the index");
            }
            double conductance = ChangeReader.Conductance(rows, rows[2]);
            double? cost = null;
            if (rows.Has(3))
            {
                bool isNumber = double.TryParse(rows[3], NumberStyles.Float, CultureInfo.InvariantCulture, out double given);
                if (!isNumber || !(given > 0) || !double.IsFinite(given))
                {
                    throw ChangeReader.Fault(rows, $"the cost '{InputException.Show(rows[3])}' is not a finite positive number",
                        "give every candidate a cost above zero, or leave the column out");
                }
                cost = given;
            }
            candidates.Add(new Candidate(u, v, conductance, cost));
        }
        return candidates.Count > 0 ? candidates : throw new InputException(rows.Path, null, "has no data rows", "give at least one row");
    }
}
