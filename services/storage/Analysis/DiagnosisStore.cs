using Dapper;
using Npgsql;

namespace WearWatch.Storage.Analysis;

/// <summary>A vehicle claimed for analysis; its row stays locked until the claim's transaction ends.</summary>
public sealed record DueVehicle
{
    public required string Depot { get; init; }
    public required string VehicleId { get; init; }
    public required long Revision { get; init; }
    public required long SettingsRevision { get; init; }
}

/// <summary>A diagnosis ready to be published; bodies are the contract's messages as JSON.</summary>
public sealed record DiagnosisToPublish
{
    public required DueVehicle Due { get; init; }
    public required string VehicleClass { get; init; }
    public required long FleetFit { get; init; }
    public required string Method { get; init; }
    public required string AsOf { get; init; }
    public required double MisalignedProbability { get; init; }
    public required string Body { get; init; }
    public required IReadOnlyList<FindingToPublish> Findings { get; init; }
    public required IReadOnlyList<UnsafeTyreToPublish> UnsafeTyres { get; init; }
}

public sealed record FindingToPublish
{
    public required string FindingId { get; init; }
    public required string Kind { get; init; }
    /// <summary>Axle, side and dual as text: what makes it the same finding next time.</summary>
    public required string Place { get; init; }
    public required bool AlignmentMends { get; init; }
    public required bool Safety { get; init; }
    public required double Strength { get; init; }
    public required string Body { get; init; }
    public required string Because { get; init; }
}

public sealed record UnsafeTyreToPublish
{
    public required string Position { get; init; }
    public double? DepthMm { get; init; }
    public double? LimitMm { get; init; }
    public required string LimitSource { get; init; }
    public required string SurveyId { get; init; }
    public required DateTime MeasuredAt { get; init; }
    public required bool Held { get; init; }
    public required string Sentence { get; init; }
}

public sealed record OpenFindingKey
{
    public required string FindingId { get; init; }
    public required string Kind { get; init; }
    public required string Place { get; init; }
    public required DateTime OpenedAt { get; init; }
    public required string OpenedBecause { get; init; }
}

/// <summary>Claims due vehicles and publishes their diagnoses, each claim in one transaction.</summary>
public sealed class DiagnosisStore(NpgsqlDataSource analysis)
{
    internal const int TimeoutSeconds = 60;

    private const string RowsSql = """
        INSERT INTO analysis.progress (depot, vehicle_id)
        SELECT v.depot, v.vehicle_id FROM ingest.vehicle v
        WHERE NOT EXISTS (SELECT FROM analysis.progress p WHERE p.depot = v.depot AND p.vehicle_id = v.vehicle_id)
        ON CONFLICT DO NOTHING
        """;

    private const string DueCondition = """
        v.revision > p.done_revision OR coalesce(s.revision, 0) > p.done_settings OR p.done_fit < @fit OR p.done_method <> @method
        """;

    private const string ClaimSql = $"""
        SELECT p.depot, p.vehicle_id, v.revision, coalesce(s.revision, 0) AS settings_revision
        FROM analysis.progress p
        JOIN ingest.vehicle v USING (depot, vehicle_id)
        LEFT JOIN ingest.settings_revision s ON s.depot = p.depot
        WHERE {DueCondition}
        ORDER BY p.depot, p.vehicle_id
        LIMIT @most
        FOR UPDATE OF p SKIP LOCKED
        """;

    /// <summary>Claims up to so many due vehicles. Nothing is due before there is a fleet fit.</summary>
    public async Task<DiagnosisClaim> Claim(long fit, string method, int most, CancellationToken cancel)
    {
        var connection = await analysis.OpenConnectionAsync(cancel);
        try
        {
            await connection.ExecuteAsync(Command(RowsSql, null, null, cancel));
            var transaction = await connection.BeginTransactionAsync(cancel);
            var due = (await connection.QueryAsync<DueVehicle>(Command(ClaimSql, new { fit, method, most }, transaction, cancel))).AsList();
            return new DiagnosisClaim(connection, transaction, due);
        }
        catch
        {
            await connection.DisposeAsync();
            throw;
        }
    }

    private const string FailureSql = """
        UPDATE analysis.progress
        SET done_revision = @revision, done_settings = @settings, done_fit = @fit, done_method = @method, failure = @failure
        WHERE depot = @depot AND vehicle_id = @vehicle
        """;

    /// <summary>Notes that a vehicle could not be analysed at this revision; it is tried again when something changes.</summary>
    public async Task Failed(DueVehicle due, long fit, string method, string failure, CancellationToken cancel)
    {
        await using var connection = await analysis.OpenConnectionAsync(cancel);
        await connection.ExecuteAsync(Command(FailureSql, new { revision = due.Revision, settings = due.SettingsRevision, fit, method, failure, depot = due.Depot, vehicle = due.VehicleId }, null, cancel));
    }

    private const string StatusSql = $"""
        SELECT
          (SELECT count(*) FROM ingest.vehicle v
            LEFT JOIN analysis.progress p USING (depot, vehicle_id)
            LEFT JOIN ingest.settings_revision s ON s.depot = v.depot
            WHERE p.vehicle_id IS NULL OR {DueCondition}) AS due,
          (SELECT count(*) FROM analysis.diagnosis) AS analysed,
          (SELECT count(*) FROM analysis.finding WHERE closed_at IS NULL) AS open_findings,
          (SELECT count(*) FROM analysis.progress WHERE failure IS NOT NULL) AS failed,
          (SELECT coalesce(sum(st.chunks - coalesce(r.chunks, 0)), 0) FROM ingest.stream st
            LEFT JOIN analysis.reduction r USING (depot, stream_id)) AS chunks_to_reduce
        """;

    public async Task<AnalysisCounts> Counts(long fit, string method, CancellationToken cancel)
    {
        await using var connection = await analysis.OpenConnectionAsync(cancel);
        return await connection.QuerySingleAsync<AnalysisCounts>(Command(StatusSql, new { fit, method }, null, cancel));
    }

    private const string BodySql = "SELECT body::text FROM analysis.diagnosis WHERE vehicle_id = @vehicleId";

    public async Task<string?> Body(string vehicleId, CancellationToken cancel)
    {
        await using var connection = await analysis.OpenConnectionAsync(cancel);
        return await connection.ExecuteScalarAsync<string?>(Command(BodySql, new { vehicleId }, null, cancel));
    }

    // Served by finding_listed.
    private const string FindingsSql = """
        SELECT body::text FROM analysis.finding
        WHERE closed_at IS NULL AND (@depot = '' OR depot = @depot) AND (cardinality(@kinds) = 0 OR kind = ANY(@kinds))
        ORDER BY safety DESC, strength DESC, finding_id
        OFFSET @offset LIMIT @size
        """;

    /// <summary>Open findings, safety first, then by strength.</summary>
    public async Task<IReadOnlyList<string>> Findings(string depot, string[] kinds, int offset, int size, CancellationToken cancel)
    {
        await using var connection = await analysis.OpenConnectionAsync(cancel);
        return (await connection.QueryAsync<string>(Command(FindingsSql, new { depot, kinds, offset, size }, null, cancel))).AsList();
    }

    internal static CommandDefinition Command(string sql, object? parameters, NpgsqlTransaction? transaction, CancellationToken cancel) =>
        new(sql, parameters, transaction, TimeoutSeconds, cancellationToken: cancel);
}

public sealed record AnalysisCounts
{
    public required long Due { get; init; }
    public required long Analysed { get; init; }
    public required long OpenFindings { get; init; }
    public required long Failed { get; init; }
    public required decimal ChunksToReduce { get; init; }
}
