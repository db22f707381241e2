// The sample scenario: reproducible, and holding what its README says.

using System.Text.RegularExpressions;

namespace ScaleResist.Tests.DataGen;

public sealed class SampleTests
{
    private static readonly string[] FileNames = ["links.csv", "pairs.csv", "planned-works.csv", "sites.csv"];
    private static readonly string Folder = Path.Combine(Root(), "data-gen", "samples");

    [Fact]
    public async Task Generating_the_sample_again_gives_the_shipped_bytes()
    {
        string fresh = Directory.CreateTempSubdirectory("sample-").FullName;
        try
        {
            Assert.Equal(0, (await CommandTests.Run("sample", "--out", fresh)).Code);
            Assert.Equal(FileNames, Directory.GetFiles(fresh).Select(path => Path.GetFileName(path)!).Order());
            foreach (string name in FileNames)
                Assert.Equal(
                    await File.ReadAllBytesAsync(Path.Combine(Folder, name)),
                    await File.ReadAllBytesAsync(Path.Combine(fresh, name)));
        }
        finally
        {
            Directory.Delete(fresh, recursive: true);
        }
    }

    [Fact]
    public void Every_site_that_a_file_names_is_a_site()
    {
        HashSet<string> sites = [.. Rows("sites.csv").Select(row => row[0])];
        Assert.Equal(Rows("sites.csv").Count, sites.Count);
        Assert.All(Rows("sites.csv"), row => Assert.True(int.Parse(row[1]) >= 1));
        IEnumerable<string[]> ends = Rows("links.csv").Concat(Rows("pairs.csv"));
        Assert.All(ends.SelectMany(row => row.Take(2)), site => Assert.Contains(site, sites));
        Assert.All(Rows("planned-works.csv").SelectMany(row => row[2..4]), site => Assert.Contains(site, sites));
        Assert.Equal(sites.Count, Rows("links.csv").SelectMany(row => row.Take(2)).Distinct().Count());
    }

    [Fact]
    public void The_mains_hold_three_components_two_parallel_links_and_a_self_loop()
    {
        List<(string, string)> links = [.. Rows("links.csv").Select(row => Ordered(row[0], row[1]))];
        Assert.Equal(1, links.Count(link => link.Item1 == link.Item2));
        Assert.Equal(2, links.Count - links.Distinct().Count());
        Assert.All(Rows("links.csv"), row => Assert.True(double.Parse(row[2]) > 0));
        IEnumerable<int> sizes = Components(links).Values.GroupBy(component => component).Select(group => group.Count());
        Assert.Equal([9, 12, 3133], sizes.Order());
    }

    [Fact]
    public void The_only_sea_main_of_an_island_is_a_bridge()
    {
        string[] lost = Rows("planned-works.csv").Single(row => row[0] == "W03");
        List<(string, string)> links = [.. Rows("links.csv").Select(row => Ordered(row[0], row[1]))];
        Dictionary<string, string> components = Components(links.Where(link => link != Ordered(lost[2], lost[3])));
        HashSet<string> cutOff = [.. components.Where(x => x.Value == components[lost[3]]).Select(x => x.Key[..3])];
        Assert.Equal(["SNO"], cutOff);
    }

    [Fact]
    public void Planned_works_lose_and_set_what_is_there_and_add_what_is_not()
    {
        HashSet<(string, string)> links = [.. Rows("links.csv").Select(row => Ordered(row[0], row[1]))];
        List<string[]> works = Rows("planned-works.csv");
        Assert.Equal(12, works.Select(row => row[0]).Distinct().Count());
        foreach (string[] row in works)
        {
            Assert.Contains(row[1], new[] { "lose", "add", "set" });
            Assert.Equal(row[1] != "add", links.Contains(Ordered(row[2], row[3])));
            Assert.Equal(row[1] == "lose", row[4] == "");
        }
        Assert.Equal(40, Rows("pairs.csv").Select(row => Ordered(row[0], row[1])).Distinct().Count());
    }

    [Fact]
    public void The_readme_states_the_counts_and_the_sample_stays_small()
    {
        string readme = File.ReadAllText(Path.Combine(Folder, "README.md"));
        Assert.Contains("invented", readme);
        foreach (string name in FileNames)
            Assert.Matches(new Regex($@"`{Regex.Escape(name)}`.*\b{Rows(name).Count:N0} rows"), readme);
        Assert.True(Directory.GetFiles(Folder).Sum(path => new FileInfo(path).Length) < 400_000);
    }

    private static List<string[]> Rows(string name) =>
        [.. File.ReadLines(Path.Combine(Folder, name)).Skip(1).Select(line => line.Split(','))];

    private static (string, string) Ordered(string a, string b) => string.CompareOrdinal(a, b) < 0 ? (a, b) : (b, a);

    /// <summary>Each site with the representative of its component.</summary>
    private static Dictionary<string, string> Components(IEnumerable<(string, string)> links)
    {
        Dictionary<string, string> parents = Rows("sites.csv").ToDictionary(row => row[0], row => row[0]);
        string Find(string site) => parents[site] == site ? site : parents[site] = Find(parents[site]);
        foreach ((string a, string b) in links)
            parents[Find(a)] = Find(b);
        return parents.Keys.ToDictionary(site => site, Find);
    }

    private static string Root()
    {
        DirectoryInfo? folder = new(AppContext.BaseDirectory);
        while (folder is not null && !File.Exists(Path.Combine(folder.FullName, "ScaleResist.sln")))
            folder = folder.Parent;
        return folder?.FullName ?? throw new DirectoryNotFoundException("No ScaleResist.sln above the tests.");
    }
}
