using Dapper;
using Npgsql;

namespace WearWatch.Storage.Facts;

/// <summary>One thing held or refused, as shown.</summary>
public sealed record SetAsideRow
{
    public required string Depot { get; init; }
    public required string Id { get; init; }
    public required string Kind { get; init; }
    public required string VehicleId { get; init; }
    public required bool Held { get; init; }
    public required DateTime ReceivedAt { get; init; }
    public required string Remarks { get; init; }
    /// <summary>As sent; of a steering chunk the first samples of each column.</summary>
    public required byte[] Sent { get; init; }
    /// <summary>Order of arrival within its outcome; what a page token stands on.</summary>
    public required long Seq { get; init; }
}

/// <summary>Counts of what is stored and what waits.</summary>
public sealed record IngestCounts
{
    public required long Vehicles { get; init; }
    public required long Surveys { get; init; }
    public required long Readings { get; init; }
    public required long Chunks { get; init; }
    public required long Samples { get; init; }
    public required long Held { get; init; }
    public required long Refused { get; init; }
    public required long Due { get; init; }
}

/// <summary>What was held or refused, and how much of everything there is.</summary>
public sealed class SetAsideReader(NpgsqlDataSource source)
{
    private const int TimeoutSeconds = 30;

    // Newest first, over both; a page starts below (received_at, seq, held). Served by fact_held and set_aside_open.
    private const string ListSql = """
        SELECT depot, id, kind, vehicle_id, held, received_at, remarks, sent, seq FROM (
          SELECT depot, id, kind, coalesce(vehicle_id, '') AS vehicle_id, true AS held, received_at, remarks::text AS remarks, sent, seq
          FROM ingest.held_fact WHERE @held AND (@depot = '' OR depot = @depot)
          UNION ALL
          SELECT depot, id, kind, vehicle_id, false, received_at, remarks::text, sent, seq
          FROM ingest.set_aside WHERE @refused AND settled_at IS NULL AND (@depot = '' OR depot = @depot)) aside
        WHERE @before::timestamptz IS NULL OR (received_at, seq, held) < (@before, @seq, @heldBefore)
        ORDER BY received_at DESC, seq DESC, held DESC
        LIMIT @size
        """;

    /// <summary>One page, newest first; below the last row of the page before, where there is one.</summary>
    public async Task<IReadOnlyList<SetAsideRow>> List(
        string depot, bool held, bool refused, (DateTime ReceivedAt, long Seq, bool Held)? below, int size, CancellationToken cancel)
    {
        await using var connection = await source.OpenConnectionAsync(cancel);
        var rows = await connection.QueryAsync<SetAsideRow>(Command(ListSql, new
        {
            depot,
            held,
            refused,
            before = below?.ReceivedAt,
            seq = below?.Seq ?? 0,
            heldBefore = below?.Held ?? false,
            size,
        }, cancel));
        return rows.ToList();
    }

    private const string CountsSql = """
        SELECT
          (SELECT count(*) FROM ingest.vehicle) AS vehicles,
          (SELECT count(*) FROM ingest.fact WHERE kind = 'survey') AS surveys,
          (SELECT coalesce(sum(readings), 0)::bigint FROM ingest.fact WHERE kind = 'survey') AS readings,
          (SELECT coalesce(sum(chunks), 0)::bigint FROM ingest.stream) AS chunks,
          (SELECT coalesce(sum(samples), 0)::bigint FROM ingest.stream) AS samples,
          (SELECT count(*) FROM ingest.held_fact) AS held,
          (SELECT count(*) FROM ingest.set_aside WHERE settled_at IS NULL) AS refused
        """;

    private const string AnalysisIsThereSql = "SELECT to_regclass('analysis.progress') IS NOT NULL";

    // Served by the primary keys of both.
    private const string DueSql = """
        SELECT count(*) FROM ingest.vehicle v
        LEFT JOIN analysis.progress p ON p.vehicle_id = v.vehicle_id
        WHERE v.revision > coalesce(p.done_revision, 0)
        """;

    private const string AllDueSql = "SELECT count(*) FROM ingest.vehicle WHERE revision > 0";

    public async Task<IngestCounts> Count(CancellationToken cancel)
    {
        await using var connection = await source.OpenConnectionAsync(cancel);
        var counts = await connection.QuerySingleAsync<StoredCounts>(Command(CountsSql, new { }, cancel));
        var analysed = await connection.QuerySingleAsync<bool>(Command(AnalysisIsThereSql, new { }, cancel));
        var due = await connection.QuerySingleAsync<long>(Command(analysed ? DueSql : AllDueSql, new { }, cancel));
        return new IngestCounts
        {
            Vehicles = counts.Vehicles,
            Surveys = counts.Surveys,
            Readings = counts.Readings,
            Chunks = counts.Chunks,
            Samples = counts.Samples,
            Held = counts.Held,
            Refused = counts.Refused,
            Due = due,
        };
    }

    private sealed record StoredCounts
    {
        public required long Vehicles { get; init; }
        public required long Surveys { get; init; }
        public required long Readings { get; init; }
        public required long Chunks { get; init; }
        public required long Samples { get; init; }
        public required long Held { get; init; }
        public required long Refused { get; init; }
    }

    private static CommandDefinition Command(string sql, object parameters, CancellationToken cancel) =>
        new(sql, parameters, commandTimeout: TimeoutSeconds, cancellationToken: cancel);
}
