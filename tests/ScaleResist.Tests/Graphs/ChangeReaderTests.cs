// Tables of planned cases and of candidates: what is read, and that every bad row is refused with its line and a mend.

using CsCheck;
using ScaleResist.Graphs;
using ScaleResist.Tests.Runs;

namespace ScaleResist.Tests.Graphs;

public sealed class ChangeReaderTests
{
    private static readonly Network Ring = TestNetworks.Of((1, 2, 1), (2, 3, 2), (3, 4, 4), (4, 1, 8), (5, 6, 1));

    [Fact]
    public void Rows_of_one_case_stand_together_wherever_they_are()
    {
        List<PlannedCase> cases = ChangeReader.Read(new MemoryRows(
            ["b", "lose", "2", "1", ""], ["7", "add", "1", "3", "0.5"], ["b", "set", "2", "3", "5"], ["7", "add", "1", "2", "0.25"]), Ring);
        Assert.Equal(["b", "7"], cases.Select(planned => planned.Id));
        Assert.Equal([2, 2], cases.Select(planned => planned.Rows));
        Assert.Equal([(1.0, 0.0), (2.0, 5.0)], cases[0].Links.Select(link => (link.Before, link.After)).Order());
        Assert.Equal([(0.0, 0.5), (1.0, 1.25)], cases[1].Links.Select(link => (link.Before, link.After)).Order()); // in parallel
    }

    [Fact]
    public void A_lost_node_loses_all_its_links()
    {
        PlannedCase planned = Assert.Single(ChangeReader.Read(new MemoryRows(["x", "lose", "4", "", ""], ["x", "lose", "1", "4", ""]), Ring));
        Assert.Equal([Ring.Node(4)], planned.LostNodes);
        Assert.Equal([4.0, 8.0], planned.Links.Select(link => link.Before).Order());
        Assert.All(planned.Links, link => Assert.Equal(0, link.After));
    }

    [Theory]
    [InlineData("1,drop,1,2,", "the action 'drop' is unknown; write lose, add or set")]
    [InlineData("1,,1,2,", "there is no action; write lose, add or set")]
    [InlineData("1,LOSE,1,2,", "the action 'LOSE' is unknown")]
    [InlineData(",lose,1,2,", "the case has no id")]
    [InlineData("1,lose,1,3,", "there is no link between '1' and '3' to lose; name a link of the network")]
    [InlineData("1,set,1,3,2", "there is no link between '1' and '3' to set; write add")]
    [InlineData("1,lose,9,2,", "the network has no node '9'")]
    [InlineData("1,lose,01,2,", "the network has no node '01'")]
    [InlineData("1,add,1,x,1", "the network has no node 'x'")]
    [InlineData("1,add,,2,1", "a node id is empty")]
    [InlineData("1,lose,,,", "a node id is empty")]
    [InlineData("1,add,1,,1", "there is no target to add a link to")]
    [InlineData("1,set,1,,1", "there is no target to set a link to")]
    [InlineData("1,add,1,1,1", "source and target are both '1'")]
    [InlineData("1,add,1,3,0", "the conductance '0' is not a finite positive number")]
    [InlineData("1,add,1,3,-1", "the conductance '-1' is not a finite positive number")]
    [InlineData("1,add,1,3,", "the conductance '' is not a finite positive number")]
    [InlineData("1,set,1,2,NaN", "the conductance 'NaN' is not a finite positive number")]
    [InlineData("1,set,1,2,Infinity", "the conductance 'Infinity' is not a finite positive number")]
    [InlineData("1,set,1,2,one", "the conductance 'one' is not a finite positive number")]
    [InlineData("1,set,1,2,1e19", "the conductance 1e19 is not within 1e-18 to 1e18")]
    [InlineData("1,lose,1,2,3", "a loss has no conductance, and '3' is given")]
    [InlineData("1,lose,1,2,;1,lose,2,1,", "the link stands in case '1' already, at line 3")]
    [InlineData("1,lose,2,,;1,set,2,3,1", "the case loses the node '2' and keeps a link of it")]
    public void A_bad_row_is_refused_with_its_line(string rows, string message)
    {
        string[] lines = ["7,add,5,6,1", .. rows.Split(';')];
        InputException refusal = Assert.Throws<InputException>(
            () => ChangeReader.Read(new MemoryRows([.. lines.Select(line => line.Split(','))]), Ring));
        Assert.Contains(message, refusal.Message);
        Assert.Equal(lines.Length + 1, refusal.Line);
        Assert.Matches(@"; \w", refusal.Message);
    }

    [Theory]
    [InlineData("1,5,1,1", "'1' and '5' lie in different components")]
    [InlineData("1,1,1,1", "source and target are both '1'")]
    [InlineData("1,9,1,1", "the network has no node '9'")]
    [InlineData("1,3,0,1", "the conductance '0' is not a finite positive number")]
    [InlineData("1,3,1,0", "the cost '0' is not a finite positive number")]
    [InlineData("1,3,1,", "the cost '' is not a finite positive number")]
    public void A_bad_candidate_is_refused_with_its_line(string row, string message)
    {
        InputException refusal = Assert.Throws<InputException>(
            () => CandidateReader.Read(new MemoryRows(["1", "3", "1", "2"], row.Split(',')), Ring));
        Assert.Contains(message, refusal.Message);
        Assert.Equal(3, refusal.Line);
    }

    [Fact]
    public void Text_files_are_read_by_the_names_of_their_columns()
    {
        using ScratchFolder folder = new();
        string path = folder.Write("cases.tsv", "note\tTarget\tsource\tconductance\taction\tcase\n# a comment\nhm\t2\t1\t\tlose\tx\n");
        using (INamedRows rows = NamedTextRows.Open(path, ChangeReader.Columns))
            Assert.Equal("x", Assert.Single(ChangeReader.Read(rows, Ring)).Id);
        string without = folder.Write("without.csv", "case,action,source,conductance\n1,lose,1,\n");
        InputException refusal = Assert.Throws<InputException>(() => NamedTextRows.Open(without, ChangeReader.Columns));
        Assert.Contains("without.csv:1: there is no column 'target'; the header reads case, action, source, conductance; name the columns", refusal.Message);
    }

    [Fact]
    public void Whatever_the_bytes_a_table_is_read_or_refused()
    {
        using ScratchFolder folder = new();
        const string Good = "case,action,source,target,conductance\n1,lose,1,2,\n1,add,1,3,0.5\n2,lose,4,,\n";
        Gen.Select(Gen.Int[0, Good.Length - 1], Gen.Byte, Gen.Int[0, 2]).Sample((at, value, how) =>
        {
            List<byte> bytes = [.. System.Text.Encoding.UTF8.GetBytes(Good)];
            if (how == 0)
                bytes[at] = value;
            else if (how == 1)
                bytes.RemoveRange(at, bytes.Count - at);
            else
                bytes.Insert(at, value);
            string path = folder.Path($"{Guid.NewGuid():N}.csv");
            File.WriteAllBytes(path, [.. bytes]);
            try
            {
                using INamedRows rows = NamedTextRows.Open(path, ChangeReader.Columns);
                ChangeReader.Read(rows, Ring);
            }
            catch (InputException refusal)
            {
                Assert.StartsWith(path, refusal.Message);
                Assert.DoesNotContain('\n', refusal.Message);
            }
            File.Delete(path);
        }, iter: 300, threads: 1);
    }
}
