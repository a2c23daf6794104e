using Dapper;
using Npgsql;

namespace WearWatch.Storage.Analysis;

/// <summary>A fleet-wide snapshot as stored; immutable.</summary>
public sealed record StoredFleetFit
{
    public required long FleetFit { get; init; }
    public required DateTime MadeAt { get; init; }
    public required string FactsMark { get; init; }
    public required string Method { get; init; }
}

/// <summary>Fleet-wide snapshots: one worker makes one at a time.</summary>
public sealed class FleetFitStore(NpgsqlDataSource analysis)
{
    private const int TimeoutSeconds = 120;

    private const string MarkSql = """
        SELECT (SELECT coalesce(sum(revision), 0) || '/' || count(*) FROM ingest.vehicle) || ' '
            || (SELECT coalesce(sum(revision), 0) FROM ingest.settings_revision) || ' '
            || (SELECT coalesce(sum(chunks), 0) FROM analysis.reduction)
        """;

    /// <summary>A short text that changes with every fact and every reduced chunk.</summary>
    public async Task<string> FactsMark(CancellationToken cancel)
    {
        await using var connection = await analysis.OpenConnectionAsync(cancel);
        return (await connection.ExecuteScalarAsync<string>(Command(MarkSql, null, null, cancel)))!;
    }

    private const string LatestSql = "SELECT fleet_fit, made_at, facts_mark, method FROM analysis.fleet_fit ORDER BY fleet_fit DESC LIMIT 1";

    public async Task<StoredFleetFit?> Latest(CancellationToken cancel)
    {
        await using var connection = await analysis.OpenConnectionAsync(cancel);
        return await connection.QuerySingleOrDefaultAsync<StoredFleetFit>(Command(LatestSql, null, null, cancel));
    }

    private const string BodySql = "SELECT body::text FROM analysis.fleet_fit WHERE fleet_fit = @id";

    public async Task<string> Body(long id, CancellationToken cancel)
    {
        await using var connection = await analysis.OpenConnectionAsync(cancel);
        return (await connection.ExecuteScalarAsync<string>(Command(BodySql, new { id }, null, cancel)))!;
    }

    private const string LockSql = "SELECT pg_try_advisory_xact_lock(hashtextextended('fleet fit', 0))";

    private const string InsertSql = """
        INSERT INTO analysis.fleet_fit (as_of, facts_mark, method, vehicles, runs, body)
        VALUES (@asOf::date, @mark, @method, @vehicles, @runs, @body::jsonb)
        RETURNING fleet_fit
        """;

    // Older snapshots than the last twenty are no longer anyone's.
    private const string PruneSql = """
        DELETE FROM analysis.fleet_fit f
        WHERE f.fleet_fit < @id - 20 AND NOT EXISTS (SELECT FROM analysis.diagnosis d WHERE d.fleet_fit = f.fleet_fit)
        """;

    /// <summary>Makes and stores a snapshot; null when another worker is at it.</summary>
    public async Task<long?> Make(string method, Func<Task<(string AsOf, string Mark, int Vehicles, int Runs, string Body)>> fit, CancellationToken cancel)
    {
        await using var connection = await analysis.OpenConnectionAsync(cancel);
        await using var transaction = await connection.BeginTransactionAsync(cancel);
        if (!await connection.ExecuteScalarAsync<bool>(Command(LockSql, null, transaction, cancel))) return null;
        var made = await fit();
        var id = await connection.ExecuteScalarAsync<long>(Command(InsertSql, new { asOf = made.AsOf, mark = made.Mark, method, vehicles = made.Vehicles, runs = made.Runs, body = made.Body }, transaction, cancel));
        await connection.ExecuteAsync(Command(PruneSql, new { id }, transaction, cancel));
        await transaction.CommitAsync(cancel);
        return id;
    }

    private static CommandDefinition Command(string sql, object? parameters, NpgsqlTransaction? transaction, CancellationToken cancel) =>
        new(sql, parameters, transaction, TimeoutSeconds, cancellationToken: cancel);
}
