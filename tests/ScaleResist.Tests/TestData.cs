namespace ScaleResist.Tests;

internal static class TestData
{
    public static string Path(string file) => System.IO.Path.Combine(AppContext.BaseDirectory, "data", file);
}
