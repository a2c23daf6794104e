using System.Diagnostics;
using System.Runtime.InteropServices;
using Npgsql;
using WearWatch.Contracts.V1;
using WearWatch.Storage;
using WearWatch.Storage.Cluster;

namespace WearWatch.Benchmarks;

/// <summary>
/// Samples per second from a client through the gRPC door to committed storage, two streams at once, every answer awaited, client,
/// service and PostgreSQL on this machine with fsync on. One sample is one row of eight channels. Beside it, in turn within each
/// round: the same messages to a service that throws them away, and the same samples copied a row each.
/// </summary>
internal static class DoorBenchmark
{
    private const int Streams = 2, Rounds = 3;
    private const long SamplesARound = (long)Streams * DoorDrive.Samples;
    private static readonly int[] ChunkSizes = [600, 6000];
    private static readonly TimeSpan Longest = TimeSpan.FromMinutes(3);

    public static IReadOnlyDictionary<string, object> Run()
    {
        using var stop = new CancellationTokenSource(Longest);
        void Stop(PosixSignalContext signal)
        {
            signal.Cancel = true; // the cluster is stopped and its folder removed first
            stop.Cancel();
        }
        using var interrupted = PosixSignalRegistration.Create(PosixSignal.SIGINT, Stop);
        using var terminated = PosixSignalRegistration.Create(PosixSignal.SIGTERM, Stop);
        try
        {
            return Run(stop.Token).GetAwaiter().GetResult();
        }
        catch (Exception error) when (stop.IsCancellationRequested)
        {
            throw new OperationCanceledException($"stopped before its end, or not done within {Longest.TotalMinutes} minutes", error);
        }
    }

    private static async Task<IReadOnlyDictionary<string, object>> Run(CancellationToken cancel)
    {
        var drives = Enumerable.Range(1, Streams).Select(DoorDrive.Make).ToList();
        var folder = Path.Combine(Path.GetTempPath(), $"wearwatch-bench-{Guid.NewGuid():N}");
        var home = folder; // the server's own, elsewhere where its user may not enter the folder
        try
        {
            await using var cluster = await LocalCluster.Start(folder, durable: true, note => Console.Error.WriteLine(note), cancel);
            await using var admin = new NpgsqlConnection(cluster.ConnectionString);
            await admin.OpenAsync(cancel);
            home = Path.GetDirectoryName(await Ask<string>(admin, "SHOW data_directory", cancel))!;
            await using var database = await Database.Open(cluster.ConnectionString, cancel);
            return await Measure(admin, database, drives, cancel);
        }
        finally
        {
            foreach (var left in (string[])[home, folder]) if (Directory.Exists(left)) Directory.Delete(left, recursive: true);
        }
    }

    private static async Task<IReadOnlyDictionary<string, object>> Measure(NpgsqlConnection admin, Database database, List<DoorDrive> drives, CancellationToken cancel)
    {
        await using var door = await DoorHost.Ingest(database, cancel);
        await using var discard = await DoorHost.Discard(cancel);
        await RecordVehicles(door, drives, cancel);
        await Do(admin, RowTable.Create, cancel);
        var figures = new Dictionary<string, object>
        {
            ["channels"] = DoorDrive.Channels.Length,
            ["streams_at_once"] = Streams,
            ["samples_a_round"] = SamplesARound,
            ["rounds"] = Rounds,
            ["processors"] = Environment.ProcessorCount,
            ["load_average_1_min_before"] = double.Parse(File.ReadAllText("/proc/loadavg").Split(' ')[0]),
            ["fsync"] = await Ask<string>(admin, "SHOW fsync", cancel),
            ["synchronous_commit"] = await Ask<string>(admin, "SHOW synchronous_commit", cancel),
            ["commit_of_one_row_ms"] = await CommitMs(admin, cancel),
        };
        var seconds = new Dictionary<string, List<double>>();
        var whole = ChunkSizes.ToDictionary(size => size, size => drives.Select(d => d.Chunks(size)).ToList());
        for (var round = 0; round <= Rounds; round++)
        {
            var samples = round == 0 ? DoorDrive.Samples / 4 : DoorDrive.Samples; // the first warms up
            async Task Time(string what, Func<int, Task> stream)
            {
                await Do(admin, "CHECKPOINT", cancel); // what an earlier part left to be written is not this one's
                var started = Stopwatch.GetTimestamp();
                await Task.WhenAll(Enumerable.Range(0, Streams).Select(k => Task.Run(() => stream(k), cancel)));
                if (round == 0) seconds[what] = [];
                else seconds[what].Add(Stopwatch.GetElapsedTime(started).TotalSeconds);
            }
            foreach (var size in ChunkSizes)
            {
                var chunks = whole[size].Select(stream => stream[..(samples / size)]).ToList();
                await Do(admin, "TRUNCATE ingest.chunk", cancel);
                await Time($"door_chunks_of_{size}", k => door.Send(drives[k].Header($"{size}-{round}-{k}"), chunks[k], cancel));
                await Time($"discard_chunks_of_{size}", k => discard.Send(drives[k].Header($"{size}-{round}-{k}"), chunks[k], cancel));
                if (round > 0) await Sizes(admin, size, chunks, figures, cancel);
            }
            await Do(admin, "TRUNCATE public.row_sample", cancel);
            await Time("row_copy", k => Task.Run(() => RowTable.Copy(database.ConnectionString, k, drives[k], samples), cancel));
        }
        foreach (var (what, times) in seconds)
        {
            figures[$"{what}_samples_per_s"] = Math.Round(SamplesARound / times.Min());
            figures[$"{what}_samples_per_s_by_round"] = times.ConvertAll(t => Math.Round(SamplesARound / t));
        }
        figures["rows_disk_bytes_per_sample"] = PerSample(await Ask<long>(admin, "SELECT pg_total_relation_size('public.row_sample')", cancel));
        return figures;
    }

    /// <summary>Bytes per sample as sent, of the stored columns, and of the table with its indexes; first whether all of it is there.</summary>
    private static async Task Sizes(NpgsqlConnection admin, int size, List<List<StreamSteeringRequest>> chunks, Dictionary<string, object> figures, CancellationToken cancel)
    {
        var stored = await Ask<long>(admin, "SELECT sum(samples)::bigint FROM ingest.chunk", cancel);
        if (stored != SamplesARound) throw new InvalidOperationException($"{stored} of {SamplesARound} samples are stored");
        figures[$"chunks_a_commit_chunks_of_{size}"] = Math.Round(await Ask<double>(admin, "SELECT count(*)::float / count(DISTINCT (vehicle_id, revision)) FROM ingest.chunk", cancel), 1);
        figures[$"sent_bytes_per_sample_chunks_of_{size}"] = PerSample(chunks.Sum(stream => stream.Sum(m => (long)m.CalculateSize())));
        figures[$"stored_bytes_per_sample_chunks_of_{size}"] = PerSample(await Ask<long>(admin, "SELECT sum(length(columns))::bigint FROM ingest.chunk", cancel));
        figures[$"disk_bytes_per_sample_chunks_of_{size}"] = PerSample(await Ask<long>(admin, "SELECT pg_total_relation_size('ingest.chunk')", cancel));
    }

    private static double PerSample(long bytes) => Math.Round((double)bytes / SamplesARound, 2);

    private static async Task RecordVehicles(DoorHost door, List<DoorDrive> drives, CancellationToken cancel)
    {
        var request = new RecordFactsRequest
        {
            Facts =
            {
                new Fact { Id = "depot", DepotId = DoorDrive.Depot, Depot = new Depot { DepotId = DoorDrive.Depot, Name = "Bench", TrafficSide = TrafficSide.Right, Jurisdiction = "DE", TimeZone = "Europe/Berlin", Currency = "EUR" } },
            },
        };
        request.Facts.Add(drives.Select(drive => new Fact
        {
            Id = drive.VehicleId,
            DepotId = DoorDrive.Depot,
            Vehicle = new Vehicle
            {
                VehicleId = drive.VehicleId,
                VehicleClass = VehicleClass.Van,
                KmPerWeek = 600,
                GrossMassKg = 3200,
                WheelbaseM = 3.6,
                Axles = { new Axle { Number = 1, Steered = true, Suspension = Suspension.Strut }, new Axle { Number = 2, Driven = true, Suspension = Suspension.BeamLeaf } },
            },
        }));
        var answers = (await door.Client.RecordFactsAsync(request, cancellationToken: cancel)).Answers;
        if (answers.FirstOrDefault(a => a.Outcome != Outcome.Stored) is { } refused) throw new InvalidOperationException($"{refused.Id} was not stored: {refused.Remarks}");
    }

    /// <summary>Median of a few one-row commits: what this machine's disk asks for one.</summary>
    private static async Task<double> CommitMs(NpgsqlConnection admin, CancellationToken cancel)
    {
        await Do(admin, "CREATE TABLE public.one_row (n integer)", cancel);
        var times = new double[31];
        for (var i = 0; i < times.Length; i++)
        {
            var started = Stopwatch.GetTimestamp();
            await Do(admin, "INSERT INTO public.one_row VALUES (1)", cancel);
            times[i] = Stopwatch.GetElapsedTime(started).TotalMilliseconds;
        }
        return Math.Round(times.Order().ElementAt(times.Length / 2), 2);
    }

    private static async Task<T> Ask<T>(NpgsqlConnection connection, string sql, CancellationToken cancel)
    {
        await using var command = new NpgsqlCommand(sql, connection) { CommandTimeout = 60 };
        return (T)(await command.ExecuteScalarAsync(cancel) ?? throw new InvalidOperationException($"no answer to {sql}"));
    }

    private static async Task Do(NpgsqlConnection connection, string sql, CancellationToken cancel)
    {
        await using var command = new NpgsqlCommand(sql, connection) { CommandTimeout = 60 };
        await command.ExecuteNonQueryAsync(cancel);
    }
}
