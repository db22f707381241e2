// The form of a link file, told by the ending of its name.

namespace ScaleResist.DataGen.Files;

internal enum LinkLayout
{
    Csv,
    Tsv,
    MatrixMarket,
    Parquet,
}

internal enum LinkPacking
{
    None,
    Gzip,
    Zstandard,
}

/// <summary>How links are laid out, and how the text is packed.</summary>
internal readonly record struct LinkForm(LinkLayout Layout, LinkPacking Packing)
{
    public const string Endings = ".csv, .tsv, .mtx (each also with .gz or .zst behind it) or .parquet";

    public static bool TryOf(string path, out LinkForm form)
    {
        LinkPacking packing = Path.GetExtension(path).ToLowerInvariant() switch
        {
            ".gz" => LinkPacking.Gzip,
            ".zst" => LinkPacking.Zstandard,
            _ => LinkPacking.None,
        };
        string inner = packing == LinkPacking.None ? path : Path.GetFileNameWithoutExtension(path);
        LinkLayout? layout = Path.GetExtension(inner).ToLowerInvariant() switch
        {
            ".csv" => LinkLayout.Csv,
            ".tsv" => LinkLayout.Tsv,
            ".mtx" => LinkLayout.MatrixMarket,
            ".parquet" when packing == LinkPacking.None => LinkLayout.Parquet,
            _ => null,
        };
        form = new LinkForm(layout ?? default, packing);
        return layout is not null;
    }
}
