using System.Diagnostics;
using Google.Protobuf.WellKnownTypes;
using Grpc.Core;
using Npgsql;
using WearWatch.Contracts.V1;
using WearWatch.Storage.Cluster;

namespace WearWatch.Services.Tests.Ingest;

/// <summary>A test that needs a small disk of its own: skipped where this machine does not let us mount one.</summary>
public sealed class SmallDiskFactAttribute : FactAttribute
{
    public SmallDiskFactAttribute()
    {
        var folder = Directory.CreateTempSubdirectory("wearwatch-disk-").FullName;
        if (SmallDisk.Run("mount", "-t", "tmpfs", "-o", "size=1m", "tmpfs", folder)) SmallDisk.Run("umount", folder);
        else Skip = "no right to mount a tmpfs here";
        Directory.Delete(folder);
    }
}

/// <summary>A tmpfs of a few MB.</summary>
internal sealed class SmallDisk(string folder) : IDisposable
{
    public static SmallDisk Mount(string folder, int mib, string owner)
    {
        Directory.CreateDirectory(folder);
        Assert.True(Run("mount", "-t", "tmpfs", "-o", $"size={mib}m,mode=700,uid={owner}", "tmpfs", folder));
        return new SmallDisk(folder);
    }

    public void Grow(int mib) => Assert.True(Run("mount", "-o", $"remount,size={mib}m", folder));

    public void Dispose()
    {
        if (Run("umount", "-l", folder)) Directory.Delete(folder);
    }

    public static bool Run(string program, params string[] arguments) => Output(program, arguments) is not null;

    /// <summary>What it printed; null where it could not be started or failed.</summary>
    public static string? Output(string program, params string[] arguments)
    {
        try
        {
            using var process = Process.Start(new ProcessStartInfo(program, arguments) { RedirectStandardOutput = true, RedirectStandardError = true })!;
            var output = process.StandardOutput.ReadToEnd();
            process.WaitForExit();
            return process.ExitCode == 0 ? output.Trim() : null;
        }
        catch (System.ComponentModel.Win32Exception)
        {
            return null;
        }
    }
}

/// <summary>The database's disk runs full while facts come in: the sender is told, nothing acknowledged is lost or doubled, and with room it goes on.</summary>
public sealed class FullDiskTests
{
    private const string Depot = "FULL", Van = "FULL-V";
    private const int BatchFacts = 500;

    [SmallDiskFact]
    public async Task Nothing_acknowledged_is_lost_when_the_disk_runs_full_and_sending_goes_on_once_there_is_room()
    {
        var folder = Directory.CreateTempSubdirectory("wearwatch-full-").FullName;
        await using var cluster = await LocalCluster.Start(folder, durable: false);
        var owner = SmallDisk.Output("stat", "-c", "%u", await DataOf(cluster.ConnectionString))!;
        var disk = Path.Combine(Path.GetTempPath(), $"wearwatch-small-{Guid.NewGuid():N}");
        using var small = SmallDisk.Mount(disk, 24, owner); // an empty database takes 8 of it
        var connection = await DatabaseOn(disk, cluster.ConnectionString);
        await using (var server = await IngestServer.Start(connection))
        {
            await server.Client.RecordFactsAsync(new RecordFactsRequest { Facts = { Sample.Depot(Depot), Sample.Van(Depot, Van) } });
            var acknowledged = 0;
            RpcException? full = null;
            while (full is null && acknowledged < 60)
            {
                try
                {
                    var answers = (await server.Client.RecordFactsAsync(Batch(acknowledged))).Answers;
                    Assert.All(answers, a => Assert.Equal((Outcome.Stored, false), (a.Outcome, a.Known)));
                    acknowledged++;
                }
                catch (RpcException error)
                {
                    full = error;
                }
            }
            Assert.Equal(StatusCode.Unavailable, full?.StatusCode);
            Assert.Contains("full", full!.Status.Detail);
            Assert.True(acknowledged > 0);
            Assert.Equal(acknowledged * BatchFacts, await Stored(connection));

            small.Grow(96);
            var again = (await server.Client.RecordFactsAsync(Batch(acknowledged))).Answers;
            Assert.All(again, a => Assert.Equal((Outcome.Stored, false), (a.Outcome, a.Known)));
            var known = (await server.Client.RecordFactsAsync(Batch(0))).Answers;
            Assert.All(known, a => Assert.True(a.Known));
            Assert.Equal((acknowledged + 1) * BatchFacts, await Stored(connection));
            Assert.Empty(server.UnexpectedErrors);
        }
        NpgsqlConnection.ClearAllPools();
        await cluster.Stop();
        Directory.Delete(folder, recursive: true);
    }

    private static RecordFactsRequest Batch(int number) => new()
    {
        Facts =
        {
            Enumerable.Range(0, BatchFacts).Select(i => Sample.Fact(Depot, $"r{number}-{i}", f => f.DriverReport = new DriverReport
            {
                VehicleId = Van,
                At = Sample.Monday.AddMinutes(number * BatchFacts + i).ToTimestamp(),
                Symptom = Symptom.Shakes,
                Note = string.Concat(Enumerable.Range(0, 15).Select(k => HashCode.Combine(number, i, k).ToString("x8", null))), // hardly compressible
            })),
        },
    };

    private static async Task<string> DataOf(string connectionString)
    {
        await using var connection = new NpgsqlConnection(connectionString);
        await connection.OpenAsync();
        await using var show = new NpgsqlCommand("SHOW data_directory", connection);
        return (string)(await show.ExecuteScalarAsync())!;
    }

    private static async Task<string> DatabaseOn(string disk, string connectionString)
    {
        await using var connection = new NpgsqlConnection(connectionString);
        await connection.OpenAsync();
        await using var space = new NpgsqlCommand($"CREATE TABLESPACE small LOCATION '{disk}'", connection);
        await space.ExecuteNonQueryAsync();
        await using var create = new NpgsqlCommand("CREATE DATABASE onsmall TABLESPACE small", connection);
        await create.ExecuteNonQueryAsync();
        return new NpgsqlConnectionStringBuilder(connectionString) { Database = "onsmall" }.ConnectionString;
    }

    private static async Task<long> Stored(string connectionString)
    {
        await using var connection = new NpgsqlConnection(connectionString);
        await connection.OpenAsync();
        await using var count = new NpgsqlCommand("SELECT count(DISTINCT id) FROM ingest.fact WHERE kind = 'driver_report'", connection);
        return (long)(await count.ExecuteScalarAsync())!;
    }
}
