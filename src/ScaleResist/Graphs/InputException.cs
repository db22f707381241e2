// The one error type for input that cannot be used: it always says where and how to mend it.

namespace ScaleResist.Graphs;

/// <summary>
/// Input that cannot be used. The message is one line: <c>file:line: what is wrong; how to mend it</c>.
/// </summary>
public sealed class InputException : Exception
{
    /// <summary>Creates the error.</summary>
    /// <param name="file">The file as the user named it.</param>
    /// <param name="line">The 1-based line (or row, for tables without lines); null where the whole file is meant.</param>
    /// <param name="problem">What is wrong, with the offending value.</param>
    /// <param name="mend">What the user can do about it.</param>
    /// <param name="inner">The cause, where another error led here.</param>
    public InputException(string file, long? line, string problem, string mend, Exception? inner = null)
        : base(OneLine(line is null ? $"{file}: {problem}; {mend}" : $"{file}:{line}: {problem}; {mend}"), inner)
    {
        File = file;
        Line = line;
        Problem = problem;
        Mend = mend;
    }

    /// <summary>The file as the user named it.</summary>
    public string File { get; }

    /// <summary>The 1-based line or row, or null.</summary>
    public long? Line { get; }

    /// <summary>What is wrong.</summary>
    public string Problem { get; }

    /// <summary>How to mend it.</summary>
    public string Mend { get; }

    /// <summary>
    /// Shortens a value from a file for use in a message: at most 40 characters, control characters shown as '?'.
    /// </summary>
    public static string Show(ReadOnlySpan<char> value)
    {
        int length = Math.Min(value.Length, 40);
        return string.Create(length + (value.Length > length ? 1 : 0), value[..length], static (to, from) =>
        {
            for (int i = 0; i < from.Length; i++)
                to[i] = char.IsControl(from[i]) ? '?' : from[i];
            if (to.Length > from.Length)
                to[^1] = '…';
        });
    }

    private static string OneLine(string text) => text.ReplaceLineEndings(" ");
}
