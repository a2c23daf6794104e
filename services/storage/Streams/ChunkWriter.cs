using Dapper;
using Npgsql;
using NpgsqlTypes;
using WearWatch.Storage.Facts;

namespace WearWatch.Storage.Streams;

/// <summary>One chunk ready to be committed, or refused already and only to be kept aside.</summary>
public sealed record ChunkRow
{
    public required long Sequence { get; init; }
    public required DateTimeOffset StartAt { get; init; }
    public required DateTimeOffset EndAt { get; init; }
    public required int Samples { get; init; }
    public required byte[] ContentHash { get; init; }
    /// <summary>Quantised and compressed; null when refused.</summary>
    public byte[]? Columns { get; init; }
    /// <summary>What is kept of it if it is refused: the first samples of each column, as sent.</summary>
    public required byte[] Excerpt { get; init; }
    /// <summary>Why it was refused at the door; empty otherwise.</summary>
    public IReadOnlyList<Remark> Refusals { get; init; } = [];
}

/// <summary>What became of one chunk.</summary>
public sealed record ChunkAnswer(long Sequence, bool Stored, bool Known, IReadOnlyList<Remark> Remarks);

/// <summary>What became of a group of chunks, after its commit.</summary>
public sealed record ChunksCommitted(IReadOnlyList<ChunkAnswer> Answers, long CommittedThrough);

/// <summary>
/// Commits chunks of one stream in groups: judged against the stored ones under the stream's row lock, copied in
/// binary into a staging table of the session, inserted from there.
/// </summary>
public sealed class ChunkWriter(NpgsqlDataSource source)
{
    private const int TimeoutSeconds = 60;

    public async Task<ChunksCommitted> CopyChunks(StreamRow stream, IReadOnlyList<ChunkRow> chunks, CancellationToken cancel)
    {
        await using var connection = await source.OpenConnectionAsync(cancel);
        await using var transaction = await connection.BeginTransactionAsync(cancel);
        var through = await Lock(connection, stream, cancel);
        var (accepted, answers) = ChunkJudge.Judge(chunks, await Neighbours(connection, stream, chunks, cancel));
        if (accepted.Count > 0)
        {
            await Stage(connection, accepted, cancel);
            through = await Insert(connection, stream, accepted, cancel);
        }
        await SetAside(connection, transaction, stream, chunks, answers, cancel);
        await transaction.CommitAsync(cancel);
        return new ChunksCommitted(answers, through);
    }

    // Served by the primary key; two senders of one stream take turns here.
    private const string LockSql = "SELECT committed_through FROM ingest.stream WHERE depot = @Depot AND stream_id = @StreamId FOR UPDATE";

    private static Task<long> Lock(NpgsqlConnection connection, StreamRow stream, CancellationToken cancel) =>
        connection.QuerySingleAsync<long>(Command(LockSql, new { stream.Depot, stream.StreamId }, cancel));

    // Served by the primary key, once a chunk and side.
    private const string NeighboursSql = """
        SELECT s.sequence, c.content_hash,
          (SELECT p.end_at FROM ingest.chunk p WHERE p.depot = @Depot AND p.stream_id = @StreamId AND p.sequence < s.sequence
           ORDER BY p.sequence DESC LIMIT 1) AS end_before,
          (SELECT n.start_at FROM ingest.chunk n WHERE n.depot = @Depot AND n.stream_id = @StreamId AND n.sequence > s.sequence
           ORDER BY n.sequence LIMIT 1) AS start_after
        FROM (SELECT DISTINCT unnest(@sequences) AS sequence) s
        LEFT JOIN ingest.chunk c ON c.depot = @Depot AND c.stream_id = @StreamId AND c.sequence = s.sequence
        """;

    private static async Task<Dictionary<long, ChunkNeighbours>> Neighbours(
        NpgsqlConnection connection, StreamRow stream, IReadOnlyList<ChunkRow> chunks, CancellationToken cancel)
    {
        var rows = await connection.QueryAsync<ChunkNeighbours>(Command(NeighboursSql,
            new { stream.Depot, stream.StreamId, sequences = chunks.Select(c => c.Sequence).ToArray() }, cancel));
        return rows.ToDictionary(r => r.Sequence);
    }

    private const string StagingSql = """
        CREATE TEMPORARY TABLE IF NOT EXISTS chunk_staging (
          sequence bigint, start_at timestamptz, end_at timestamptz, samples integer, content_hash bytea, columns bytea)
        ON COMMIT DELETE ROWS
        """;

    private const string CopySql = "COPY chunk_staging (sequence, start_at, end_at, samples, content_hash, columns) FROM STDIN (FORMAT binary)";

    private static async Task Stage(NpgsqlConnection connection, IReadOnlyList<ChunkRow> chunks, CancellationToken cancel)
    {
        await connection.ExecuteAsync(Command(StagingSql, new { }, cancel));
        await using var copy = await connection.BeginBinaryImportAsync(CopySql, cancel);
        copy.Timeout = TimeSpan.FromSeconds(TimeoutSeconds);
        foreach (var chunk in chunks)
        {
            await copy.StartRowAsync(cancel);
            await copy.WriteAsync(chunk.Sequence, NpgsqlDbType.Bigint, cancel);
            await copy.WriteAsync(chunk.StartAt.UtcDateTime, NpgsqlDbType.TimestampTz, cancel);
            await copy.WriteAsync(chunk.EndAt.UtcDateTime, NpgsqlDbType.TimestampTz, cancel);
            await copy.WriteAsync(chunk.Samples, NpgsqlDbType.Integer, cancel);
            await copy.WriteAsync(chunk.ContentHash, NpgsqlDbType.Bytea, cancel);
            await copy.WriteAsync(chunk.Columns!, NpgsqlDbType.Bytea, cancel);
        }
        await copy.CompleteAsync(cancel);
    }

    // Served by the primary keys. The vehicle's row is taken last, shortly before the commit.
    private const string InsertSql = """
        WITH raised AS (
          UPDATE ingest.vehicle SET revision = revision + 1 WHERE vehicle_id = @VehicleId RETURNING revision),
        inserted AS (
          INSERT INTO ingest.chunk (depot, stream_id, sequence, vehicle_id, start_at, end_at, rate_hz, samples, content_hash, columns, revision)
          SELECT @Depot, @StreamId, s.sequence, @VehicleId, s.start_at, s.end_at, @RateHz, s.samples, s.content_hash, s.columns, r.revision
          FROM chunk_staging s CROSS JOIN raised r
          ON CONFLICT (depot, stream_id, sequence) DO NOTHING
          RETURNING samples)
        UPDATE ingest.stream SET
          chunks = chunks + (SELECT count(*) FROM inserted),
          samples = samples + (SELECT coalesce(sum(i.samples), 0) FROM inserted i)
        WHERE depot = @Depot AND stream_id = @StreamId
        """;

    // The run of sequences that starts right after what was committed through. Served by the primary key.
    private const string ThroughSql = """
        UPDATE ingest.stream s SET committed_through = coalesce((
          SELECT max(run.sequence) FROM (
            SELECT c.sequence, c.sequence - row_number() OVER (ORDER BY c.sequence) AS gap
            FROM ingest.chunk c
            WHERE c.depot = s.depot AND c.stream_id = s.stream_id AND c.sequence > s.committed_through) run
          WHERE run.gap = s.committed_through), s.committed_through)
        WHERE s.depot = @Depot AND s.stream_id = @StreamId
        RETURNING s.committed_through
        """;

    private static async Task<long> Insert(NpgsqlConnection connection, StreamRow stream, IReadOnlyList<ChunkRow> chunks, CancellationToken cancel)
    {
        var parameters = new { stream.Depot, stream.StreamId, stream.VehicleId, stream.RateHz };
        await connection.ExecuteAsync(Command(InsertSql, parameters, cancel));
        return await connection.QuerySingleAsync<long>(Command(ThroughSql, parameters, cancel));
    }

    /// <summary>Refused chunks stay with their reason and their first samples.</summary>
    private static async Task SetAside(NpgsqlConnection connection, NpgsqlTransaction transaction, StreamRow stream,
        IReadOnlyList<ChunkRow> chunks, IReadOnlyList<ChunkAnswer> answers, CancellationToken cancel)
    {
        await using var batch = new NpgsqlBatch(connection, transaction) { Timeout = TimeoutSeconds };
        foreach (var (chunk, answer) in chunks.Zip(answers).Where(pair => !pair.Second.Stored))
        {
            batch.BatchCommands.Add(FactBatch.SetAsideCommand(stream.Depot, $"{stream.StreamId}/{chunk.Sequence}", FactKind.SteeringChunk,
                stream.VehicleId, chunk.ContentHash, answer.Remarks, chunk.Excerpt, ""));
        }
        if (batch.BatchCommands.Count > 0) await batch.ExecuteNonQueryAsync(cancel);
    }

    private static CommandDefinition Command(string sql, object parameters, CancellationToken cancel) =>
        new(sql, parameters, commandTimeout: TimeoutSeconds, cancellationToken: cancel);
}
