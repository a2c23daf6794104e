using System.Globalization;
using Dapper;
using Npgsql;

namespace WearWatch.Storage.Report;

/// <summary>What the worklist is made from: one published diagnosis, its body the contract's JSON.</summary>
public sealed record PublishedDiagnosis
{
    public required string Depot { get; init; }
    public required string VehicleId { get; init; }
    public required string Body { get; init; }
}

/// <summary>A row of a worklist as it was shown.</summary>
public sealed record WorklistEntry
{
    public required int Rank { get; init; }
    public required string Depot { get; init; }
    public required string VehicleId { get; init; }
    public required string ListedBecause { get; init; }
    public required string Body { get; init; }
}

public sealed record WorklistHead
{
    public required long WorklistId { get; init; }
    public required DateTime AsOf { get; init; }
    public required long Total { get; init; }
    public required string Mark { get; init; }
}

public sealed record UnsafeTyreRow
{
    public required string Depot { get; init; }
    public required string VehicleId { get; init; }
    public required string Position { get; init; }
    public double? DepthMm { get; init; }
    public double? LimitMm { get; init; }
    public required string LimitSource { get; init; }
    public required string SurveyId { get; init; }
    public required DateTime MeasuredAt { get; init; }
    public required bool Held { get; init; }
    public required string Sentence { get; init; }
    public string? ShownTo { get; init; }
}

public sealed record OpenFinding
{
    public required string Depot { get; init; }
    public required string VehicleId { get; init; }
    public required string FindingId { get; init; }
    public required string Body { get; init; }
}

/// <summary>Queries of the report service: it reads what analysis published and keeps the worklists it showed.</summary>
public sealed class WorklistStore(NpgsqlDataSource report)
{
    // A short text that changes whenever a diagnosis does (a decision makes its vehicles due, so it does too). The sum of
    // the times and not the newest: of two workers the one that began earlier may commit later.
    private const string MarkSql = """
        SELECT coalesce(sum(extract(epoch FROM made_at)), 0)::text || ' ' || count(*) FROM analysis.diagnosis
        WHERE @depot = '' OR depot = @depot
        """;

    public async Task<string> Mark(string depot, CancellationToken cancel)
    {
        await using var connection = await report.OpenConnectionAsync(cancel);
        return await connection.ExecuteScalarAsync<string>(new CommandDefinition(MarkSql, new { depot }, cancellationToken: cancel)) ?? "";
    }

    private const string DiagnosesSql = """
        SELECT depot, vehicle_id, body::text AS body FROM analysis.diagnosis
        WHERE @depot = '' OR depot = @depot
        ORDER BY depot, vehicle_id
        """;

    public async Task<IReadOnlyList<PublishedDiagnosis>> Diagnoses(string depot, CancellationToken cancel)
    {
        await using var connection = await report.OpenConnectionAsync(cancel);
        return (await connection.QueryAsync<PublishedDiagnosis>(new CommandDefinition(DiagnosesSql, new { depot }, cancellationToken: cancel))).AsList();
    }

    private const string DiagnosisSql = "SELECT body::text FROM analysis.diagnosis WHERE vehicle_id = @vehicleId";

    public async Task<string?> Diagnosis(string vehicleId, CancellationToken cancel)
    {
        await using var connection = await report.OpenConnectionAsync(cancel);
        return await connection.ExecuteScalarAsync<string?>(new CommandDefinition(DiagnosisSql, new { vehicleId }, cancellationToken: cancel));
    }

    private const string LatestSql = """
        SELECT w.worklist_id, w.as_of, w.mark, (SELECT count(*) FROM report.worklist_row r WHERE r.worklist_id = w.worklist_id) AS total
        FROM report.worklist w
        WHERE w.depot = @depot AND w.sort = @sort
        ORDER BY w.worklist_id DESC LIMIT 1
        """;

    /// <summary>The newest worklist kept for a depot ('' for all) and a sorting.</summary>
    public async Task<WorklistHead?> Latest(string depot, string sort, CancellationToken cancel)
    {
        await using var connection = await report.OpenConnectionAsync(cancel);
        return await connection.QuerySingleOrDefaultAsync<WorklistHead>(new CommandDefinition(LatestSql, new { depot, sort }, cancellationToken: cancel));
    }

    private const string InsertSql = """
        INSERT INTO report.worklist (depot, sort, as_of, mark) VALUES (@depot, @sort, @asOf::date, @mark) RETURNING worklist_id
        """;

    public async Task<WorklistHead> Keep(string depot, string sort, DateOnly asOf, string mark, IReadOnlyList<WorklistEntry> rows, CancellationToken cancel)
    {
        await using var connection = await report.OpenConnectionAsync(cancel);
        await using var transaction = await connection.BeginTransactionAsync(cancel);
        var id = await connection.ExecuteScalarAsync<long>(new CommandDefinition(InsertSql, new { depot, sort, asOf = asOf.ToString("yyyy-MM-dd", CultureInfo.InvariantCulture), mark }, transaction, cancellationToken: cancel));
        await using (var copy = await connection.BeginBinaryImportAsync("copy report.worklist_row (worklist_id, rank, depot, vehicle_id, listed_because, body) from stdin (format binary)", cancel))
        {
            foreach (var row in rows)
            {
                await copy.StartRowAsync(cancel);
                await copy.WriteAsync(id, cancel);
                await copy.WriteAsync(row.Rank, cancel);
                await copy.WriteAsync(row.Depot, cancel);
                await copy.WriteAsync(row.VehicleId, cancel);
                await copy.WriteAsync(row.ListedBecause, cancel);
                await copy.WriteAsync(row.Body, NpgsqlTypes.NpgsqlDbType.Jsonb, cancel);
            }
            await copy.CompleteAsync(cancel);
        }
        await transaction.CommitAsync(cancel);
        return new WorklistHead { WorklistId = id, AsOf = asOf.ToDateTime(TimeOnly.MinValue), Total = rows.Count, Mark = mark };
    }

    private const string RowsSql = """
        SELECT rank, depot, vehicle_id, listed_because, body::text AS body FROM report.worklist_row
        WHERE worklist_id = @worklistId AND rank > @after
        ORDER BY rank LIMIT @size
        """;

    /// <summary>A page of a kept worklist; served by the primary key.</summary>
    public async Task<IReadOnlyList<WorklistEntry>> Rows(long worklistId, int after, int size, CancellationToken cancel)
    {
        await using var connection = await report.OpenConnectionAsync(cancel);
        return (await connection.QueryAsync<WorklistEntry>(new CommandDefinition(RowsSql, new { worklistId, after, size }, cancellationToken: cancel))).AsList();
    }

    private const string HeadSql = """
        SELECT w.worklist_id, w.as_of, w.mark, (SELECT count(*) FROM report.worklist_row r WHERE r.worklist_id = w.worklist_id) AS total
        FROM report.worklist w WHERE w.worklist_id = @worklistId
        """;

    public async Task<WorklistHead?> Head(long worklistId, CancellationToken cancel)
    {
        await using var connection = await report.OpenConnectionAsync(cancel);
        return await connection.QuerySingleOrDefaultAsync<WorklistHead>(new CommandDefinition(HeadSql, new { worklistId }, cancellationToken: cancel));
    }

    // Who was told of a tyre is a decision about its survey (kind ShownTo).
    private const string UnsafeSql = """
        SELECT u.depot, u.vehicle_id, u.position, u.depth_mm, u.limit_mm, u.limit_source, u.survey_id, u.measured_at, u.held, u.sentence,
               (SELECT string_agg(coalesce(d.body->>'who', 'somebody') || ', ' || to_char(d.at AT TIME ZONE 'UTC', 'YYYY-MM-DD HH24:MI'), '; ' ORDER BY d.at)
                FROM ingest.current_fact d
                WHERE d.kind = 'decision' AND d.body->>'kind' = 'shown_to' AND d.body->>'about' = u.survey_id) AS shown_to
        FROM analysis.unsafe_tyre u
        WHERE (@depot = '' OR u.depot = @depot) AND (@vehicleId = '' OR u.vehicle_id = @vehicleId)
        ORDER BY u.depot, u.vehicle_id, u.position
        """;

    public async Task<IReadOnlyList<UnsafeTyreRow>> UnsafeTyres(string depot, string vehicleId, CancellationToken cancel)
    {
        await using var connection = await report.OpenConnectionAsync(cancel);
        return (await connection.QueryAsync<UnsafeTyreRow>(new CommandDefinition(UnsafeSql, new { depot, vehicleId }, cancellationToken: cancel))).AsList();
    }

    // Served by finding_listed.
    private const string OtherSql = """
        SELECT depot, vehicle_id, finding_id, body::text AS body FROM analysis.finding
        WHERE closed_at IS NULL AND NOT alignment_mends AND NOT safety AND (@depot = '' OR depot = @depot)
        ORDER BY strength DESC, finding_id LIMIT 500
        """;

    /// <summary>Open findings that an alignment does not mend, strongest first, at most 500.</summary>
    public async Task<IReadOnlyList<OpenFinding>> OtherMatters(string depot, CancellationToken cancel)
    {
        await using var connection = await report.OpenConnectionAsync(cancel);
        return (await connection.QueryAsync<OpenFinding>(new CommandDefinition(OtherSql, new { depot }, cancellationToken: cancel))).AsList();
    }

    private const string SnoozedSql = """
        SELECT DISTINCT body->>'vehicle_id' FROM ingest.current_fact
        WHERE kind = 'decision' AND body->>'kind' IN ('snoozed', 'dismissed') AND (body->>'until' IS NULL OR (body->>'until')::date > @asOf::date)
          AND body->>'vehicle_id' IS NOT NULL AND body->>'about' IS NULL
        """;

    /// <summary>Vehicles a planner set aside beyond the as-of date.</summary>
    public async Task<IReadOnlySet<string>> Snoozed(DateOnly asOf, CancellationToken cancel)
    {
        await using var connection = await report.OpenConnectionAsync(cancel);
        return (await connection.QueryAsync<string>(new CommandDefinition(SnoozedSql, new { asOf = asOf.ToString("yyyy-MM-dd", CultureInfo.InvariantCulture) }, cancellationToken: cancel))).ToHashSet();
    }

    private const string SettingSql = """
        SELECT DISTINCT ON (depot) depot, (body->>'value')::double precision AS value FROM ingest.current_fact
        WHERE kind = 'setting' AND body->>'name' = @name AND body->>'class' IS NULL AND (body->>'from')::date <= @asOf::date
        ORDER BY depot, body->>'from' DESC
        """;

    /// <summary>An operator's setting by depot, the newest not in the future.</summary>
    public async Task<IReadOnlyDictionary<string, double>> Setting(string name, DateOnly asOf, CancellationToken cancel)
    {
        await using var connection = await report.OpenConnectionAsync(cancel);
        var rows = await connection.QueryAsync<(string Depot, double Value)>(new CommandDefinition(SettingSql, new { name, asOf = asOf.ToString("yyyy-MM-dd", CultureInfo.InvariantCulture) }, cancellationToken: cancel));
        return rows.ToDictionary(r => r.Depot, r => r.Value);
    }
}
