// The rooms of the library: each uses only rooms above it, and the library knows neither Parquet nor the console.

using System.Runtime.CompilerServices;
using System.Text.RegularExpressions;

namespace ScaleResist.Tests;

public partial class RoomTests
{
    // In order; Estimating and Distances do not know each other.
    private static readonly string[] Rooms = ["Graphs", "Kernels", "Solving", "Estimating", "Distances", "Runs"];

    [Fact]
    public void A_room_uses_only_rooms_above_it()
    {
        List<string> wrong = [];
        int read = 0;
        string library = Path.Combine(Source(), "src", "ScaleResist");
        foreach (string file in Directory.EnumerateFiles(library, "*.cs", SearchOption.AllDirectories))
        {
            string room = Path.GetRelativePath(library, file).Split(Path.DirectorySeparatorChar)[0];
            if (room is "obj" or "bin")
                continue;
            Assert.Contains(room, Rooms);
            read++;
            foreach (Match match in Named().Matches(File.ReadAllText(file)))
            {
                string other = match.Groups[1].Value;
                bool allowed = Array.IndexOf(Rooms, other) <= Array.IndexOf(Rooms, room)
                    && !(room == "Distances" && other == "Estimating");
                if (!allowed)
                    wrong.Add($"{Path.GetFileName(file)} of {room} uses {other}");
            }
        }
        Assert.True(read > 20);
        Assert.Empty(wrong);
    }

    [Fact]
    public void The_library_knows_neither_Parquet_nor_the_console()
    {
        string[] references =
            [.. typeof(ScaleResist.Graphs.Network).Assembly.GetReferencedAssemblies().Select(name => name.Name!)];
        Assert.DoesNotContain("Parquet", references);
        Assert.DoesNotContain("System.Console", references);
    }

    private static string Source([CallerFilePath] string here = "") =>
        Path.GetFullPath(Path.Combine(Path.GetDirectoryName(here)!, "..", ".."));

    [GeneratedRegex(@"(?:\bScaleResist\.|^\s*using\s+|[^\w.])(Graphs|Kernels|Solving|Estimating|Distances|Runs)(?:\.|;)",
        RegexOptions.Multiline)]
    private static partial Regex Named();
}
