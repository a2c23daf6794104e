using System.Diagnostics;
using Npgsql;
using WearWatch.Storage.Cluster;

namespace WearWatch.Services.Tests.Storage;

/// <summary>The cluster in a data folder: started, joined, stopped, and back after a crash.</summary>
public sealed class LocalClusterTests : IAsyncLifetime
{
    private readonly string _folder = Path.Combine(Path.GetTempPath(), $"wearwatch-cluster-{Guid.NewGuid():N}");
    private LocalCluster? _last;

    public Task InitializeAsync() => Task.CompletedTask;

    public async Task DisposeAsync()
    {
        if (_last is not null && _last.IsRunning()) await _last.Stop();
        Directory.Delete(_folder, recursive: true);
    }

    private async Task<LocalCluster> Start() => _last = await LocalCluster.Start(_folder);

    private static async Task<object?> Ask(LocalCluster cluster, string sql)
    {
        await using var connection = new NpgsqlConnection(cluster.ConnectionString + ";Pooling=false");
        await connection.OpenAsync();
        await using var command = new NpgsqlCommand(sql, connection);
        return await command.ExecuteScalarAsync();
    }

    [Fact]
    public async Task It_is_started_joined_stopped_and_killed_and_keeps_everything()
    {
        var first = await Start();
        Assert.True(first.StartedHere && first.IsRunning());
        Assert.Equal("127.0.0.1", await Ask(first, "SHOW listen_addresses"));
        Assert.Equal("on", await Ask(first, "SHOW fsync"));
        await Ask(first, "CREATE TABLE kept (n integer); INSERT INTO kept VALUES (42)");

        var joined = await Start();
        Assert.Equal((false, first.Port), (joined.StartedHere, joined.Port));

        await joined.Stop();
        Assert.False(joined.IsRunning());
        var again = await Start();
        Assert.Equal(42, await Ask(again, "SELECT n FROM kept"));
        Assert.Equal(first.Port, again.Port);

        // Killed: its file with the process id stays behind.
        var pid = int.Parse((await File.ReadAllLinesAsync(Path.Combine(_folder, "postgresql", "data", "postmaster.pid")))[0]);
        using (var server = Process.GetProcessById(pid)) server.Kill();
        for (var waited = 0; again.IsRunning() && waited < 100; waited++) await Task.Delay(50);
        var recovered = await Start();
        Assert.True(recovered.StartedHere);
        Assert.Equal(42, await Ask(recovered, "SELECT n FROM kept"));
    }

    [Fact]
    public async Task A_wrong_password_is_refused_also_on_loopback()
    {
        var cluster = await Start();
        var wrong = new NpgsqlConnectionStringBuilder(cluster.ConnectionString) { Password = "guess", Pooling = false }.ConnectionString;
        await using var connection = new NpgsqlConnection(wrong);
        await Assert.ThrowsAsync<PostgresException>(() => connection.OpenAsync());
    }

    [SkippableFact]
    public async Task A_folder_closed_to_the_servers_user_has_its_cluster_elsewhere_and_says_where()
    {
        Skip.If(OperatingSystem.IsWindows() || !Environment.IsPrivilegedProcess, "only root runs the server as another user");
        Directory.CreateDirectory(_folder);
        if (!OperatingSystem.IsWindows()) File.SetUnixFileMode(_folder, UnixFileMode.UserRead | UnixFileMode.UserWrite | UnixFileMode.UserExecute);
        var closed = Path.Combine(_folder, "data");
        _last = await LocalCluster.Start(closed);
        Assert.Equal(1, await Ask(_last, "SELECT 1"));
        var place = await File.ReadAllTextAsync(Path.Combine(closed, "postgresql.location"));
        await _last.Stop();
        Directory.Delete(place, recursive: true);
    }
}
