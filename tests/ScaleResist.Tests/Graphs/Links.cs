// An edge list as plain text, for comparison in tests.

using System.Globalization;
using ScaleResist.Graphs;

namespace ScaleResist.Tests.Graphs;

internal static class Links
{
    /// <summary>Each row as <c>source-target</c> or <c>source-target:conductance</c>, in file order.</summary>
    public static string[] Of(EdgeList list)
    {
        string[] rows = new string[list.Links.Count];
        for (int i = 0; i < rows.Length; i++)
        {
            EndNodes ends = list.Links[i];
            rows[i] = $"{list.Labels[ends.Source]}-{list.Labels[ends.Target]}"
                + (list.Weights is null ? "" : ":" + list.Weights[i].ToString(CultureInfo.InvariantCulture));
        }
        return rows;
    }
}
