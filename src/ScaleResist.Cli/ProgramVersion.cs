// Which program this is, from the assembly: number and, where the build knew it, the commit.

using System.Reflection;

namespace ScaleResist.Cli;

/// <summary>The program's version.</summary>
internal static class ProgramVersion
{
    private static readonly string[] Parts =
        (typeof(ProgramVersion).Assembly.GetCustomAttribute<AssemblyInformationalVersionAttribute>()?.InformationalVersion ?? "0")
        .Split('+', 2);

    /// <summary>The version number.</summary>
    public static string Number => Parts[0];

    /// <summary>The commit it was built from, or null.</summary>
    public static string? Commit => Parts.Length > 1 ? Parts[1] : null;
}
