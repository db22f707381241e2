using ScaleResist.Graphs;

namespace ScaleResist.Tests.Graphs;

public sealed class MatrixMarketTests : IDisposable
{
    private readonly ScratchFolder folder = new();

    public void Dispose() => folder.Dispose();

    private string[] Read(string text, WeightMeaning weights = WeightMeaning.Unsaid) =>
        Links.Of(EdgeListReader.Read(folder.Write("net.mtx", text), new ReadOptions { Weights = weights }));

    [Theory]
    [InlineData("%%MatrixMarket matrix coordinate pattern symmetric\n%c\n\n3 3 2\n2 1\n3 2\n", WeightMeaning.Unsaid, "2-1 3-2")]
    [InlineData("%%matrixmarket MATRIX Coordinate Pattern General\r\n3 3 2\r\n1 2\r\n 3   2\r\n", WeightMeaning.None, "1-2 3-2")]
    [InlineData("%%MatrixMarket matrix coordinate real general\n3 3 1\n1 2 -7\n", WeightMeaning.None, "1-2")]
    [InlineData("%%MatrixMarket matrix coordinate integer symmetric\n3 3 1\n2 1 4\n", WeightMeaning.Conductance, "2-1:4")]
    [InlineData("%%MatrixMarket matrix coordinate real symmetric\n3 3 1\n2 1 4e0\n", WeightMeaning.Resistance, "2-1:0.25")]
    [InlineData("%%MatrixMarket matrix coordinate pattern symmetric\n3 3 2\n1 2\n1 3", WeightMeaning.Unsaid, "1-2 1-3")]
    public void Coordinate_files_give_one_link_an_entry(string text, WeightMeaning weights, string links)
    {
        Assert.Equal(links.Split(' '), Read(text, weights));
    }

    [Theory]
    [InlineData("1 2\n", 1, "banner is missing", "%%MatrixMarket matrix")]
    [InlineData("%%MatrixMarket matrix array real general\n2 2\n1\n", 1, "'array'", "coordinate")]
    [InlineData("%%MatrixMarket matrix coordinate complex general\n2 2 1\n1 2 1 0\n", 1, "'complex'", "real")]
    [InlineData("%%MatrixMarket matrix coordinate real skew-symmetric\n2 2 1\n2 1 1\n", 1, "'skew-symmetric'", "symmetric")]
    [InlineData("%%MatrixMarket matrix coordinate complex hermitian\n2 2 1\n2 1 1\n", 1, "'complex'", "real")]
    [InlineData("%%MatrixMarket matrix coordinate real hermitian\n2 2 1\n2 1 1\n", 1, "'hermitian'", "symmetric")]
    [InlineData("%%MatrixMarket vector coordinate real general\n2 1\n", 1, "'vector'", "matrix coordinate")]
    [InlineData("%%MatrixMarket matrix coordinate pattern general\n2 3 1\n1 2\n", 2, "2 x 3, not square", "as many rows")]
    [InlineData("%%MatrixMarket matrix coordinate pattern general\n% c\n2 x 1\n1 2\n", 3, "size line '2 x 1'",
        "rows columns entries")]
    [InlineData("%%MatrixMarket matrix coordinate pattern general\n2 2 1\n1 3\n", 3, "the index '3' is not within 1 to 2",
        "start at 1")]
    [InlineData("%%MatrixMarket matrix coordinate pattern general\n2 2 1\n0 1\n", 3, "the index '0'", "start at 1")]
    [InlineData("%%MatrixMarket matrix coordinate pattern general\n2 2 1\n1 x\n", 3, "the index 'x'", "start at 1")]
    [InlineData("%%MatrixMarket matrix coordinate pattern general\n2 2 3\n1 2\n2 2\n", 4, "after 2 of the 3 entries",
        "truncated")]
    [InlineData("%%MatrixMarket matrix coordinate pattern general\n2 2 1\n1 2\n2 2\n", 4, "more than the 1 entries",
        "number of entries")]
    [InlineData("%%MatrixMarket matrix coordinate pattern general\n2 2 1\n1\n", 3, "has 1 cells where the banner asks for 2",
        "row and column")]
    [InlineData("%%MatrixMarket matrix coordinate pattern general\n2 2 1\n1 2 5\n", 3, "has 3 cells", "row and column")]
    [InlineData("%%MatrixMarket matrix coordinate real general\n2 2 1\n1 2 5\n", 1, "a third column", "--weights")]
    [InlineData("%%MatrixMarket matrix coordinate pattern symmetric\n2 2 2\n1 2\n2 1\n", 4, "both sides of the diagonal",
        "lower triangle")]
    [InlineData("%%MatrixMarket matrix coordinate pattern general\n", 1, "size line is missing", "rows columns entries")]
    [InlineData("%%MatrixMarket matrix coordinate pattern general\n2 2 0\n", 2, "no data rows", "at least one")]
    public void Other_files_are_refused(string text, int line, string problem, string mend)
    {
        InputException e = Assert.Throws<InputException>(() => Read(text));
        Assert.Equal(line, e.Line);
        Assert.Contains(problem, e.Problem, StringComparison.Ordinal);
        Assert.Contains(mend, e.Mend, StringComparison.Ordinal);
    }

    [Fact]
    public void Weights_need_values_and_columns_have_no_meaning()
    {
        string text = "%%MatrixMarket matrix coordinate pattern general\n2 2 1\n1 2\n";
        Assert.Contains("pattern", Assert.Throws<InputException>(() => Read(text, WeightMeaning.Conductance)).Problem,
            StringComparison.Ordinal);
        ReadOptions options = new() { Columns = ["1", "2"] };
        InputException e = Assert.Throws<InputException>(() => EdgeListReader.Read(folder.Write("net.mtx", text), options));
        Assert.Contains("--columns", e.Mend, StringComparison.Ordinal);
        e = Assert.Throws<InputException>(() => NodeWeightReader.Read(folder.Path("net.mtx"), new NodeLabels([1L, 2L])));
        Assert.Contains("node and number", e.Mend, StringComparison.Ordinal);
    }

    [Fact]
    public void A_bad_value_is_refused_with_its_line()
    {
        InputException e = Assert.Throws<InputException>(() =>
            Read("%%MatrixMarket matrix coordinate real general\n% c\n2 2 2\n1 2 1\n1 2 0\n", WeightMeaning.Conductance));
        Assert.Equal(5, e.Line);
    }
}
