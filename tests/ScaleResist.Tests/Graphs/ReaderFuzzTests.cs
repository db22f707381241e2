using System.Text;
using CsCheck;
using ScaleResist.Graphs;

namespace ScaleResist.Tests.Graphs;

/// <summary>Whatever the bytes: an edge list or an <see cref="InputException"/> comes out, and never anything else.</summary>
public sealed class ReaderFuzzTests : IDisposable
{
    private static readonly string[] Forms = ["csv", "tsv", "txt", "mtx", "edges"];
    private static readonly string[] Packings = ["", ".gz", ".zst"];

    // Bytes that mean something to a reader turn up far more often than by chance.
    private static readonly Gen<byte> SomeByte = Gen.Frequency(
        (1, Gen.Byte), (2, Gen.Int[0, Meaningful.Length - 1].Select(i => Meaningful[i])));

    private readonly ScratchFolder folder = new();
    private int files;

    private static byte[] Meaningful => "\n\r\t ,;\"#%0-9.eE\0\u00e9/x"u8.ToArray();

    public void Dispose() => folder.Dispose();

    /// <summary>Flips, truncates, inserts, removes or doubles a stretch.</summary>
    internal static readonly Gen<Func<byte[], byte[]>> Mutation =
        Gen.Select(Gen.Int[0, 4], Gen.Double[0, 1], Gen.Int[0, 7], SomeByte.Array[1, 12], (kind, where, bit, insert) =>
            (Func<byte[], byte[]>)(bytes =>
            {
                int at = Math.Min((int)(where * bytes.Length), bytes.Length);
                int until = Math.Min(bytes.Length, at + insert.Length);
                byte[] result = [.. bytes];
                switch (kind)
                {
                    case 0 when at < bytes.Length:
                        result[at] ^= (byte)(1 << bit);
                        return result;
                    case 1:
                        return bytes[..at];
                    case 2:
                        return [.. bytes[..at], .. bytes[until..]];
                    case 3:
                        return [.. bytes[..until], .. bytes[at..]];
                    default:
                        return [.. bytes[..at], .. insert, .. bytes[at..]];
                }
            }));

    private static readonly Gen<ReadOptions> Options = Gen.Select(Gen.Int[0, 3], Gen.Int[0, 3], (weights, columns) =>
        new ReadOptions
        {
            Weights = (WeightMeaning)weights,
            Columns = columns switch { 0 => ["source", "target"], 1 => ["2", "1", "3"], _ => null },
        });

    private static byte[] Valid(string form, int rows, bool weighted, bool texts)
    {
        string separator = form switch { "csv" => ",", "tsv" => "\t", _ => " " };
        StringBuilder text = new(form == "mtx"
            ? $"%%MatrixMarket matrix coordinate {(weighted ? "real" : "pattern")} general\n% note\n"
                + $"{rows + 2} {rows + 2} {rows}\n"
            : "# note\nsource" + separator + "target" + (weighted ? separator + "weight" : "") + "\n");
        for (int i = 1; i <= rows; i++)
        {
            string label = texts && form != "mtx" ? $"\"é \"\"{i}\"" : $"{i}";
            string end = (weighted ? separator + "0.5" : "") + (i % 5 == 0 ? "\r\n" : "\n");
            text.Append(label).Append(separator).Append(i + 1).Append(end);
        }
        return Encoding.UTF8.GetBytes(text.ToString());
    }

    private void Read(string name, byte[] bytes, ReadOptions options)
    {
        string path = folder.WriteRaw($"{Interlocked.Increment(ref files)}.{name}", bytes);
        try
        {
            EdgeList list = EdgeListReader.Read(path, options);
            Assert.Equal(bytes.Length, list.Facts.Bytes);
            Assert.Equal(list.Facts.Rows, list.Links.Count);
        }
        catch (InputException e)
        {
            Assert.DoesNotContain('\n', e.Message);
            Assert.NotEmpty(e.Mend);
        }
        finally
        {
            File.Delete(path);
        }
    }

    [Fact]
    public void Mutated_files_give_an_edge_list_or_an_input_error()
    {
        Gen.Select(
            Gen.Int[0, 4], Gen.Int[0, 2], Gen.Int[0, 60], Gen.Int[0, 3], Mutation.Array[0, 3], Mutation.Array[0, 2], Options)
            .Sample(
                (form, packing, rows, kind, before, after, options) =>
                {
                    byte[] text = Valid(Forms[form], rows, kind % 2 == 0, kind > 1);
                    text = before.Aggregate(text, (bytes, mutate) => mutate(bytes));
                    byte[] packed = ScratchFolder.Pack(Packings[packing], text);
                    packed = after.Aggregate(packed, (bytes, mutate) => mutate(bytes));
                    Read(Forms[form] + Packings[packing], packed, options);
                },
                seed: "0000KDr5Vc5n", iter: 3000);
    }

    [Fact]
    public void Random_bytes_give_an_edge_list_or_an_input_error()
    {
        Gen.Select(Gen.Int[0, 4], Gen.Int[0, 2], Gen.Bool, SomeByte.Array[0, 200], Options)
            .Sample(
                (form, packing, pack, bytes, options) =>
                    Read(Forms[form] + Packings[packing], pack ? ScratchFolder.Pack(Packings[packing], bytes) : bytes, options),
                seed: "0000KDr5Vc5n", iter: 1000);
    }
}
