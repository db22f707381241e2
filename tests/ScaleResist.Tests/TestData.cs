// The open networks that lie beside the tests; data/README.md names their sources and licences.
// Invariant: tests read them from the output folder and never write them.

namespace ScaleResist.Tests;

internal static class TestData
{
    /// <summary>The path of an open network, such as <c>karate.tsv</c>.</summary>
    public static string Path(string name)
    {
        string path = System.IO.Path.Combine(AppContext.BaseDirectory, "data", name);
        return File.Exists(path) ? path : throw new FileNotFoundException("No such test network.", path);
    }
}
