using ScaleResist.Graphs;

namespace ScaleResist.Tests.Graphs;

public sealed class PairAndNodeWeightTests : IDisposable
{
    private static readonly NodeLabels Integers = new([10L, 20L, 30L]);
    private static readonly NodeLabels Texts = new(["10", "a b", "c"]);
    private readonly ScratchFolder folder = new();

    public void Dispose() => folder.Dispose();

    [Theory]
    [InlineData("pairs.csv", "source,target\n10,30\n20,20\n30,10\n")]
    [InlineData("pairs.tsv.gz", "10\t30\tnote\n20\t20\n30\t10\n")]
    [InlineData("pairs.txt.zst", "10 30\n20 20\n30 10\n")]
    public void Pairs_come_in_file_order_and_a_node_may_pair_with_itself(string name, string text)
    {
        Assert.Equal([(0, 2), (1, 1), (2, 0)], PairReader.Read(folder.Write(name, text), Integers));
    }

    [Fact]
    public void Pairs_of_string_labels_and_named_columns_resolve()
    {
        string path = folder.Write("pairs.csv", "n,x,y\n1,c,a b\n2,10,\"a b\"\n");
        Assert.Equal([(2, 1), (0, 1)], PairReader.Read(path, Texts, ["x", "y"]));
    }

    [Theory]
    [InlineData("10,20\n10,77\n", "'77'")]
    [InlineData("10,20\nsite,20\n", "'site'")]
    [InlineData("10,20\n010,20\n", "'010'")]
    public void A_pair_with_an_unknown_node_is_refused(string text, string shown)
    {
        InputException e = Assert.Throws<InputException>(() => PairReader.Read(folder.Write("pairs.csv", text), Integers));
        Assert.Equal(2, e.Line);
        Assert.Contains(shown, e.Problem, StringComparison.Ordinal);
        Assert.Contains("nodes of the network", e.Mend, StringComparison.Ordinal);
    }

    [Theory]
    [InlineData("w.csv", "node,weight\n30,3.5\n10,0\n20,1e3\n")]
    [InlineData("w.csv", "anything,at all\n30,3.5\n10,0\n20,1e3\n")]
    [InlineData("w.tsv.gz", "30\t3.5\t9\n10\t0\n20\t1e3\n")]
    public void Node_weights_come_by_dense_index(string name, string text)
    {
        Assert.Equal([0, 1000, 3.5], NodeWeightReader.Read(folder.Write(name, text), Integers));
    }

    [Fact]
    public void Node_weights_of_string_labels_and_named_columns_resolve()
    {
        string path = folder.Write("w.csv", "load,site\n1,c\n2,10\n3,a b\n");
        Assert.Equal([2, 3, 1], NodeWeightReader.Read(path, Texts, ["site", "load"]));
    }

    [Fact]
    public void A_first_row_that_looks_like_a_header_and_names_nodes_is_refused()
    {
        NodeLabels labels = new(["a", "b", "c"]);
        InputException e = Assert.Throws<InputException>(() => PairReader.Read(folder.Write("p.csv", "a,b\nb,c\n"), labels));
        Assert.Equal(1, e.Line);
        Assert.Contains("header", e.Mend, StringComparison.Ordinal);
        e = Assert.Throws<InputException>(() => NodeWeightReader.Read(folder.Write("w.csv", "a,x\nb,1\nc,2\n"), labels));
        Assert.Equal(1, e.Line);
        Assert.Equal([(1, 2)], PairReader.Read(folder.Write("q.csv", "source,target\nb,c\n"), labels));
    }

    [Theory]
    [InlineData("10,1\n20,1\n", null, "1 nodes of the network have no weight, among them '30'", "every node")]
    [InlineData("10,1\n20,1\n30,1\n10,1\n", 4, "'10' has a weight already", "one row")]
    [InlineData("10,1\n20,1\n40,1\n", 3, "no node '40'", "nodes of the network")]
    [InlineData("10,1\n20,-1\n30,1\n", 2, "the weight -1", "not negative")]
    [InlineData("10,1\n20,Infinity\n30,1\n", 2, "the weight Infinity", "finite")]
    [InlineData("10,1\n20,nan\n30,1\n", 2, "the weight NaN", "finite")]
    [InlineData("10,1\n20,x\n30,1\n", 2, "'x' is not a number", "decimal point")]
    [InlineData("10,1\n20\n30,1\n", 2, "the row is short", "node and number")]
    [InlineData("10\n20\n30\n", 1, "no second column", "number after its id")]
    public void Bad_node_weights_are_refused(string text, int? line, string problem, string mend)
    {
        InputException e = Assert.Throws<InputException>(() => NodeWeightReader.Read(folder.Write("w.csv", text), Integers));
        Assert.Equal(line, e.Line);
        Assert.Contains(problem, e.Problem, StringComparison.Ordinal);
        Assert.Contains(mend, e.Mend, StringComparison.Ordinal);
    }
}
