using Dapper;
using Npgsql;
using WearWatch.Diagnosis.Facts;

namespace WearWatch.Storage.Facts;

/// <summary>What a batch touches, known before its items are judged one by one.</summary>
public sealed record BatchScope
{
    /// <summary>The facts themselves and those they correct or withdraw.</summary>
    public required IReadOnlyCollection<FactKey> Keys { get; init; }
    public required IReadOnlyCollection<string> Vehicles { get; init; }
    public required IReadOnlyCollection<string> Depots { get; init; }
    public required IReadOnlyCollection<string> Tyres { get; init; }
    /// <summary>Whether it holds facts of a depot rather than of a vehicle.</summary>
    public required bool TouchesSettings { get; init; }
    /// <summary>Earliest time in the batch.</summary>
    public required DateTimeOffset Earliest { get; init; }
}

/// <summary>Opens a batch: one transaction, its vehicles locked in one order, what its items are judged by loaded.</summary>
public sealed class IngestFacts(NpgsqlDataSource source)
{
    internal const int TimeoutSeconds = 30;

    public async Task<FactBatch> Begin(BatchScope scope, CancellationToken cancel)
    {
        var connection = await source.OpenConnectionAsync(cancel);
        NpgsqlTransaction? transaction = null;
        try
        {
            transaction = await connection.BeginTransactionAsync(cancel);
            var vehicles = await Touched(connection, scope, cancel);
            await Lock(connection, scope, vehicles, cancel);
            var context = new FactContext();
            await LoadKnown(connection, scope, context, cancel);
            await LoadBodies(connection, scope, vehicles, context, cancel);
            return new FactBatch(connection, transaction, context);
        }
        catch
        {
            if (transaction is not null) await transaction.DisposeAsync();
            await connection.DisposeAsync();
            throw;
        }
    }

    // Vehicles of the facts that are corrected or withdrawn, and those on which a described tyre was fitted.
    // Served by the primary key and fact_tyre.
    private const string TouchedSql = """
        SELECT v FROM (
          SELECT unnest(ARRAY[f.vehicle_id, f.tractor_id]) AS v
          FROM unnest(@depots, @ids) AS k(depot, id)
          JOIN ingest.fact f ON f.depot = k.depot AND f.id = k.id
          UNION
          SELECT f.vehicle_id FROM ingest.fact f WHERE f.tyre_id = ANY(@tyres) AND f.kind = 'fitting') t
        WHERE v IS NOT NULL
        """;

    private static async Task<HashSet<string>> Touched(NpgsqlConnection connection, BatchScope scope, CancellationToken cancel)
    {
        var more = await connection.QueryAsync<string>(Command(TouchedSql,
            new { depots = scope.Keys.Select(k => k.Depot).ToArray(), ids = scope.Keys.Select(k => k.Id).ToArray(), tyres = scope.Tyres.ToArray() }, cancel));
        return [.. scope.Vehicles, .. more];
    }

    // Locks in the order of their numbers, so that two batches never wait for each other in a ring.
    private const string LockSql = """
        SELECT pg_advisory_xact_lock(k)
        FROM (SELECT DISTINCT hashtextextended(name, 0) AS k FROM unnest(@names) AS name ORDER BY k) keys
        """;

    private static async Task Lock(NpgsqlConnection connection, BatchScope scope, HashSet<string> vehicles, CancellationToken cancel)
    {
        var names = vehicles.Select(v => $"vehicle:{v}").Concat(scope.Tyres.Select(t => $"tyre:{t}"));
        if (scope.TouchesSettings) names = names.Concat(scope.Depots.Select(d => $"depot:{d}"));
        await connection.ExecuteAsync(Command(LockSql, new { names = names.ToArray() }, cancel));
    }

    // Served by the primary key.
    private const string KnownSql = """
        SELECT f.depot, f.id, f.kind, f.vehicle_id, f.tractor_id, f.content_hash, f.outcome = 'held' AS held, f.remarks::text AS remarks
        FROM (SELECT DISTINCT depot, id FROM unnest(@depots, @ids) AS k(depot, id)) k
        JOIN ingest.fact f ON f.depot = k.depot AND f.id = k.id
        """;

    private sealed record KnownRow
    {
        public required string Depot { get; init; }
        public required string Id { get; init; }
        public required string Kind { get; init; }
        public string? VehicleId { get; init; }
        public string? TractorId { get; init; }
        public required byte[] ContentHash { get; init; }
        public required bool Held { get; init; }
        public required string Remarks { get; init; }
    }

    private static async Task LoadKnown(NpgsqlConnection connection, BatchScope scope, FactContext context, CancellationToken cancel)
    {
        var rows = await connection.QueryAsync<KnownRow>(Command(KnownSql,
            new { depots = scope.Keys.Select(k => k.Depot).ToArray(), ids = scope.Keys.Select(k => k.Id).ToArray() }, cancel));
        foreach (var row in rows)
        {
            context.Remember(new KnownFact
            {
                Depot = row.Depot,
                Id = row.Id,
                Kind = row.Kind,
                VehicleId = row.VehicleId,
                TractorId = row.TractorId,
                ContentHash = row.ContentHash,
                Held = row.Held,
                Remarks = FactJson.Read<List<Remark>>(row.Remarks),
            });
        }
        foreach (var (depot, id) in await connection.QueryAsync<(string, string)>(Command(SetAsideSql, new { depots = scope.Keys.Select(k => k.Depot).ToArray(), ids = scope.Keys.Select(k => k.Id).ToArray() }, cancel)))
            context.RememberSetAside(new FactKey(depot, id));
    }

    // Served by the primary key.
    private const string SetAsideSql = """
        SELECT DISTINCT s.depot, s.id
        FROM unnest(@depots, @ids) AS k(depot, id)
        JOIN ingest.set_aside s ON s.depot = k.depot AND s.id = k.id AND s.settled_at IS NULL
        """;

    // Surveys from five before the batch's earliest on; everything else of the vehicles whole.
    // Served by fact_vehicle, fact_tyre and fact_kind.
    private const string BodiesSql = """
        SELECT f.id AS fact_id, f.depot, f.kind, f.vehicle_id, f.tractor_id, f.tyre_id, f.at, f.seq, false AS held, f.body::text AS body
        FROM ingest.current_fact f
        WHERE f.vehicle_id = ANY(@vehicles)
          AND (f.kind IN ('vehicle', 'fitting', 'decision') OR f.kind = 'survey' AND f.at >= coalesce((
            SELECT s.at FROM ingest.fact s
            WHERE s.vehicle_id = f.vehicle_id AND s.kind = 'survey' AND s.at < @earliest
            ORDER BY s.at DESC OFFSET 4 LIMIT 1), '-infinity'))
        UNION ALL
        SELECT f.id, f.depot, f.kind, f.vehicle_id, f.tractor_id, f.tyre_id, f.at, f.seq, true, f.body::text
        FROM ingest.held_fact f
        WHERE f.vehicle_id = ANY(@vehicles) AND f.kind = 'survey'
        UNION ALL
        SELECT f.id, f.depot, f.kind, f.vehicle_id, f.tractor_id, f.tyre_id, f.at, f.seq, false, f.body::text
        FROM ingest.current_fact f
        WHERE f.kind = 'tyre' AND (f.tyre_id = ANY(@tyres)
          OR f.tyre_id IN (SELECT t.tyre_id FROM ingest.fact t WHERE t.vehicle_id = ANY(@vehicles) AND t.kind = 'fitting'))
        UNION ALL
        SELECT f.id, f.depot, f.kind, f.vehicle_id, f.tractor_id, f.tyre_id, f.at, f.seq, false, f.body::text
        FROM ingest.current_fact f
        WHERE f.kind IN ('depot', 'depth_limit') AND (f.depot = ANY(@depots)
          OR f.depot IN (SELECT v.depot FROM ingest.fact v WHERE v.vehicle_id = ANY(@vehicles) AND v.kind = 'vehicle'))
        ORDER BY at, seq
        """;

    private static async Task LoadBodies(NpgsqlConnection connection, BatchScope scope, HashSet<string> vehicles, FactContext context, CancellationToken cancel)
    {
        var rows = await connection.QueryAsync<FactText>(Command(BodiesSql,
            new { vehicles = vehicles.ToArray(), tyres = scope.Tyres.ToArray(), depots = scope.Depots.ToArray(), earliest = scope.Earliest.UtcDateTime }, cancel));
        foreach (var row in rows)
        {
            object body = row.Kind switch
            {
                FactKind.Vehicle => FactJson.Read<Vehicle>(row.Body),
                FactKind.Survey => FactJson.Read<TreadSurvey>(row.Body),
                FactKind.Fitting => FactJson.Read<FittingRecord>(row.Body),
                FactKind.Tyre => FactJson.Read<Tyre>(row.Body),
                FactKind.Depot => FactJson.Read<Depot>(row.Body),
                FactKind.Decision => FactJson.Read<Decision>(row.Body),
                _ => FactJson.Read<DepthLimitFact>(row.Body),
            };
            context.Take(new FactKey(row.Depot, row.FactId), new DateTimeOffset(DateTime.SpecifyKind(row.At, DateTimeKind.Utc)), body, row.Held);
        }
    }

    internal static CommandDefinition Command(string sql, object parameters, CancellationToken cancel) =>
        new(sql, parameters, commandTimeout: TimeoutSeconds, cancellationToken: cancel);
}
