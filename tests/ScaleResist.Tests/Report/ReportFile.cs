// Reports as tests read them. Invariant: reports are well-formed XML as well as HTML, so that an XML parser that knows nothing of this
// project judges their structure and undoes their escaping.

using System.Globalization;
using System.Text.Json;
using System.Xml;
using System.Xml.Linq;
using ScaleResist.Tests.Cli;
using ScaleResist.Tests.EndToEnd;

namespace ScaleResist.Tests.Report;

internal static class ReportFile
{
    /// <summary>Runs the command with the true engine and reads the report of run 'a'.</summary>
    public static XElement Of(Place place, string network, params string[] more)
    {
        Command.Succeed(network, place.Lake, ["--run-id", "a", .. more]);
        return Read(place);
    }

    /// <summary>Reads the report of run 'a'.</summary>
    public static XElement Read(Place place)
    {
        string text = File.ReadAllText(PathOf(place));
        Assert.StartsWith("<!DOCTYPE html>\n", text);
        using XmlReader reader = XmlReader.Create(new StringReader(text["<!DOCTYPE html>\n".Length..]));
        return XElement.Load(reader);
    }

    public static string PathOf(Place place) => Path.Combine(place.Run("a"), "report.html");

    /// <summary>Anchors of the sections, in order.</summary>
    public static string[] Sections(this XElement page) => [.. page.Descendants("section").Select(section => section.Attribute("id")!.Value)];

    /// <summary>The section of that anchor.</summary>
    public static XElement Section(this XElement page, string id) => page.Descendants("section").Single(s => s.Attribute("id")!.Value == id);

    /// <summary>Whole values and what is shown of them.</summary>
    public static IEnumerable<(double Value, string Shown)> Figures(this XElement page) => page.Descendants("data")
        .Select(data => (double.Parse(data.Attribute("value")!.Value, CultureInfo.InvariantCulture), data.Value));

    /// <summary>Every number anywhere in a JSON document.</summary>
    public static IEnumerable<double> Numbers(JsonElement json) => json.ValueKind switch
    {
        JsonValueKind.Object => json.EnumerateObject().SelectMany(p => Numbers(p.Value)),
        JsonValueKind.Array => json.EnumerateArray().SelectMany(Numbers),
        JsonValueKind.Number => [json.GetDouble()],
        _ => [],
    };
}
