// Threads on one front or on many runs. Invariant: whoever computes an entry computes the same chain of operations, so bits do not depend on
// the number of threads.

using System.Runtime.ExceptionServices;
using ScaleResist.Kernels;

namespace ScaleResist.Solving;

/// <summary>Shares products of large fronts between threads; one thread for those of runs.</summary>
internal sealed unsafe class FrontTeam(int threads)
{
    private const long LeastShare = 1 << 20; // multiply-adds that are worth waking a thread
    private const int PartsPerThread = 4;
    private const int Many = 8; // groups of columns, enough to share
    private readonly ParallelOptions options = new() { MaxDegreeOfParallelism = threads };

    /// <summary>As <see cref="DenseKernels.MultiplyAdd"/>, strips of rows side by side.</summary>
    public void MultiplyAdd(
        int m, int n, int k, double* a, long lda, double* b, long ldb, double* c, long ldc, bool lower = false)
    {
        if (threads == 1 || (long)m * n * k < 2 * LeastShare)
        {
            DenseKernels.MultiplyAdd(m, n, k, a, lda, b, ldb, c, ldc, lower);
            return;
        }
        if (lower || n >= Many * DenseKernels.Tile)
            ByColumns(m, n, k, a, lda, b, ldb, c, ldc, lower);
        else
            ByRows(m, n, k, a, lda, b, ldb, c, ldc);
    }

    // Groups of eight columns in turn, the long ones of a triangle first.
    private void ByColumns(int m, int n, int k, double* a, long lda, double* b, long ldb, double* c, long ldc, bool lower) =>
        Parallel.For(0, (n + DenseKernels.Tile - 1) / DenseKernels.Tile, options, tile =>
        {
            int j = tile * DenseKernels.Tile, top = lower ? j : 0;
            DenseKernels.MultiplyAdd(
                m - top, Math.Min(DenseKernels.Tile, n - j), k, a + top, lda, b + j, ldb, c + (j * ldc) + top, ldc);
        });

    private void ByRows(int m, int n, int k, double* a, long lda, double* b, long ldb, double* c, long ldc)
    {
        int parts = (int)Math.Min(threads * PartsPerThread, (long)m * n * k / LeastShare);
        int rows = ((m + parts - 1) / parts + 7) & ~7;
        Parallel.For(0, (m + rows - 1) / rows, options, part =>
        {
            int i = part * rows;
            DenseKernels.MultiplyAdd(Math.Min(rows, m - i), n, k, a + i, lda, b, ldb, c + i, ldc);
        });
    }

    /// <summary>Works off all runs, dearest first, each thread with a worker of its own.</summary>
    public static void WorkOff<TWorker>(
        FrontRun[] runs, int threads, Func<TWorker> hire, Action<TWorker, FrontRun> work, CancellationToken cancel)
        where TWorker : class, IDisposable
    {
        int next = -1;
        ParallelOptions options = new() { MaxDegreeOfParallelism = threads, CancellationToken = cancel };
        try
        {
            Parallel.For(0, Math.Min(threads, runs.Length), options, _ => TakeRuns());
        }
        catch (AggregateException failures)
        {
            ExceptionDispatchInfo.Throw(failures.Flatten().InnerExceptions[0]);
        }

        void TakeRuns()
        {
            TWorker? worker = null;
            try
            {
                for (int i = Interlocked.Increment(ref next); i < runs.Length; i = Interlocked.Increment(ref next))
                {
                    cancel.ThrowIfCancellationRequested();
                    worker ??= hire();
                    work(worker, runs[i]);
                }
            }
            finally
            {
                worker?.Dispose();
            }
        }
    }
}
