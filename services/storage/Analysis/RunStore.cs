using Dapper;
using Npgsql;
using NpgsqlTypes;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Steering;

namespace WearWatch.Storage.Analysis;

/// <summary>A stream with chunks that are not reduced yet, or not by this method.</summary>
public sealed record StreamToReduce
{
    public required string Depot { get; init; }
    public required string StreamId { get; init; }
    public required string VehicleId { get; init; }
    public required long Chunks { get; init; }
}

/// <summary>Straight runs: written stream by stream, read for the whole fleet.</summary>
public sealed class RunStore(NpgsqlDataSource analysis)
{
    private const int TimeoutSeconds = 60;

    // A stream is reduced anew as a whole when chunks came to it, so that its runs never depend on when they came.
    private const string ToReduceSql = """
        SELECT s.depot, s.stream_id, s.vehicle_id, s.chunks
        FROM ingest.stream s
        LEFT JOIN analysis.reduction r USING (depot, stream_id)
        WHERE s.chunks > 0 AND (r.stream_id IS NULL OR r.chunks < s.chunks OR r.method <> @method)
        ORDER BY s.depot, s.stream_id
        LIMIT @most
        """;

    public async Task<IReadOnlyList<StreamToReduce>> ToReduce(string method, int most, CancellationToken cancel)
    {
        await using var connection = await analysis.OpenConnectionAsync(cancel);
        return (await connection.QueryAsync<StreamToReduce>(Command(ToReduceSql, new { method, most }, null, cancel))).AsList();
    }

    // The lock is held to the end of the transaction: another worker skips the stream meanwhile.
    private const string LockSql = "SELECT pg_try_advisory_xact_lock(hashtextextended('stream ' || @depot || ' ' || @stream, 0))";

    private const string DoneSql = """
        INSERT INTO analysis.reduction (depot, stream_id, vehicle_id, chunks, method, study)
        VALUES (@depot, @stream, @vehicle, @chunks, @method, @study::jsonb)
        ON CONFLICT (depot, stream_id) DO UPDATE SET chunks = excluded.chunks, method = excluded.method, study = excluded.study
        """;

    private const string DeleteSql = "DELETE FROM analysis.straight_run WHERE depot = @depot AND stream_id = @stream";

    private const string CopySql = """
        COPY analysis.straight_run (depot, stream_id, ordinal, vehicle_id, sequence, start_at, seconds, mode, speed_km_h,
          torque_nm, torque_se, with_assist, angle_deg, angle_se, bank, bank_se, yaw_rate, load_kg, road_cell)
        FROM STDIN (FORMAT BINARY)
        """;

    /// <summary>Replaces the runs of a stream in one transaction; false when another worker holds it.</summary>
    /// <param name="stream">The stream and how many of its chunks were read.</param>
    /// <param name="method">Version of the reduction.</param>
    /// <param name="reduce">Reads and reduces it, once the stream is ours.</param>
    /// <param name="cancel">Gives the stream back.</param>
    public async Task<bool> Replace(StreamToReduce stream, string method, Func<Task<StreamReduction>> reduce, CancellationToken cancel)
    {
        await using var connection = await analysis.OpenConnectionAsync(cancel);
        await using var transaction = await connection.BeginTransactionAsync(cancel);
        var key = new { depot = stream.Depot, stream = stream.StreamId };
        if (!await connection.ExecuteScalarAsync<bool>(Command(LockSql, key, transaction, cancel))) return false;
        var reduction = await reduce();
        await connection.ExecuteAsync(Command(DeleteSql, key, transaction, cancel));
        await Copy(connection, stream, reduction.Runs, cancel);
        await connection.ExecuteAsync(Command(DoneSql, new { key.depot, key.stream, vehicle = stream.VehicleId, chunks = stream.Chunks, method, study = FactJson.Write(reduction.Study) }, transaction, cancel));
        await transaction.CommitAsync(cancel);
        return true;
    }

    private static async Task Copy(NpgsqlConnection connection, StreamToReduce stream, IReadOnlyList<StraightRun> runs, CancellationToken cancel)
    {
        await using var copy = await connection.BeginBinaryImportAsync(CopySql, cancel);
        for (var i = 0; i < runs.Count; i++)
        {
            var run = runs[i];
            await copy.StartRowAsync(cancel);
            await copy.WriteAsync(stream.Depot, cancel);
            await copy.WriteAsync(stream.StreamId, cancel);
            await copy.WriteAsync(i, cancel);
            await copy.WriteAsync(stream.VehicleId, cancel);
            await copy.WriteAsync(run.Sequence, cancel);
            await copy.WriteAsync(run.Start.UtcDateTime, NpgsqlDbType.TimestampTz, cancel);
            await copy.WriteAsync(run.Seconds, cancel);
            await copy.WriteAsync(run.Mode.ToString(), cancel);
            await copy.WriteAsync(run.SpeedKmH, cancel);
            await Write(copy, run.TorqueNm?.Value, cancel);
            await Write(copy, run.TorqueNm?.StandardError, cancel);
            await copy.WriteAsync(run.TorqueIncludesAssist, cancel);
            await Write(copy, run.AngleDeg?.Value, cancel);
            await Write(copy, run.AngleDeg?.StandardError, cancel);
            await Write(copy, run.BankReading?.Value, cancel);
            await Write(copy, run.BankReading?.StandardError, cancel);
            await Write(copy, run.YawRateDegS, cancel);
            await Write(copy, run.LoadKg, cancel);
            if (run.RoadCell is null) await copy.WriteNullAsync(cancel);
            else await copy.WriteAsync(run.RoadCell, cancel);
        }
        await copy.CompleteAsync(cancel);
    }

    private static Task Write(NpgsqlBinaryImporter copy, double? value, CancellationToken cancel) =>
        value is { } known ? copy.WriteAsync(known, cancel) : copy.WriteNullAsync(cancel);

    private const string FleetSql = """
        SELECT vehicle_id, stream_id, sequence, start_at, seconds, mode, speed_km_h, torque_nm, torque_se, with_assist,
          angle_deg, angle_se, bank, bank_se, yaw_rate, load_kg, road_cell
        FROM analysis.straight_run
        WHERE start_at < @before
        ORDER BY vehicle_id, start_at, stream_id, ordinal
        """;

    /// <summary>Runs of every vehicle that began before a time, by vehicle and time.</summary>
    public async Task<IReadOnlyList<StraightRun>> Fleet(DateTime before, CancellationToken cancel)
    {
        await using var command = analysis.CreateCommand(FleetSql);
        command.CommandTimeout = TimeoutSeconds;
        command.Parameters.AddWithValue("before", before);
        await using var reader = await command.ExecuteReaderAsync(cancel);
        var runs = new List<StraightRun>();
        while (await reader.ReadAsync(cancel)) runs.Add(Read(reader));
        return runs;
    }

    // Served by straight_run_vehicle, once a depot.
    private const string SinceSql = """
        SELECT vehicle_id, stream_id, sequence, start_at, seconds, mode, speed_km_h, torque_nm, torque_se, with_assist,
          angle_deg, angle_se, bank, bank_se, yaw_rate, load_kg, road_cell
        FROM analysis.straight_run
        WHERE depot = ANY(@depots) AND vehicle_id = @vehicle AND start_at > @after
        ORDER BY start_at, stream_id, ordinal
        """;

    /// <summary>Runs of one vehicle that began after a time, in order of time.</summary>
    public async Task<IReadOnlyList<StraightRun>> Since(string vehicleId, string[] depots, DateTime after, CancellationToken cancel)
    {
        await using var command = analysis.CreateCommand(SinceSql);
        command.CommandTimeout = TimeoutSeconds;
        command.Parameters.AddWithValue("vehicle", vehicleId);
        command.Parameters.AddWithValue("depots", depots);
        command.Parameters.AddWithValue("after", after);
        await using var reader = await command.ExecuteReaderAsync(cancel);
        var runs = new List<StraightRun>();
        while (await reader.ReadAsync(cancel)) runs.Add(Read(reader));
        return runs;
    }

    private static StraightRun Read(NpgsqlDataReader row)
    {
        double? Number(int column) => row.IsDBNull(column) ? null : row.GetDouble(column);
        Estimate? Figure(int column) => row.IsDBNull(column) ? null : new Estimate(row.GetDouble(column), row.GetDouble(column + 1));
        return new StraightRun
        {
            VehicleId = row.GetString(0),
            StreamId = row.GetString(1),
            Sequence = row.GetInt64(2),
            Start = row.GetFieldValue<DateTimeOffset>(3),
            Seconds = row.GetDouble(4),
            Mode = Enum.Parse<RunMode>(row.GetString(5)),
            SpeedKmH = row.GetDouble(6),
            TorqueNm = Figure(7),
            TorqueIncludesAssist = row.GetBoolean(9),
            AngleDeg = Figure(10),
            BankReading = Figure(12),
            YawRateDegS = Number(14),
            LoadKg = Number(15),
            RoadCell = row.IsDBNull(16) ? null : row.GetString(16),
        };
    }

    private const string StudiesSql = "SELECT study::text FROM analysis.reduction WHERE study IS NOT NULL ORDER BY depot, stream_id";

    /// <summary>What every stream told beside its runs.</summary>
    public async Task<IReadOnlyList<VehicleSteeringStudy>> Studies(CancellationToken cancel)
    {
        await using var connection = await analysis.OpenConnectionAsync(cancel);
        return [.. (await connection.QueryAsync<string>(Command(StudiesSql, null, null, cancel))).Select(FactJson.Read<VehicleSteeringStudy>)];
    }

    // Served by reduction_vehicle, once a depot.
    private const string StudiesOfSql = """
        SELECT study::text FROM analysis.reduction
        WHERE depot = ANY(@depots) AND vehicle_id = @vehicle AND study IS NOT NULL
        ORDER BY depot, stream_id
        """;

    /// <summary>What the streams of one vehicle told beside their runs, put together; null without a stream.</summary>
    public async Task<VehicleSteeringStudy?> StudyOf(string vehicleId, string[] depots, CancellationToken cancel)
    {
        await using var connection = await analysis.OpenConnectionAsync(cancel);
        var studies = (await connection.QueryAsync<string>(Command(StudiesOfSql, new { vehicle = vehicleId, depots }, null, cancel))).Select(FactJson.Read<VehicleSteeringStudy>).ToArray();
        return studies.Length == 0 ? null : VehicleSteeringStudy.Of(studies);
    }

    private static CommandDefinition Command(string sql, object? parameters, NpgsqlTransaction? transaction, CancellationToken cancel) =>
        new(sql, parameters, transaction, TimeoutSeconds, cancellationToken: cancel);
}
