using System.Runtime.CompilerServices;
using Npgsql;

namespace WearWatch.Storage.Streams;

/// <summary>One stored chunk, its columns still encoded.</summary>
public sealed record StoredChunk
{
    public required string Depot { get; init; }
    public required string StreamId { get; init; }
    public required long Sequence { get; init; }
    public required string VehicleId { get; init; }
    public required DateTimeOffset StartAt { get; init; }
    public required DateTimeOffset EndAt { get; init; }
    public required double RateHz { get; init; }
    public required int Samples { get; init; }
    /// <summary>Revision of the vehicle when it was committed.</summary>
    public required long Revision { get; init; }
    /// <summary>As the chunk codec wrote it.</summary>
    public required byte[] Columns { get; init; }
}

/// <summary>Streams stored chunks, one in memory at a time.</summary>
public sealed class ChunkReader(NpgsqlDataSource source)
{
    private const int TimeoutSeconds = 300;

    // Served by chunk_vehicle.
    private const string VehicleSql = """
        SELECT depot, stream_id, sequence, vehicle_id, start_at, end_at, rate_hz, samples, revision, columns
        FROM ingest.chunk
        WHERE vehicle_id = @vehicle AND revision > @after
        ORDER BY revision, start_at, stream_id, sequence
        """;

    /// <summary>Chunks of a vehicle committed after one of its revisions (0 for all), in order of commit.</summary>
    public IAsyncEnumerable<StoredChunk> OfVehicle(string vehicleId, long afterRevision, CancellationToken cancel) =>
        Read(VehicleSql, [new("vehicle", vehicleId), new("after", afterRevision)], cancel);

    // Served by the primary key.
    private const string StreamSql = """
        SELECT depot, stream_id, sequence, vehicle_id, start_at, end_at, rate_hz, samples, revision, columns
        FROM ingest.chunk
        WHERE depot = @depot AND stream_id = @stream AND sequence > @after
        ORDER BY sequence
        """;

    /// <summary>Chunks of a stream after a sequence (0 for all), in order.</summary>
    public IAsyncEnumerable<StoredChunk> OfStream(string depot, string streamId, long afterSequence, CancellationToken cancel) =>
        Read(StreamSql, [new("depot", depot), new("stream", streamId), new("after", afterSequence)], cancel);

    private async IAsyncEnumerable<StoredChunk> Read(string sql, NpgsqlParameter[] parameters, [EnumeratorCancellation] CancellationToken cancel)
    {
        await using var command = source.CreateCommand(sql);
        command.CommandTimeout = TimeoutSeconds;
        command.Parameters.AddRange(parameters);
        await using var reader = await command.ExecuteReaderAsync(cancel);
        while (await reader.ReadAsync(cancel))
        {
            yield return new StoredChunk
            {
                Depot = reader.GetString(0),
                StreamId = reader.GetString(1),
                Sequence = reader.GetInt64(2),
                VehicleId = reader.GetString(3),
                StartAt = reader.GetFieldValue<DateTimeOffset>(4),
                EndAt = reader.GetFieldValue<DateTimeOffset>(5),
                RateHz = reader.GetDouble(6),
                Samples = reader.GetInt32(7),
                Revision = reader.GetInt64(8),
                Columns = reader.GetFieldValue<byte[]>(9),
            };
        }
    }
}
