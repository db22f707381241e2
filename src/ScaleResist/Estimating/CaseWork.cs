// One case on its way: its parts, and the columns of L+ that it needs, somewhere among those of its batch.

using ScaleResist.Graphs;

namespace ScaleResist.Estimating;

/// <summary>What a case does.</summary>
internal sealed record CaseImpact
{
    /// <summary>Parts that the components it touches consist of afterwards.</summary>
    public required int ComponentsAfter { get; init; }

    /// <summary>Nodes of the largest of these components that are neither lost nor in the part that counts.</summary>
    public required int NodesCutOff { get; init; }

    /// <summary>Kf of the largest component of the area, before.</summary>
    public required Estimate Before { get; init; }

    /// <summary>Kf of the part that counts, after.</summary>
    public required double After { get; init; }

    /// <summary>After - Before, with the error that the probes leave in it.</summary>
    public required Estimate Change { get; init; }

    /// <summary>The same two with node weights; null without.</summary>
    public required (double Before, double After)? Weighted { get; init; }

    /// <summary>By pair, R before and after; +infinity where nothing joins them.</summary>
    public required (double Before, double After)[] Pairs { get; init; }
}

/// <summary>A column of a case: a link that changes, a virtual link that goes, or the weights on the part that counts.</summary>
/// <param name="Case">Whose it is.</param>
/// <param name="Link">The link; default where it is none.</param>
/// <param name="Join">Of a virtual link, the place in the area of the component that it joins to the first; else 0.</param>
/// <param name="Weighting">Which weights; -1 for links.</param>
internal readonly record struct CaseColumn(CaseWork Case, LinkChange Link, int Join, int Weighting)
{
    /// <summary>Whether it is a link of the case.</summary>
    public bool IsLink => Join == 0 && Weighting < 0;

    /// <summary>The sum of its right-hand side over a component of the area but the first: what N makes a constant there.</summary>
    public int SumOver(int place)
    {
        if (!IsLink)
            return Weighting < 0 && Join == place ? 1 : 0;
        int c = Case.Parts.Area[place];
        return (Case.ComponentOf[Link.U] == c ? 1 : 0) - (Case.ComponentOf[Link.V] == c ? 1 : 0);
    }
}

/// <summary>A case and its columns.</summary>
internal sealed class CaseWork
{
    /// <summary>Lists the columns of a case behind those of the batch so far.</summary>
    public CaseWork(PlannedCase planned, CaseParts parts, int[] componentOf, int weightings, List<CaseColumn> columns)
    {
        (Parts, ComponentOf, First) = (parts, componentOf, columns.Count);
        double across = planned.Links.FirstOrDefault(link => componentOf[link.U] != componentOf[link.V]).After;
        Join = across > 0 ? 1 / across : 1;
        List<double> steps = [];
        for (int i = 0; i < planned.Links.Count; i++)
        {
            LinkChange link = planned.Links[i];
            if (parts.Kept[i] || link.After == link.Before)
                continue;
            columns.Add(new CaseColumn(this, link, 0, -1));
            steps.Add(link.After - link.Before);
        }
        for (int place = 1; place < parts.Area.Length; place++)
        {
            if (parts.JoinKept[place])
                continue;
            columns.Add(new CaseColumn(this, default, place, -1));
            steps.Add(-1 / Join);
        }
        Steps = [.. steps];
        for (int j = 0; j < weightings && parts.Listed.Length > 0; j++)
            columns.Add(new CaseColumn(this, default, 0, j));
    }

    /// <summary>Its parts.</summary>
    public CaseParts Parts { get; }

    /// <summary>The component of every node.</summary>
    public int[] ComponentOf { get; }

    /// <summary>Its first column; those of links and virtual links come first, k of them.</summary>
    public int First { get; }

    /// <summary>dc of the k columns.</summary>
    public double[] Steps { get; }

    /// <summary>1/c0 of the virtual links.</summary>
    public double Join { get; }

    /// <summary>The most columns that a case may take.</summary>
    public static int MostColumns(PlannedCase planned, int[] componentOf, int weightings)
    {
        int components = planned.Links.SelectMany(link => new[] { componentOf[link.U], componentOf[link.V] }).Distinct().Count();
        return planned.Links.Count + Math.Max(0, components - 1) + weightings;
    }
}
