using CsCheck;
using ScaleResist.Graphs;

namespace ScaleResist.Tests.Graphs;

public sealed class IntegerIndexTests
{
    // Small labels live in the table, large and negative ones in the dictionary, and some move as the table grows.
    [Fact]
    public void Labels_of_every_size_get_indices_in_order_of_first_appearance()
    {
        long[] extremes = [long.MinValue, long.MaxValue, -1, 1L << 30];
        Gen<long> label = Gen.Frequency(
            (5, Gen.Long[0, 3000]), (3, Gen.Long[0, 100_000]), (1, Gen.Long), (1, Gen.Int[0, 3].Select(i => extremes[i])));
        label.Array[0, 4000].Sample(
            labels =>
            {
                IntegerIndex index = new();
                Dictionary<long, int> model = [];
                foreach (long value in labels)
                {
                    model.TryAdd(value, model.Count);
                    Assert.Equal(model[value], index.GetOrAdd(value));
                    Assert.True(index.Contains(value));
                }
                Assert.Equal(model.Count, index.Count);
                Assert.Equal(model.OrderBy(pair => pair.Value).Select(pair => pair.Key), index.ToArray());
            },
            seed: "0000KDr5Vc5n", iter: 100);
    }

    [Fact]
    public void Falling_labels_move_from_the_dictionary_into_the_table()
    {
        IntegerIndex index = new();
        for (int label = 200_000; label >= 0; label--)
            Assert.Equal(200_000 - label, index.GetOrAdd(label));
        for (int label = 0; label <= 200_000; label++)
            Assert.Equal(200_000 - label, index.GetOrAdd(label));
    }
}
