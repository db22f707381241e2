// Links as lines of text: comma- or tab-separated, or Matrix Market. Invariant: one buffer, no allocation per link.

using System.Globalization;
using System.Text;
using ScaleResist.DataGen.Networks;

namespace ScaleResist.DataGen.Files;

/// <summary>
/// csv: a header, then <c>source,target[,conductance]</c>; tsv: the same without header; mtx: coordinate, symmetric (lower triangle,
/// 1-based), <c>pattern</c> or <c>real</c>. Conductances are printed in full (shortest text that reads back the same).
/// </summary>
internal sealed class TextLinkSink(Stream stream, LinkLayout layout, bool weighted) : ILinkSink
{
    private const int LongestLine = 80;
    private readonly byte[] buffer = new byte[1 << 18];
    private readonly byte separator = (byte)(layout switch { LinkLayout.Csv => ',', LinkLayout.Tsv => '\t', _ => ' ' });
    private readonly bool matrix = layout == LinkLayout.MatrixMarket;
    private int filled;

    public void Header(FamilyPlan plan, NetworkSize size)
    {
        string header = layout switch
        {
            LinkLayout.Csv => weighted ? "source,target,conductance\n" : "source,target\n",
            LinkLayout.Tsv => "",
            _ => string.Create(CultureInfo.InvariantCulture, $"""
                %%MatrixMarket matrix coordinate {(weighted ? "real" : "pattern")} symmetric
                % {FamilyPlan.NameOf(plan.Family)} network, seed {plan.Seed}, conductances over {plan.Decades} decades
                {size.Nodes} {size.Nodes} {size.Links}

                """),
        };
        filled += Encoding.UTF8.GetBytes(header, buffer);
    }

    public void Link(long source, long target, double conductance)
    {
        if (filled > buffer.Length - LongestLine)
            Flush();
        if (matrix)
            (source, target) = (Math.Max(source, target) + 1, Math.Min(source, target) + 1);
        Number(source);
        buffer[filled++] = separator;
        Number(target);
        if (weighted)
        {
            buffer[filled++] = separator;
            conductance.TryFormat(buffer.AsSpan(filled), out int written, provider: CultureInfo.InvariantCulture);
            filled += written;
        }
        buffer[filled++] = (byte)'\n';
    }

    public void Flush()
    {
        stream.Write(buffer.AsSpan(0, filled));
        filled = 0;
    }

    private void Number(long value)
    {
        value.TryFormat(buffer.AsSpan(filled), out int written, provider: CultureInfo.InvariantCulture);
        filled += written;
    }
}
