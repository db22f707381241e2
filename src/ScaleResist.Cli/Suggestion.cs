// Finds the name a person may have meant.

namespace ScaleResist.Cli;

/// <summary>Suggests a known name for an unknown one.</summary>
internal static class Suggestion
{
    /// <summary>The name that was cut short, or the nearest by edit distance (Levenshtein), or null where none is near.</summary>
    public static string? For(string name, IReadOnlyCollection<string> known)
    {
        if (name.Length >= 3 && known.FirstOrDefault(k => k.StartsWith(name, StringComparison.Ordinal)) is string whole)
            return whole;
        (string Name, int Distance) best = known.Select(k => (k, Distance(name, k))).MinBy(k => k.Item2);
        return best.Distance <= Math.Max(1, name.Trim('-').Length / 3) ? best.Name : null;
    }

    private static int Distance(string a, string b)
    {
        int[] row = [.. Enumerable.Range(0, b.Length + 1)];
        for (int i = 1; i <= a.Length; i++)
        {
            int diagonal = row[0];
            row[0] = i;
            for (int j = 1; j <= b.Length; j++)
            {
                int replace = diagonal + (a[i - 1] == b[j - 1] ? 0 : 1);
                diagonal = row[j];
                row[j] = Math.Min(replace, 1 + Math.Min(row[j], row[j - 1]));
            }
        }
        return row[^1];
    }
}
