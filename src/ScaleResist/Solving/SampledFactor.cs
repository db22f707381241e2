// A sparse approximate Cholesky factor of a Laplacian: nodes are eliminated in order of degree, and of the clique that each leaves behind only a
// few links are kept, drawn so that the kept Laplacian has the right expectation (Kyng & Sachdeva 2016; Gao, Kyng & Spielman 2023).
//
// Eliminating v with merged neighbours sorted by weight w_1 <= ... <= w_k, d = sum w: for each i < k and each of S samples one j > i is drawn with
// probability w_j / W_i, W_i = sum over j > i of w_j, and joined to i by w_i W_i / (d S): in expectation w_i w_j / d, the clique's link.
// Invariant: shares of a column sum to 1 but for the last, whose pivot is 0; every predecessor of a node has a smaller number.
//
// The order is then renumbered depth-first over predecessors: a valid order of the same factor in which rows lie near what they gather.

using ScaleResist.Graphs;

namespace ScaleResist.Solving;

/// <summary>
/// L ~ (I - C') D (I - C) in its own numbering: forward y_v = r_v + sum over predecessors u of share(u,v) y_u,
/// back x_v = y_v / d_v + sum over successors w of share(v,w) x_w. The last node is grounded.
/// </summary>
internal sealed class SampledFactor
{
    private SampledFactor(int[] order, long[] columnStart, int[] successors, float[] shares, float[] inverse)
    {
        Order = order;
        ColumnStart = columnStart;
        Successors = successors;
        ColumnShares = shares;
        Inverse = inverse;
        (RowStart, Predecessors, RowShares) = Transpose(columnStart, successors, shares);
    }

    /// <summary>The Laplacian's node at each place of the factor.</summary>
    public int[] Order { get; }

    /// <summary>Offsets by column: successors of a place.</summary>
    public long[] ColumnStart { get; }

    /// <summary>Later places that a place leads to.</summary>
    public int[] Successors { get; }

    /// <summary>w / d beside <see cref="Successors"/>.</summary>
    public float[] ColumnShares { get; }

    /// <summary>Offsets by row: predecessors of a place.</summary>
    public long[] RowStart { get; }

    /// <summary>Earlier places that lead to a place.</summary>
    public int[] Predecessors { get; }

    /// <summary>w / d beside <see cref="Predecessors"/>.</summary>
    public float[] RowShares { get; }

    /// <summary>1 / d by place; 0 at the last.</summary>
    public float[] Inverse { get; }

    /// <summary>Factorises a connected Laplacian.</summary>
    /// <param name="laplacian">L.</param>
    /// <param name="samples">S, 1 to 3 as a rule: more make a better and larger factor.</param>
    /// <param name="seed">Of the draws.</param>
    public static SampledFactor Of(Laplacian laplacian, int samples, ulong seed)
    {
        Builder builder = new(laplacian, samples, seed);
        builder.Run();
        return builder.Finish();
    }

    private static (long[] Start, int[] Index, float[] Value) Transpose(long[] start, int[] index, float[] value)
    {
        int n = start.Length - 1;
        long[] to = new long[n + 2];
        for (long k = 0; k < start[n]; k++)
            to[index[k] + 2]++;
        for (int i = 2; i < to.Length; i++)
            to[i] += to[i - 1];
        int[] moved = new int[start[n]];
        float[] values = new float[start[n]];
        for (int column = 0; column < n; column++)
        {
            for (long k = start[column]; k < start[column + 1]; k++)
            {
                long at = to[index[k] + 1]++;
                moved[at] = column;
                values[at] = value[k];
            }
        }
        return (to[..(n + 1)], moved, values);
    }

    private sealed class Builder
    {
        private readonly Laplacian laplacian;
        private readonly int samples;
        private readonly int n;
        private readonly FillLinks fill;
        private readonly bool[] gone;
        private readonly DegreeQueue queue;
        private readonly int[] order;
        private readonly long[] columnStart;
        private readonly float[] inverse;
        private readonly AppendBuffer<int> successors = new();
        private readonly AppendBuffer<float> shares = new();
        private readonly int[] position; // 1 + place among the gathered neighbours
        private int[] nodes = []; // the row in work: neighbours, ...
        private int[] sortedNodes = [];
        private double[] weights = []; // ... weights, ...
        private double[] after = []; // ... sums of later weights, ...
        private int[] place = []; // ... where each stood before the sort, ...
        private int[] multiplicity = []; // ... how many parallel links went into each, ...
        private int[] change = []; // ... and how each one's degree changes
        private ulong state;

        public Builder(Laplacian laplacian, int samples, ulong seed)
        {
            this.laplacian = laplacian;
            this.samples = samples;
            n = laplacian.NodeCount;
            state = NodeKey.Of((long)seed) | 1;
            fill = new FillLinks(n, samples * (long)laplacian.Neighbours.Length); // what is sampled comes to about twice the links
            gone = new bool[n];
            order = new int[n];
            inverse = new float[n];
            columnStart = new long[n + 1];
            position = new int[n];
            queue = new DegreeQueue(laplacian);
            Grow(64);
        }

        public void Run()
        {
            for (int place = 0; place < n; place++)
            {
                int v = queue.TakeLeast();
                order[place] = v;
                gone[v] = true;
                int count = Gather(v);
                SortByWeight(count);
                double d = 0;
                for (int i = count - 1; i >= 0; i--)
                {
                    after[i + 1] = d;
                    d += weights[i];
                }
                after[0] = d;
                inverse[place] = d > 0 ? (float)(1 / d) : 0;
                for (int i = 0; i < count; i++)
                {
                    successors.Add(nodes[i]);
                    shares.Add((float)(weights[i] / d));
                }
                columnStart[place + 1] = successors.Count;
                for (int i = 0; i + 1 < count; i++)
                {
                    double c = weights[i] * after[i + 1] / (d * samples);
                    if (!(c > 0))
                        continue;
                    for (int s = 0; s < samples; s++)
                    {
                        int j = Draw(i, count);
                        fill.Add(nodes[i], nodes[j], c);
                        change[i]++;
                        change[j]++;
                    }
                }
                for (int i = 0; i < count; i++)
                    queue.Change(nodes[i], change[i]);
            }
        }

        // j > i with probability w_j / W_i: after[] falls from W_i to 0 along j.
        private int Draw(int i, int count)
        {
            double target = NextUnit() * after[i + 1];
            int low = i + 1, high = count - 1; // the first j whose after[j+1] is at most the target
            while (low < high)
            {
                int middle = (low + high) / 2;
                if (after[middle + 1] <= target)
                    high = middle;
                else
                    low = middle + 1;
            }
            return low;
        }

        // Most rows are short, and insertion beats the general sort there. Both order ties the same way each time.
        private void SortByWeight(int count)
        {
            for (int i = 0; i < count; i++)
                place[i] = i;
            if (count > 24)
            {
                Array.Sort(weights, place, 0, count);
            }
            else
            {
                for (int i = 1; i < count; i++)
                {
                    double weight = weights[i];
                    int from = place[i], j = i;
                    for (; j > 0 && weights[j - 1] > weight; j--)
                    {
                        weights[j] = weights[j - 1];
                        place[j] = place[j - 1];
                    }
                    weights[j] = weight;
                    place[j] = from;
                }
            }
            for (int i = 0; i < count; i++)
            {
                sortedNodes[i] = nodes[place[i]];
                change[i] = -multiplicity[place[i]];
            }
            (nodes, sortedNodes) = (sortedNodes, nodes);
        }

        private int Gather(int v)
        {
            int count = 0;
            for (long k = laplacian.RowStart[v]; k < laplacian.RowStart[v + 1]; k++)
            {
                if (!gone[laplacian.Neighbours[k]])
                    Put(laplacian.Neighbours[k], laplacian.Conductance(k));
            }
            for (int link = fill.First(v); link >= 0; link = fill.Next(link))
            {
                if (!gone[fill.To(link)])
                    Put(fill.To(link), fill.Weight(link));
            }
            for (int i = 0; i < count; i++)
                position[nodes[i]] = 0;
            return count;

            void Put(int node, double weight)
            {
                if (position[node] > 0)
                {
                    weights[position[node] - 1] += weight;
                    multiplicity[position[node] - 1]++;
                    return;
                }
                if (count == weights.Length)
                    Grow(2 * count);
                nodes[count] = node;
                multiplicity[count] = 1;
                weights[count++] = weight;
                position[node] = count;
            }
        }

        private void Grow(int size)
        {
            Array.Resize(ref nodes, size);
            Array.Resize(ref sortedNodes, size);
            Array.Resize(ref weights, size);
            Array.Resize(ref after, size + 1);
            Array.Resize(ref place, size);
            Array.Resize(ref change, size);
            Array.Resize(ref multiplicity, size);
        }

        private double NextUnit()
        {
            // xorshift64* (Vigna 2016)
            state ^= state >> 12;
            state ^= state << 25;
            state ^= state >> 27;
            return ((state * 0x2545F4914F6CDD1D) >> 11) * (1.0 / (1UL << 53));
        }

        public SampledFactor Finish()
        {
            int[] placeOf = position; // of a node in the order of elimination
            for (int i = 0; i < n; i++)
                placeOf[order[i]] = i;
            int[] index = new int[successors.Count];
            float[] value = new float[successors.Count];
            for (int block = 0, k = 0; block < successors.BlockCount; block++)
            {
                foreach (int node in successors.Block(block))
                    index[k++] = placeOf[node];
            }
            for (int block = 0, k = 0; block < shares.BlockCount; block++)
            {
                foreach (float share in shares.Block(block))
                    value[k++] = share;
            }
            int[] renumbered = DepthFirst(columnStart, index, value, out int[] newPlace);
            long[] start = new long[n + 1];
            int[] newIndex = new int[index.Length];
            float[] newValue = new float[index.Length], newInverse = new float[n];
            int[] newOrder = new int[n];
            long write = 0;
            for (int i = 0; i < n; i++)
            {
                int old = renumbered[i];
                newOrder[i] = order[old];
                newInverse[i] = inverse[old];
                for (long k = columnStart[old]; k < columnStart[old + 1]; k++)
                {
                    newIndex[write] = newPlace[index[k]];
                    newValue[write++] = value[k];
                }
                start[i + 1] = write;
                Array.Sort(newIndex, newValue, (int)start[i], (int)(write - start[i]));
            }
            return new SampledFactor(newOrder, start, newIndex, newValue, newInverse);
        }

        // From the last node backwards: each place after all of its predecessors.
        private static int[] DepthFirst(long[] columnStart, int[] index, float[] value, out int[] newPlace)
        {
            (long[] rowStart, int[] predecessors, _) = Transpose(columnStart, index, value);
            int n = columnStart.Length - 1;
            int[] order = new int[n], stack = new int[n];
            long[] cursor = rowStart.AsSpan(0, n).ToArray();
            bool[] seen = new bool[n];
            newPlace = new int[n];
            int written = 0;
            for (int root = n - 1; root >= 0; root--)
            {
                if (seen[root])
                    continue;
                int depth = 0;
                stack[depth++] = root;
                seen[root] = true;
                while (depth > 0)
                {
                    int at = stack[depth - 1];
                    if (cursor[at] < rowStart[at + 1])
                    {
                        int u = predecessors[cursor[at]++];
                        if (!seen[u])
                        {
                            seen[u] = true;
                            stack[depth++] = u;
                        }
                        continue;
                    }
                    depth--;
                    newPlace[at] = written;
                    order[written++] = at;
                }
            }
            return order;
        }
    }
}
