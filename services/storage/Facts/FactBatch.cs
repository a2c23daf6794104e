using Npgsql;
using NpgsqlTypes;

namespace WearWatch.Storage.Facts;

/// <summary>
/// One batch of facts in one transaction. Items are judged in order against <see cref="Context"/>, which sees the
/// earlier ones; <see cref="Commit"/> writes them all and raises the revision of every vehicle touched.
/// </summary>
public sealed class FactBatch : IAsyncDisposable
{
    private readonly NpgsqlConnection _connection;
    private readonly NpgsqlTransaction _transaction;
    private readonly List<(FactRow Row, bool Held, IReadOnlyList<Remark> Remarks)> _stored = [];
    private readonly List<(FactRow Row, IReadOnlyList<Remark> Remarks)> _setAside = [];
    private readonly SortedSet<string> _vehicles = new(StringComparer.Ordinal);
    private readonly SortedSet<string> _settings = new(StringComparer.Ordinal);
    private readonly SortedSet<string> _tyres = new(StringComparer.Ordinal);

    internal FactBatch(NpgsqlConnection connection, NpgsqlTransaction transaction, FactContext context) =>
        (_connection, _transaction, Context) = (connection, transaction, context);

    public FactContext Context { get; }

    /// <summary>Takes the fact in, held for review or not.</summary>
    public void Store(FactRow row, bool held, IReadOnlyList<Remark> remarks)
    {
        var key = new FactKey(row.Depot, row.Id);
        _stored.Add((row, held, remarks));
        Touch(row);
        Context.Remember(new KnownFact
        {
            Depot = row.Depot,
            Id = row.Id,
            Kind = row.Kind,
            VehicleId = row.VehicleId,
            TractorId = row.TractorId,
            ContentHash = row.ContentHash,
            Held = held,
            Remarks = remarks,
        });
        if (row.Replaces is { } replaced && !held) Context.Drop(row.Key(replaced));
        if (row.Retracts is { } retracted) Context.Drop(row.Key(retracted));
        if (row.Releases is { } released) Context.Release(row.Key(released));
        Context.Take(key, row.At, row.Body!, held);
    }

    /// <summary>Keeps a refused fact with its reasons; the same content once.</summary>
    public void SetAside(FactRow row, IReadOnlyList<Remark> remarks) => _setAside.Add((row, remarks));

    public async Task Commit(CancellationToken cancel)
    {
        if (_stored.Count > 0)
        {
            await RecordVehicles(cancel);
            await Insert(await RaiseVehicles(cancel), await RaiseSettings(cancel), cancel);
            await Settle(cancel);
        }
        if (_setAside.Count > 0) await InsertSetAside(cancel);
        await _transaction.CommitAsync(cancel);
    }

    public async ValueTask DisposeAsync()
    {
        await _transaction.DisposeAsync();
        await _connection.DisposeAsync();
    }

    /// <summary>What must be analysed anew: the fact's own vehicle, and that of the fact it corrects or withdraws.</summary>
    private void Touch(FactRow row)
    {
        var target = row.Replaces ?? row.Retracts ?? row.Releases;
        var earlier = target is null ? null : Context.Known(row.Key(target));
        string?[] vehicles = [row.VehicleId, row.TractorId, earlier?.VehicleId, earlier?.TractorId];
        foreach (var vehicle in vehicles.OfType<string>()) _vehicles.Add(vehicle);
        if (row.Kind == FactKind.Tyre) _tyres.Add(row.TyreId!);
        if (vehicles.All(v => v is null) || row.Kind == FactKind.Decision) _settings.Add(row.Depot);
    }

    private const string VehicleSql = """
        INSERT INTO ingest.vehicle (depot, vehicle_id, revision)
        SELECT depot, vehicle_id, 0 FROM unnest(@depots, @vehicles) AS v(depot, vehicle_id) ORDER BY vehicle_id
        ON CONFLICT (vehicle_id) DO UPDATE SET depot = excluded.depot
        """;

    private async Task RecordVehicles(CancellationToken cancel)
    {
        var homes = _stored.Where(s => s.Row.Kind == FactKind.Vehicle && !s.Held).GroupBy(s => s.Row.VehicleId!).Select(g => g.Last().Row).ToList();
        if (homes.Count == 0) return;
        await using var command = Command(VehicleSql);
        command.Parameters.AddWithValue("depots", homes.Select(h => h.Depot).ToArray());
        command.Parameters.AddWithValue("vehicles", homes.Select(h => h.VehicleId!).ToArray());
        await command.ExecuteNonQueryAsync(cancel);
    }

    private const string RaiseSql = """
        WITH touched AS (
          SELECT unnest(@vehicles) AS vehicle_id
          UNION
          SELECT f.vehicle_id FROM ingest.fact f WHERE f.tyre_id = ANY(@tyres) AND f.kind = 'fitting')
        UPDATE ingest.vehicle v SET revision = v.revision + 1
        FROM touched t WHERE v.vehicle_id = t.vehicle_id
        RETURNING v.vehicle_id, v.revision
        """;

    private async Task<Dictionary<string, long>> RaiseVehicles(CancellationToken cancel)
    {
        await using var command = Command(RaiseSql);
        command.Parameters.AddWithValue("vehicles", _vehicles.ToArray());
        command.Parameters.AddWithValue("tyres", _tyres.ToArray());
        return await Revisions(command, cancel);
    }

    private const string RaiseSettingsSql = """
        INSERT INTO ingest.settings_revision (depot, revision)
        SELECT depot, 1 FROM unnest(@depots) AS depot ORDER BY depot
        ON CONFLICT (depot) DO UPDATE SET revision = ingest.settings_revision.revision + 1
        RETURNING depot, revision
        """;

    private async Task<Dictionary<string, long>> RaiseSettings(CancellationToken cancel)
    {
        if (_settings.Count == 0) return [];
        await using var command = Command(RaiseSettingsSql);
        command.Parameters.AddWithValue("depots", _settings.ToArray());
        return await Revisions(command, cancel);
    }

    private static async Task<Dictionary<string, long>> Revisions(NpgsqlCommand command, CancellationToken cancel)
    {
        var revisions = new Dictionary<string, long>();
        await using var reader = await command.ExecuteReaderAsync(cancel);
        while (await reader.ReadAsync(cancel)) revisions[reader.GetString(0)] = reader.GetInt64(1);
        return revisions;
    }

    private const string InsertSql = """
        INSERT INTO ingest.fact (depot, id, kind, vehicle_id, tractor_id, tyre_id, at, content_hash, outcome, remarks, body, sent,
          readings, replaces, retracts, releases, recorded_by, revision)
        VALUES (@depot, @id, @kind, @vehicle, @tractor, @tyre, @at, @hash, @outcome, @remarks, @body, @sent,
          @readings, @replaces, @retracts, @releases, @by, @revision)
        """;

    private async Task Insert(Dictionary<string, long> vehicles, Dictionary<string, long> settings, CancellationToken cancel)
    {
        await using var batch = new NpgsqlBatch(_connection, _transaction) { Timeout = IngestFacts.TimeoutSeconds };
        foreach (var (row, held, remarks) in _stored)
        {
            var revision = row.VehicleId is { } v ? vehicles.GetValueOrDefault(v) : settings.GetValueOrDefault(row.Depot);
            batch.BatchCommands.Add(new NpgsqlBatchCommand(InsertSql)
            {
                Parameters =
                {
                    new("depot", row.Depot), new("id", row.Id), new("kind", row.Kind), Text("vehicle", row.VehicleId), Text("tractor", row.TractorId),
                    Text("tyre", row.TyreId), new("at", row.At.UtcDateTime), new("hash", row.ContentHash), new("outcome", held ? "held" : "stored"),
                    Json("remarks", FactJson.Write(remarks)), Json("body", FactJson.Write(row.Body)), new("sent", row.Sent), new("readings", row.Readings),
                    Text("replaces", row.Replaces), Text("retracts", row.Retracts), Text("releases", row.Releases), new("by", row.RecordedBy),
                    new("revision", revision),
                },
            });
        }
        await batch.ExecuteNonQueryAsync(cancel);
    }

    // An id that was refused before is settled when it comes corrected, and when it is withdrawn. Served by the primary key.
    private const string SettleSql = """
        UPDATE ingest.set_aside s SET settled_at = now()
        FROM unnest(@depots, @ids) AS k(depot, id)
        WHERE s.depot = k.depot AND s.id = k.id AND s.settled_at IS NULL
        """;

    private async Task Settle(CancellationToken cancel)
    {
        await using var command = Command(SettleSql);
        var settled = _stored.SelectMany(s => new[] { s.Row.Id, s.Row.Retracts }.OfType<string>().Select(s.Row.Key)).ToList();
        command.Parameters.AddWithValue("depots", settled.Select(k => k.Depot).ToArray());
        command.Parameters.AddWithValue("ids", settled.Select(k => k.Id).ToArray());
        await command.ExecuteNonQueryAsync(cancel);
    }

    internal const string SetAsideSql = """
        INSERT INTO ingest.set_aside (depot, id, kind, vehicle_id, content_hash, remarks, sent, recorded_by)
        VALUES (@depot, @id, @kind, @vehicle, @hash, @remarks, @sent, @by)
        ON CONFLICT (depot, id, content_hash) DO NOTHING
        """;

    private async Task InsertSetAside(CancellationToken cancel)
    {
        await using var batch = new NpgsqlBatch(_connection, _transaction) { Timeout = IngestFacts.TimeoutSeconds };
        foreach (var (row, remarks) in _setAside)
            batch.BatchCommands.Add(SetAsideCommand(row.Depot, row.Id, row.Kind, row.VehicleId, row.ContentHash, remarks, row.Sent, row.RecordedBy));
        await batch.ExecuteNonQueryAsync(cancel);
    }

    internal static NpgsqlBatchCommand SetAsideCommand(
        string depot, string id, string kind, string? vehicle, byte[] hash, IReadOnlyList<Remark> remarks, byte[] sent, string by) => new(SetAsideSql)
        {
            Parameters =
            {
                new("depot", depot), new("id", id), new("kind", kind), new("vehicle", vehicle ?? ""), new("hash", hash),
                Json("remarks", FactJson.Write(remarks)), new("sent", sent), new("by", by),
            },
        };

    private NpgsqlCommand Command(string sql) => new(sql, _connection, _transaction) { CommandTimeout = IngestFacts.TimeoutSeconds };

    private static NpgsqlParameter Text(string name, string? value) => new(name, NpgsqlDbType.Text) { Value = (object?)value ?? DBNull.Value };

    private static NpgsqlParameter Json(string name, string value) => new(name, NpgsqlDbType.Jsonb) { Value = value };
}

/// <summary>Keys of facts that a fact names.</summary>
public static class FactRows
{
    /// <summary>Key of another fact of the same depot.</summary>
    public static FactKey Key(this FactRow row, string id) => new(row.Depot, id);
}
