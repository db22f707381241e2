// The rows of the sample scenario and their CSV files. Invariant: files depend on the rows alone, in their order.

using System.Globalization;
using System.Text;

namespace ScaleResist.DataGen.Sample;

/// <summary>A site: people served in whole numbers, at least 1.</summary>
internal readonly record struct Site(string Id, int PeopleServed, string Kind, string Place);

/// <summary>A water main: conductance in litres a second per metre of head lost.</summary>
internal readonly record struct Main(string Source, string Target, decimal Conductance);

/// <summary>One step of a planned work; rows of the same case happen together. No conductance where a main is lost.</summary>
internal readonly record struct PlannedWork(string Case, string Action, string Source, string Target, decimal? Conductance);

/// <summary>The whole scenario.</summary>
internal sealed class Scenario
{
    public List<Site> Sites { get; } = [];

    public List<Main> Links { get; } = [];

    public List<(string Source, string Target)> Pairs { get; } = [];

    public List<PlannedWork> Works { get; } = [];

    /// <summary>Name and content of each file.</summary>
    public IEnumerable<(string Name, string Content)> Files()
    {
        yield return ("links.csv", Table("source,target,conductance", Links, x => $"{x.Source},{x.Target},{Number(x.Conductance)}"));
        yield return ("sites.csv", Table("site,people_served,kind,place", Sites, x => $"{x.Id},{x.PeopleServed},{x.Kind},{x.Place}"));
        yield return ("pairs.csv", Table("source,target", Pairs, x => $"{x.Source},{x.Target}"));
        yield return ("planned-works.csv", Table(
            "case,action,source,target,conductance",
            Works,
            x => $"{x.Case},{x.Action},{x.Source},{x.Target},{(x.Conductance is decimal c ? Number(c) : "")}"));
    }

    private static string Number(decimal value) => value.ToString("0.###", CultureInfo.InvariantCulture);

    private static string Table<T>(string header, List<T> rows, Func<T, string> line)
    {
        StringBuilder text = new(header);
        text.Append('\n');
        foreach (T row in rows)
            text.Append(line(row)).Append('\n');
        return text.ToString();
    }
}
