// One island's mains in the making: towns are meshes, coasts are chains, villages are small meshes at the end of a chain.
// Invariant: every piece is joined to the piece it starts from, so an island is one component.

using ScaleResist.DataGen.Networks;

namespace ScaleResist.DataGen.Sample;

internal sealed class Island(Scenario scenario, SeededRandom random, string code)
{
    private int next = 1;

    /// <summary>A town of columns x rows sites; returns them by row and column.</summary>
    public string[,] Town(string place, int columns, int rows, string kind = "town")
    {
        string[,] town = new string[rows, columns];
        for (int row = 0; row < rows; row++)
        {
            for (int column = 0; column < columns; column++)
            {
                town[row, column] = Site(kind == "town" ? Between(20, 180) : Between(5, 40), kind, place);
                // Every column is whole and so is the first row, which keeps the town together; other cross mains are there seven times in ten.
                if (row > 0)
                    Join(town[row - 1, column], town[row, column], column == columns / 2 ? Trunk() : Street());
                if (column > 0 && (row == 0 || random.Below(10) < 7))
                    Join(town[row, column - 1], town[row, column], row == 0 ? Trunk() : Street());
            }
        }
        return town;
    }

    /// <summary>A chain of new sites along a coast that starts at a site; returns its last site.</summary>
    public string Coast(string from, int length, string place)
    {
        for (int i = 0; i < length; i++)
        {
            string site = Site(Between(1, 12), "coast", place);
            Join(from, site, Rural());
            from = site;
        }
        return from;
    }

    /// <summary>A village that hangs on a chain: the loss of any main of the chain cuts it off.</summary>
    public string[,] Village(string from, int length, string place, int columns, int rows)
    {
        string end = Coast(from, length, place);
        string[,] village = Town(place, columns, rows, "village");
        Join(end, village[0, 0], Rural());
        return village;
    }

    /// <summary>A site of its own joined to one or two others, such as waterworks or the landing of a sea main.</summary>
    public string Station(string kind, string place, params string[] neighbours)
    {
        string site = Site(Between(1, 4), kind, place);
        foreach (string neighbour in neighbours)
            Join(site, neighbour, Trunk());
        return site;
    }

    public void Join(string source, string target, decimal conductance) => scenario.Links.Add(new Main(source, target, conductance));

    public decimal Trunk() => Between(800, 6000) / 100m;

    public decimal Rural() => Between(20, 300) / 100m;

    private decimal Street() => Between(50, 900) / 100m;

    private int Between(int least, int most) => (int)(least + random.Below(most - least + 1));

    private string Site(int people, string kind, string place)
    {
        string id = $"{code}-{next++:D4}";
        scenario.Sites.Add(new Site(id, people, kind, place));
        return id;
    }
}
