using Dapper;
using Npgsql;

namespace WearWatch.Storage.Streams;

/// <summary>A steering stream as it was begun.</summary>
public sealed record StreamRow
{
    public required string Depot { get; init; }
    public required string StreamId { get; init; }
    public required string VehicleId { get; init; }
    public required double RateHz { get; init; }
    /// <summary>The header as sent.</summary>
    public required byte[] Header { get; init; }
    public required byte[] HeaderHash { get; init; }
}

public enum StreamBegun { New, Resumed, OtherHeader }

/// <summary>Steering streams: begun once, resumed with the same header.</summary>
public sealed class StreamStore(NpgsqlDataSource source)
{
    private const int TimeoutSeconds = 30;

    private const string BeginSql = """
        INSERT INTO ingest.stream (depot, stream_id, vehicle_id, rate_hz, header, header_hash)
        VALUES (@Depot, @StreamId, @VehicleId, @RateHz, @Header, @HeaderHash)
        ON CONFLICT (depot, stream_id) DO NOTHING
        """;

    // Served by the primary key.
    private const string HashSql = "SELECT header_hash FROM ingest.stream WHERE depot = @Depot AND stream_id = @StreamId";

    public async Task<StreamBegun> Begin(StreamRow stream, CancellationToken cancel)
    {
        await using var connection = await source.OpenConnectionAsync(cancel);
        if (await connection.ExecuteAsync(Command(BeginSql, stream, cancel)) == 1) return StreamBegun.New;
        var stored = await connection.QuerySingleAsync<byte[]>(Command(HashSql, stream, cancel));
        return stored.AsSpan().SequenceEqual(stream.HeaderHash) ? StreamBegun.Resumed : StreamBegun.OtherHeader;
    }

    // Served by fact_vehicle.
    private const string VehicleSql = "SELECT EXISTS (SELECT FROM ingest.current_fact WHERE vehicle_id = @vehicleId AND kind = 'vehicle')";

    public async Task<bool> VehicleIsKnown(string vehicleId, CancellationToken cancel)
    {
        await using var connection = await source.OpenConnectionAsync(cancel);
        return await connection.QuerySingleAsync<bool>(Command(VehicleSql, new { vehicleId }, cancel));
    }

    private const string ProgressSql = "SELECT committed_through FROM ingest.stream WHERE depot = @depot AND stream_id = @streamId";

    /// <summary>Highest sequence up to which every chunk is committed; null where the stream was never begun.</summary>
    public async Task<long?> Progress(string depot, string streamId, CancellationToken cancel)
    {
        await using var connection = await source.OpenConnectionAsync(cancel);
        return await connection.QuerySingleOrDefaultAsync<long?>(Command(ProgressSql, new { depot, streamId }, cancel));
    }

    private static CommandDefinition Command(string sql, object parameters, CancellationToken cancel) =>
        new(sql, parameters, commandTimeout: TimeoutSeconds, cancellationToken: cancel);
}
