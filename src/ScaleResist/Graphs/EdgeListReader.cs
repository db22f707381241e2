// Rows to an edge list: what the number in the third column means, and that it lies in the range of numbers that can be summed.
// Invariant: every conductance of an EdgeList lies from 1e-18 to 1e18, and every length from 0 to 1e18, so that no sum over parallel links,
// a node or a route overflows.

using System.Globalization;

namespace ScaleResist.Graphs;

/// <summary>Reads a network's links.</summary>
public static class EdgeListReader
{
    /// <summary>The smallest weight of a link; as a resistance, the reciprocal of <see cref="LargestWeight"/>.</summary>
    public const double SmallestWeight = 1e-18;

    /// <summary>The largest weight of a link.</summary>
    public const double LargestWeight = 1e18;

    /// <summary>Reads a text file of links in one pass: <c>.csv .tsv .txt .edges .mtx</c>, each also <c>.gz</c> and
    /// <c>.zst</c>.</summary>
    /// <param name="path">The file; its ending names the form.</param>
    /// <param name="options">What the columns mean.</param>
    /// <param name="bytesRead">Told the bytes read from disk so far.</param>
    /// <param name="ct">Stops reading.</param>
    /// <exception cref="InputException">The file cannot be used; the message says where and how to mend it.</exception>
    public static EdgeList Read(
        string path, ReadOptions options, Action<long>? bytesRead = null, CancellationToken ct = default)
    {
        using IRowSource rows = TextRows.Open(path, Request(path, options), bytesRead, ct);
        return Read(rows, options.Weights);
    }

    /// <summary>What to ask a row source for.</summary>
    /// <exception cref="InputException">The columns named do not go with the meaning of the weights.</exception>
    public static RowRequest Request(string path, ReadOptions options)
    {
        int? named = options.Columns?.Count;
        if (named is not null and not 2 and not 3)
        {
            throw new InputException(path, null, $"{named} columns are named",
                "name two or three: source, target and, where weights are used, the weight");
        }
        bool weighted = HasNumber(options.Weights);
        if (weighted && named == 2)
            throw new InputException(path, null, "weights are asked for, and no weight column is named",
                "name it third in --columns");
        if (options.Weights == WeightMeaning.Unsaid && named == 3)
            throw RowRequest.WeightUnsaid(path, null);
        return new RowRequest
        {
            Labels = 2,
            Number = weighted ? NumberColumn.Required
                : options.Weights == WeightMeaning.Unsaid && named is null ? NumberColumn.Refused : NumberColumn.Ignored,
            Columns = weighted ? options.Columns : options.Columns?.Take(2).ToArray(),
        };
    }

    /// <summary>Reads all rows of a source that was opened with <see cref="Request"/>.</summary>
    /// <exception cref="InputException">
    /// A row cannot be used, or its weight lies outside <see cref="SmallestWeight"/> to <see cref="LargestWeight"/>.
    /// </exception>
    public static EdgeList Read(IRowSource rows, WeightMeaning weights)
    {
        bool weighted = HasNumber(weights);
        EdgeListBuilder builder = new(weighted, weights == WeightMeaning.Length);
        while (rows.Read(out Row row))
        {
            double weight = 1;
            if (weighted)
                weight = weights == WeightMeaning.Length ? Length(row.Number, rows) : Conductance(row.Number, weights, rows);
            if (row.AreIntegers)
                builder.Add(row.FirstInteger, row.SecondInteger, weight);
            else
                builder.Add(row.First, row.Second, weight);
        }
        InputFacts facts = rows.Facts;
        // A first row of names such as a,b may just as well be a link. If such a name turns up as a node below, nobody can tell.
        if (rows.GuessedHeaderLine is { } line
            && facts.Columns.Take(2).FirstOrDefault(name => builder.Contains(name)) is { } node)
            throw RowRequest.HeaderOrNode(facts.Path, line, node);
        return builder.Finish(facts);
    }

    private static bool HasNumber(WeightMeaning weights) =>
        weights is WeightMeaning.Conductance or WeightMeaning.Resistance or WeightMeaning.Length;

    private static double Length(double number, IRowSource rows) => number is >= 0 and <= LargestWeight
        ? number
        : throw rows.Fault($"the length {number.ToString(CultureInfo.InvariantCulture)} is not a number from 0 to 1e18",
            "give a finite length that is not negative");

    private static double Conductance(double number, WeightMeaning weights, IRowSource rows)
    {
        bool isResistance = weights == WeightMeaning.Resistance;
        if (number is >= SmallestWeight and <= LargestWeight)
            return isResistance ? 1 / number : number;
        string what = isResistance ? "resistance" : "conductance";
        string shown = number.ToString(CultureInfo.InvariantCulture);
        if (double.IsFinite(number) && number > 0)
        {
            throw rows.Fault($"the {what} {shown} is not within 1e-18 to 1e18",
                $"give all links in a {(number < SmallestWeight ? "smaller" : "larger")} unit");
        }
        // A link of conductance zero is no link; one of resistance zero makes its ends one node, which dropping it would not.
        throw rows.Fault($"the {what} {shown} is not a finite positive number",
            $"give a finite {what} above zero{(isResistance ? "" : ", or drop the link")}");
    }
}
