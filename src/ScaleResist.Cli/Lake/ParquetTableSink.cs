// Writes a run's tables as Parquet parts, encoded in the background. Invariant: the bytes of a part are a function of the
// table's rows and the run's metadata alone, never of batch sizes or thread counts; at most `encoders` parts are in work.

using ScaleResist.Runs;

namespace ScaleResist.Cli.Lake;

/// <summary>Takes the tables of a run into a staging folder: <c>FOLDER/table/part-00000.parquet</c> and so on.</summary>
internal sealed class ParquetTableSink : ITableSink
{
    // Two encoders keep up with a disk of 100 MB/s; each part in work holds up to about 200 MB.
    private const int MostEncoders = 8;
    private readonly string folder;
    private readonly IReadOnlyDictionary<string, string> metadata;
    private readonly int rowsPerPart;
    private readonly SemaphoreSlim slots;
    private readonly List<(string Name, TableWriter Writer)> writers = [];

    /// <param name="folder">The staging folder.</param>
    /// <param name="metadata">Key-value pairs for every part: where the rows come from.</param>
    /// <param name="encoders">Background threads to encode on.</param>
    /// <param name="rowsPerPart">The most rows a part (tests use small ones).</param>
    public ParquetTableSink(string folder, IReadOnlyDictionary<string, string> metadata, int encoders,
        int rowsPerPart = PartEncoder.MostRows)
    {
        this.folder = folder;
        this.metadata = metadata;
        this.rowsPerPart = rowsPerPart;
        slots = new SemaphoreSlim(Math.Clamp(encoders, 1, MostEncoders));
    }

    /// <summary>Rows by table, in the order of opening. Every table must be complete.</summary>
    public IReadOnlyDictionary<string, long> CompleteRows()
    {
        lock (writers)
        {
            if (writers.Find(w => !w.Writer.IsComplete).Name is string open)
                throw new InvalidOperationException($"Table '{open}' was not completed.");
            return new OrderedDictionary<string, long>(writers.Select(w => KeyValuePair.Create(w.Name, w.Writer.RowCount)));
        }
    }

    public ITableWriter Open(TableDefinition table)
    {
        string path = Path.Combine(folder, table.Name);
        try
        {
            Directory.CreateDirectory(path);
        }
        catch (Exception error) when (LakeException.IsFileSystemError(error))
        {
            throw LakeException.From(path, error);
        }
        Dictionary<string, string> named = new(metadata) { ["scaleresist.table"] = table.Name };
        TableWriter writer = new(new PartEncoder(table, named), path, slots, rowsPerPart);
        lock (writers)
            writers.Add((table.Name, writer));
        return writer;
    }

    /// <summary>Waits until nothing writes into the folder any more; errors are the writers' affair.</summary>
    public void WaitForIdle()
    {
        lock (writers)
        {
            foreach ((_, TableWriter writer) in writers)
                writer.WaitForIdle();
        }
    }

    private sealed class TableWriter(PartEncoder encoder, string path, SemaphoreSlim slots, int rowsPerPart) : ITableWriter
    {
        private readonly List<RowSegment> pending = [];
        private readonly List<Task> parts = [];
        private int pendingRows;
        private int partRows;
        private int listWidth;
        private Exception? failure;

        public long RowCount { get; private set; }

        public bool IsComplete { get; private set; }

        public void Write(RowBatch batch)
        {
            ThrowIfFailed();
            if (IsComplete)
                throw new InvalidOperationException("The table is complete.");
            int width = encoder.Check(batch);
            if (batch.Count == 0)
                return;
            if (partRows == 0)
            {
                listWidth = width;
                partRows = Math.Min(rowsPerPart, PartEncoder.RowsPerPart(width));
            }
            else if (width != listWidth)
            {
                throw new ArgumentException($"Lists of {width} values follow lists of {listWidth}.", nameof(batch));
            }
            for (int from = 0; from < batch.Count;)
            {
                int rows = Math.Min(batch.Count - from, partRows - pendingRows);
                pending.Add(new RowSegment(batch, from, rows));
                pendingRows += rows;
                from += rows;
                if (pendingRows == partRows)
                    StartPart();
            }
            RowCount += batch.Count;
        }

        public long Complete()
        {
            ThrowIfFailed();
            // A table without rows still has a part: readers need its columns.
            if (!IsComplete && (pendingRows > 0 || parts.Count == 0))
                StartPart();
            WaitForIdle();
            ThrowIfFailed();
            IsComplete = true;
            return RowCount;
        }

        // Parts keep their failures to themselves (see Encode), so waiting never throws.
        public void WaitForIdle() => Task.WaitAll(parts);

        private void StartPart()
        {
            RowSegment[] segments = [.. pending];
            pending.Clear();
            pendingRows = 0;
            slots.Wait();
            string file = Path.Combine(path, $"part-{parts.Count:00000}.parquet");
            parts.Add(Task.Factory.StartNew(() => Encode(file, segments), CancellationToken.None,
                TaskCreationOptions.LongRunning, TaskScheduler.Default));
        }

        private void Encode(string file, RowSegment[] segments)
        {
            try
            {
                if (Volatile.Read(ref failure) is null)
                    encoder.Write(file, segments);
            }
            catch (Exception error)
            {
                Interlocked.CompareExchange(ref failure,
                    LakeException.IsFileSystemError(error) ? LakeException.From(file, error) : error, null);
            }
            finally
            {
                slots.Release();
            }
        }

        private void ThrowIfFailed()
        {
            if (Volatile.Read(ref failure) is Exception error)
                System.Runtime.ExceptionServices.ExceptionDispatchInfo.Throw(error);
        }
    }
}

/// <summary>Some consecutive rows of a batch.</summary>
internal readonly record struct RowSegment(RowBatch Batch, int From, int Rows);
