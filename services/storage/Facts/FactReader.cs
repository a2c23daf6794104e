using Dapper;
using Npgsql;

namespace WearWatch.Storage.Facts;

/// <summary>Reads facts as analysis and report need them; works under any of the three roles.</summary>
public sealed class FactReader(NpgsqlDataSource source)
{
    private const int TimeoutSeconds = 60;

    /// <summary>A fact that holds from ever, such as a vehicle recorded without a date.</summary>
    public static DateTimeOffset Always { get; } = DateTimeOffset.UnixEpoch;

    // Served by fact_vehicle, fact_tractor and fact_tyre; fact_kind for the depots.
    private const string VehicleSql = """
        SELECT id AS fact_id, depot, kind, vehicle_id, tractor_id, tyre_id, at, seq, false AS held, body::text AS body
        FROM ingest.current_fact
        WHERE vehicle_id = @vehicleId AND at < @before
        UNION ALL
        SELECT id, depot, kind, vehicle_id, tractor_id, tyre_id, at, seq, false, body::text
        FROM ingest.current_fact
        WHERE tractor_id = @vehicleId AND at < @before
        UNION ALL
        SELECT id, depot, kind, vehicle_id, tractor_id, tyre_id, at, seq, true, body::text
        FROM ingest.held_fact
        WHERE vehicle_id = @vehicleId AND kind = 'survey' AND at < @before
        UNION ALL
        SELECT id, depot, kind, vehicle_id, tractor_id, tyre_id, at, seq, false, body::text
        FROM ingest.current_fact
        WHERE kind = 'tyre' AND tyre_id IN (SELECT f.tyre_id FROM ingest.fact f WHERE f.vehicle_id = @vehicleId AND f.kind = 'fitting')
        UNION ALL
        SELECT id, depot, kind, vehicle_id, tractor_id, tyre_id, at, seq, false, body::text
        FROM ingest.current_fact
        WHERE kind = 'depot' AND depot IN (SELECT f.depot FROM ingest.fact f WHERE f.vehicle_id = @vehicleId AND f.kind = 'vehicle')
        ORDER BY at, seq
        """;

    // Served by the unique key of ingest.vehicle and by chunk_vehicle.
    private const string RevisionSql = """
        SELECT v.vehicle_id, v.revision,
          (SELECT max(c.end_at) FROM ingest.chunk c WHERE c.vehicle_id = v.vehicle_id AND c.start_at < @before) AS chunks_through
        FROM ingest.vehicle v
        WHERE @vehicleId::text IS NULL OR v.vehicle_id = @vehicleId
        ORDER BY v.vehicle_id
        """;

    /// <summary>Facts of one vehicle up to the end of a day (UTC); null where it is not known by then.</summary>
    public async Task<VehicleFacts?> LoadVehicle(string vehicleId, DateOnly? asOf, CancellationToken cancel)
    {
        await using var connection = await source.OpenConnectionAsync(cancel);
        var parameters = new { vehicleId, before = Before(asOf) };
        // The revision is read before the facts: facts committed in between make the vehicle due once more.
        var revision = (await connection.QueryAsync<RevisionRow>(Command(RevisionSql, parameters, cancel))).SingleOrDefault();
        if (revision is null) return null;
        var rows = await connection.QueryAsync<FactText>(Command(VehicleSql, parameters, cancel));
        return VehicleAssembly.Of(revision, rows.ToList(), asOf);
    }

    private const string FleetSql = """
        SELECT id AS fact_id, depot, kind, vehicle_id, tractor_id, tyre_id, at, seq, false AS held, body::text AS body
        FROM ingest.current_fact
        WHERE kind IN ('vehicle', 'survey', 'fitting', 'driver_report', 'workshop_record', 'usual_route', 'coupling', 'decision', 'tyre', 'depot')
          AND at < @before
        UNION ALL
        SELECT id, depot, kind, vehicle_id, tractor_id, tyre_id, at, seq, true, body::text
        FROM ingest.held_fact
        WHERE kind = 'survey' AND at < @before
        ORDER BY at, seq
        """;

    /// <summary>Facts of every vehicle, by vehicle id.</summary>
    public Task<IReadOnlyList<VehicleFacts>> LoadFleet(CancellationToken cancel) => LoadFleet(null, cancel);

    public async Task<IReadOnlyList<VehicleFacts>> LoadFleet(DateOnly? asOf, CancellationToken cancel)
    {
        await using var connection = await source.OpenConnectionAsync(cancel);
        var parameters = new { vehicleId = (string?)null, before = Before(asOf) };
        var revisions = await connection.QueryAsync<RevisionRow>(Command(RevisionSql, parameters, cancel));
        var rows = (await connection.QueryAsync<FactText>(Command(FleetSql, parameters, cancel))).ToList();
        return VehicleAssembly.Fleet(revisions, rows, asOf);
    }

    // Served by fact_kind.
    private const string SettingsSql = """
        SELECT id AS fact_id, depot, kind, vehicle_id, tractor_id, tyre_id, at, seq, false AS held, body::text AS body
        FROM ingest.current_fact
        WHERE kind IN ('depot', 'price', 'depth_limit', 'tolerance', 'setting', 'decision')
          AND (@depot::text IS NULL OR depot = @depot)
        ORDER BY at, seq
        """;

    private const string SettingsRevisionSql = """
        SELECT depot, revision FROM ingest.settings_revision
        WHERE @depot::text IS NULL OR depot = @depot
        """;

    /// <summary>What every depot has set, by depot id; what lies in the future is included with its date.</summary>
    public async Task<IReadOnlyDictionary<string, DepotSettings>> LoadSettings(CancellationToken cancel)
    {
        await using var connection = await source.OpenConnectionAsync(cancel);
        var parameters = new { depot = (string?)null };
        var revisions = (await connection.QueryAsync<(string Depot, long Revision)>(Command(SettingsRevisionSql, parameters, cancel)))
            .ToDictionary(r => r.Depot, r => r.Revision);
        var rows = await connection.QueryAsync<FactText>(Command(SettingsSql, parameters, cancel));
        return rows.GroupBy(r => r.Depot)
            .Where(g => g.Any(r => r.Kind == FactKind.Depot))
            .ToDictionary(g => g.Key, g => VehicleAssembly.Settings(g.ToList(), revisions.GetValueOrDefault(g.Key)));
    }

    /// <summary>First instant after the day; the end of time where there is none.</summary>
    private static DateTime Before(DateOnly? asOf) =>
        asOf?.AddDays(1).ToDateTime(TimeOnly.MinValue, DateTimeKind.Utc) ?? DateTime.SpecifyKind(new DateTime(9999, 1, 1), DateTimeKind.Utc);

    private static CommandDefinition Command(string sql, object parameters, CancellationToken cancel) =>
        new(sql, parameters, commandTimeout: TimeoutSeconds, cancellationToken: cancel);
}

internal sealed record RevisionRow
{
    public required string VehicleId { get; init; }
    public required long Revision { get; init; }
    public DateTime? ChunksThrough { get; init; }
}

internal sealed record FactText
{
    public required string FactId { get; init; }
    public required string Depot { get; init; }
    public required string Kind { get; init; }
    public string? VehicleId { get; init; }
    public string? TractorId { get; init; }
    public string? TyreId { get; init; }
    public required DateTime At { get; init; }
    public required long Seq { get; init; }
    public required bool Held { get; init; }
    public required string Body { get; init; }

    public Dated<T> As<T>() => new(FactId, new DateTimeOffset(DateTime.SpecifyKind(At, DateTimeKind.Utc)), FactJson.Read<T>(Body));
}
