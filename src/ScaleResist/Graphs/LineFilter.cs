// What stands between raw bytes and the csv parser: checks UTF-8, blanks comment lines, turns runs of blanks into one tab.
// Invariant: each line of the file comes out as exactly one line ending in '\n' and free of '\r', with quotes closed on it; so
// the parser's row count is the file's line number.

using System.Buffers;
using System.Text.Unicode;

namespace ScaleResist.Graphs;

/// <summary>How the cells of a line are separated.</summary>
internal enum Separation
{
    /// <summary>The first data line decides: runs of blanks, or commas or semicolons where it clearly uses those.</summary>
    Undecided,

    /// <summary>Runs of spaces and tabs; handed on as one tab.</summary>
    Blanks,
    Comma,
    Semicolon,
    Tab,
}

/// <summary>Text for the parser, line by line.</summary>
internal sealed class LineFilter : TextReader
{
    private const int LongestLine = 1 << 20;

    // Tab and line feed apart, every control character is a sign of a binary file; carriage return is looked at line by line.
    private static readonly SearchValues<byte> Special =
        SearchValues.Create([.. Enumerable.Range(0, 32).Where(b => b is not ('\t' or '\n')).Select(b => (byte)b), .. "\"#%"u8]);

    private static readonly SearchValues<byte> Control =
        SearchValues.Create([.. Enumerable.Range(0, 32).Where(b => b is not ('\t' or '\n')).Select(b => (byte)b)]);

    private readonly InputFile file;
    private byte[] bytes = new byte[1 << 16];
    private int filled;
    private bool ended;
    private char[] chars = [];
    private int charAt;
    private int charCount;
    private long lines;

    /// <summary>Starts filtering; reads on to the first data line, which decides the separation.</summary>
    public LineFilter(InputFile file, Separation separation)
    {
        this.file = file;
        Separation = separation;
        while ((FirstLine is null || Separation == Separation.Undecided) && FillBytes(out int end))
            FillChars(end);
        if (Separation == Separation.Undecided)
            Separation = Separation.Blanks;
    }

    /// <summary>How cells are separated; never undecided.</summary>
    public Separation Separation { get; private set; }

    /// <summary>The first line of the file, a comment or not; null where there is none.</summary>
    public string? FirstLine { get; private set; }

    /// <summary>Comment lines so far.</summary>
    public long CommentLines { get; private set; }

    public override int Read(Span<char> buffer)
    {
        while (charAt == charCount)
        {
            if (!FillBytes(out int end))
                return 0;
            FillChars(end);
        }
        int count = Math.Min(buffer.Length, charCount - charAt);
        chars.AsSpan(charAt, count).CopyTo(buffer);
        charAt += count;
        return count;
    }

    public override int Read(char[] buffer, int index, int count) => Read(buffer.AsSpan(index, count));

    public override int Read()
    {
        char one = '\0';
        return Read(new Span<char>(ref one)) == 0 ? -1 : one;
    }

    protected override void Dispose(bool disposing)
    {
        if (disposing)
            file.Dispose();
        base.Dispose(disposing);
    }

    /// <summary>Reads until at least one whole line is there; <paramref name="end"/> is one past the last line feed.</summary>
    private bool FillBytes(out int end)
    {
        int searched = 0;
        while ((end = bytes.AsSpan(searched, filled - searched).LastIndexOf((byte)'\n')) < 0)
        {
            searched = filled;
            if (ended && filled == 0)
                return false;
            if (filled == bytes.Length)
            {
                if (filled > LongestLine)
                    throw Fault(lines + 1, "the line is longer than 1 MiB", "give one link a line; is this a text file?");
                Array.Resize(ref bytes, bytes.Length * 2);
            }
            int count = ended ? 0 : file.Read(bytes.AsSpan(filled), lines + 1);
            if (count == 0)
            {
                ended = true;
                if (filled > 0)
                    bytes[filled++] = (byte)'\n';
            }
            filled += count;
        }
        end += searched + 1;
        return true;
    }

    /// <summary>Filters the whole lines in <c>bytes[..end]</c>, in place, and turns them into characters.</summary>
    private void FillChars(int end)
    {
        long linesBefore = lines;
        Span<byte> block = bytes.AsSpan(0, end);
        if (lines == 0)
            block = AtStart(block);
        bool plain = Separation is not (Separation.Blanks or Separation.Undecided) && block.IndexOfAny(Special) < 0;
        if (plain)
            lines += block.Count((byte)'\n');
        else
            block = block[..FilterLines(block)];

        // Whoever reads on does so after the characters that are still waiting; they are few, and only at the start.
        int waiting = charCount - charAt;
        if (chars.Length < waiting + block.Length)
        {
            char[] larger = new char[waiting + Math.Max(block.Length, bytes.Length)];
            chars.AsSpan(charAt, waiting).CopyTo(larger);
            chars = larger;
        }
        else
        {
            chars.AsSpan(charAt, waiting).CopyTo(chars);
        }
        OperationStatus status = Utf8.ToUtf16(block, chars.AsSpan(waiting), out int read, out int written,
            replaceInvalidSequences: false);
        if (status != OperationStatus.Done)
        {
            throw Fault(linesBefore + block[..read].Count((byte)'\n') + 1, $"byte 0x{block[read]:x2} is not UTF-8",
                "save the file as UTF-8 (iconv -t UTF-8)");
        }
        charAt = 0;
        charCount = waiting + written;
        bytes.AsSpan(end, filled - end).CopyTo(bytes);
        filled -= end;
    }

    private Span<byte> AtStart(Span<byte> block)
    {
        if (block.StartsWith((ReadOnlySpan<byte>)[0x1f, 0x8b]))
            throw Fault(1, "is a gzip archive, by its first bytes", "let its name end in .gz");
        if (block.StartsWith((ReadOnlySpan<byte>)[0x28, 0xb5, 0x2f, 0xfd]))
            throw Fault(1, "is a zstd archive, by its first bytes", "let its name end in .zst");
        if (block.StartsWith((ReadOnlySpan<byte>)[0xef, 0xbb, 0xbf]))
            block = block[3..];
        ReadOnlySpan<byte> first = block[..block.IndexOf((byte)'\n')];
        FirstLine = System.Text.Encoding.UTF8.GetString(first[..Math.Min(first.Length, 200)]).TrimEnd('\r');
        return block;
    }

    private int FilterLines(Span<byte> block)
    {
        int to = 0;
        for (int at = 0; at < block.Length;)
        {
            int length = block[at..].IndexOf((byte)'\n');
            Span<byte> line = block.Slice(at, length);
            at += length + 1;
            lines++;
            if (line.Length > 0 && line[^1] == (byte)'\r')
                line = line[..^1];
            to += FilterLine(line, block[to..]);
            block[to++] = (byte)'\n';
        }
        return to;
    }

    /// <summary>Moves a line to <paramref name="to"/>, which may overlap it from the front; returns the new length.</summary>
    private int FilterLine(Span<byte> line, Span<byte> to)
    {
        ReadOnlySpan<byte> text = Separation is Separation.Blanks or Separation.Undecided
            ? line.TrimStart(" \t"u8) : line.TrimStart((byte)' ');
        if (text.Length == 0)
            return 0;
        if (text[0] is (byte)'#' or (byte)'%')
        {
            CommentLines++;
            return 0;
        }
        int control = text.IndexOfAny(Control);
        if (control >= 0)
        {
            throw text[control] == (byte)'\r'
                ? Fault(lines, "a carriage return inside the line", "end lines with LF or CRLF")
                : Fault(lines, $"control character 0x{text[control]:x2}; this is not text", "give a UTF-8 text file");
        }
        if ((text.Count((byte)'"') & 1) == 1)
            throw Fault(lines, "a quote is opened and not closed on its line",
                "close the quote, or double a quote that belongs to a label");
        if (Separation == Separation.Undecided)
            Separation = Decide(text);
        if (Separation == Separation.Blanks)
            return Collapse(text, to);
        line.CopyTo(to);
        return line.Length;
    }

    /// <summary>Runs of blanks outside quotes become one tab; blanks at the ends go.</summary>
    private static int Collapse(ReadOnlySpan<byte> text, Span<byte> to)
    {
        int count = 0;
        bool quoted = false;
        bool gap = false;
        foreach (byte b in text)
        {
            if (b is (byte)' ' or (byte)'\t' && !quoted)
            {
                gap = true;
                continue;
            }
            if (gap)
            {
                to[count++] = (byte)'\t';
                gap = false;
            }
            if (b == (byte)'"')
                quoted = !quoted;
            to[count++] = b;
        }
        return count;
    }

    /// <summary>
    /// Comma or semicolon where splitting at it gives two or more cells and none of them has a blank inside:
    /// <c>1, 2</c> uses commas; <c>a,b c,d</c> uses blanks.
    /// </summary>
    private static Separation Decide(ReadOnlySpan<byte> text)
    {
        if (Splits(text, (byte)','))
            return Separation.Comma;
        return Splits(text, (byte)';') ? Separation.Semicolon : Separation.Blanks;
    }

    private static bool Splits(ReadOnlySpan<byte> text, byte separator)
    {
        int cells = 1;
        bool quoted = false;
        bool inCell = false;
        bool blankInCell = false;
        foreach (byte b in text)
        {
            if (b == (byte)'"')
                quoted = !quoted;
            if (!quoted && b == separator)
            {
                cells++;
                inCell = blankInCell = false;
            }
            else if (!quoted && b is (byte)' ' or (byte)'\t')
            {
                blankInCell = inCell;
            }
            else if (blankInCell)
            {
                return false;
            }
            else
            {
                inCell = true;
            }
        }
        return cells > 1;
    }

    private InputException Fault(long line, string problem, string mend) => new(file.Path, line, problem, mend);
}
