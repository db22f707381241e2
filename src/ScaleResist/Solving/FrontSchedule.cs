// What threads do side by side: runs of fronts of similar cost, each by one thread, then the fronts above them one after the other, each by all.
// Invariant: the schedule depends on the structure alone, and no arithmetic depends on the schedule.
//
// Blocks that pass between a front and its children live on two stacks, by the parity of the front's depth: a front pushes on one while its
// children's blocks lie on the other, so neither ever moves a block, and a path of a million fronts needs two. Blocks that pass between a
// run and the fronts above are held apart. All sizes are known here.

namespace ScaleResist.Solving;

/// <summary>The fronts <c>Start .. End-1</c>: whole subtrees.</summary>
internal readonly record struct FrontRun(int Start, int End);

/// <summary>Doubles that a pass over fronts needs: two stacks, and the largest pair of buffers for a front's own columns.</summary>
internal readonly record struct FrontSpace(long Even, long Odd, long Own)
{
    public long Doubles => Even + Odd + (2 * Own);

    /// <summary>Room for two blocks in place of each.</summary>
    public FrontSpace Twice() => new(2 * Even, 2 * Odd, Own);

    public FrontSpace Max(FrontSpace other) =>
        new(Math.Max(Even, other.Even), Math.Max(Odd, other.Odd), Math.Max(Own, other.Own));
}

/// <summary>A cut through the tree of fronts.</summary>
internal sealed class FrontSchedule
{
    private const int Pieces = 24; // no run costs more than this part of the whole, unless it is one front
    private const int MostSubtrees = 4096;
    private const long FrontCost = 1000; // of a front however small, in operations

    private readonly SymbolicCholesky symbolic;
    private readonly bool[] above;

    private FrontSchedule(SymbolicCholesky symbolic, bool[] above, int[] top, FrontRun[] runs)
    {
        this.symbolic = symbolic;
        this.above = above;
        Top = top;
        Subtrees = runs;
        foreach (FrontRun run in runs)
        {
            EliminationOfRuns = EliminationOfRuns.Max(Elimination(Enumerable.Range(run.Start, run.End - run.Start)));
            InversionOfRuns = InversionOfRuns.Max(Inversion(run.End - 1, run.End - run.Start, i => run.End - 1 - i));
        }
        EliminationOfTop = Elimination(top);
        InversionOfTop = Inversion(top.Length - 1, top.Length, i => top[^(i + 1)]);
        Held = [.. Enumerable.Range(0, symbolic.Count).Where(IsHeld)];
        foreach (int f in Held)
        {
            HeldUpdates += FrontSize.Update(symbolic.RowCount(f));
            HeldInverses += InverseOf(f);
        }
    }

    /// <summary>Runs, dearest first.</summary>
    public FrontRun[] Subtrees { get; }

    /// <summary>The fronts above the runs, ascending.</summary>
    public int[] Top { get; }

    /// <summary>Fronts of runs whose parent is above, ascending.</summary>
    public int[] Held { get; }

    /// <summary>Doubles of the held fronts' updates.</summary>
    public long HeldUpdates { get; }

    /// <summary>Doubles of the held fronts' inverses.</summary>
    public long HeldInverses { get; }

    /// <summary>What one thread needs for any run of the factorisation.</summary>
    public FrontSpace EliminationOfRuns { get; }

    /// <summary>What the fronts above need in the factorisation.</summary>
    public FrontSpace EliminationOfTop { get; }

    /// <summary>What one thread needs for any run of the inversion.</summary>
    public FrontSpace InversionOfRuns { get; }

    /// <summary>What the fronts above need in the inversion.</summary>
    public FrontSpace InversionOfTop { get; }

    /// <summary>Bytes of all blocks of the factorisation at their peak.</summary>
    public long EliminationBytes(int threads) => sizeof(double) * (HeldUpdates + Shared(threads, EliminationOfRuns, EliminationOfTop));

    /// <summary>Bytes of all blocks of the inversion at their peak.</summary>
    /// <param name="threads">Threads.</param>
    /// <param name="slopes">Whether slopes come along.</param>
    public long InversionBytes(int threads, bool slopes) => sizeof(double) * (slopes
        ? (2 * HeldInverses) + Shared(threads, InversionOfRuns.Twice(), InversionOfTop.Twice())
        : HeldInverses + Shared(threads, InversionOfRuns, InversionOfTop));

    // Beside the blocks, 4 bytes a node and thread for local numbers and 16 a front for addresses and logarithms.
    private long Shared(int threads, FrontSpace runs, FrontSpace top)
    {
        long local = symbolic.Nodes.Length / 2;
        return Math.Max(Math.Min(threads, Subtrees.Length) * (runs.Doubles + local), top.Doubles + local) + (2L * symbolic.Count);
    }

    /// <summary>Whether a front's block is held apart from the stacks.</summary>
    public bool IsHeld(int front) => !above[front] && symbolic.Parent[front] >= 0 && above[symbolic.Parent[front]];

    /// <summary>The first child that shares a stack with its parent, or -1: in reverse order, the last to need it.</summary>
    public int FirstStacked(int front)
    {
        int child = symbolic.FirstChild[front];
        while (child >= 0 && IsHeld(child))
            child = symbolic.Sibling[child];
        return child;
    }

    public static FrontSchedule Of(SymbolicCholesky symbolic)
    {
        int count = symbolic.Count;
        long[] cost = new long[count];
        int[] size = new int[count];
        long total = 0;
        PriorityQueue<int, (long, int)> open = new();
        for (int f = 0; f < count; f++)
        {
            long own = FrontCost
                + FrontSize.EliminationOperations(symbolic.Own(f), symbolic.RowCount(f))
                + FrontSize.InversionOperations(symbolic.Own(f), symbolic.RowCount(f));
            cost[f] += own;
            total += own;
            size[f]++;
            int parent = symbolic.Parent[f];
            if (parent < 0)
            {
                open.Enqueue(f, (-cost[f], f));
                continue;
            }
            cost[parent] += cost[f];
            size[parent] += size[f];
        }
        bool[] above = new bool[count];
        List<int> roots = [], top = [];
        while (open.TryDequeue(out int f, out (long Cost, int) key))
        {
            if (-key.Cost <= total / Pieces || symbolic.FirstChild[f] < 0 || roots.Count + open.Count >= MostSubtrees)
            {
                roots.Add(f);
                continue;
            }
            above[f] = true;
            top.Add(f);
            for (int child = symbolic.FirstChild[f]; child >= 0; child = symbolic.Sibling[child])
                open.Enqueue(child, (-cost[child], child));
        }
        top.Sort();
        roots.Sort();
        List<(FrontRun Run, long Cost)> runs = [];
        foreach (int root in roots)
        {
            int start = root - size[root] + 1;
            if (runs.Count > 0 && runs[^1].Run.End == start && runs[^1].Cost + cost[root] <= total / Pieces)
                runs[^1] = (new FrontRun(runs[^1].Run.Start, root + 1), runs[^1].Cost + cost[root]);
            else
                runs.Add((new FrontRun(start, root + 1), cost[root]));
        }
        return new FrontSchedule(symbolic, above, [.. top], [.. runs.OrderByDescending(run => run.Cost).Select(run => run.Run)]);
    }

    private FrontSpace Elimination(IEnumerable<int> fronts)
    {
        Span<long> level = [0, 0], peak = [0, 0];
        long own = 0;
        foreach (int f in fronts)
        {
            int s = symbolic.Own(f), odd = symbolic.Odd[f] ? 1 : 0;
            own = Math.Max(own, (FrontSize.OwnStride(s, symbolic.RowCount(f)) * s) + 8);
            for (int child = symbolic.FirstChild[f]; child >= 0; child = symbolic.Sibling[child])
                level[1 - odd] -= IsHeld(child) ? 0 : FrontSize.Update(symbolic.RowCount(child));
            level[odd] += IsHeld(f) ? 0 : FrontSize.Update(symbolic.RowCount(f));
            peak[odd] = Math.Max(peak[odd], level[odd]);
        }
        return new FrontSpace(peak[0], peak[1], own);
    }

    private FrontSpace Inversion(int last, int count, Func<int, int> front)
    {
        Span<long> level = [0, 0], peak = [0, 0];
        for (int i = 0; i < count && last >= 0; i++)
        {
            int f = front(i), odd = symbolic.Odd[f] ? 1 : 0, parent = symbolic.Parent[f];
            if (!IsHeld(f))
            {
                level[odd] += InverseOf(f);
                peak[odd] = Math.Max(peak[odd], level[odd]);
                if (parent >= 0 && FirstStacked(parent) == f && !IsHeld(parent))
                    level[1 - odd] -= InverseOf(parent);
                if (FirstStacked(f) < 0)
                    level[odd] -= InverseOf(f);
            }
        }
        return new FrontSpace(peak[0], peak[1], 0);
    }

    private long InverseOf(int front) => FrontSize.Inverse(symbolic.Own(front), symbolic.RowCount(front));
}
