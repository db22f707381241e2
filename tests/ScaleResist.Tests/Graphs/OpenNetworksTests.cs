using ScaleResist.Graphs;

namespace ScaleResist.Tests.Graphs;

public sealed class OpenNetworksTests
{
    // Counts from data/README.md, less the nodes without links (128 of netscience, 7 of us-states): an edge list has no rows
    // for those.
    [Theory]
    [InlineData("karate.tsv", 34, 78)]
    [InlineData("dolphins.tsv", 62, 159)]
    [InlineData("lesmis.tsv", 77, 254)]
    [InlineData("netscience.tsv", 1589 - 128, 2742)]
    [InlineData("power.tsv", 4941, 6594)]
    [InlineData("as-22july06.tsv", 22963, 48436)]
    [InlineData("us-states.tsv", 56 - 7, 107)]
    public void Open_networks_read_with_their_published_counts(string name, int nodes, int links)
    {
        EdgeList read = EdgeListReader.Read(TestData.Path(name), new ReadOptions { Weights = WeightMeaning.None });
        Assert.Equal(nodes, read.Labels.Count);
        Assert.Equal(links, read.Links.Count);
        Assert.True(read.Labels.AreIntegers);
    }

    [Theory]
    [InlineData("lesmis.tsv")]
    [InlineData("netscience.tsv")]
    public void Weighted_open_networks_are_refused_until_the_weight_is_explained(string name)
    {
        InputException e = Assert.Throws<InputException>(() => EdgeListReader.Read(TestData.Path(name), new ReadOptions()));
        Assert.Contains("--weights conductance", e.Mend, StringComparison.Ordinal);
        EdgeList read = EdgeListReader.Read(TestData.Path(name), new ReadOptions { Weights = WeightMeaning.Conductance });
        Assert.Equal(read.Links.Count, read.Weights!.Count);
    }
}
