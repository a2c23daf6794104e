using Npgsql;
using Testcontainers.PostgreSql;
using WearWatch.Storage.Cluster;

namespace WearWatch.Services.Tests;

/// <summary>
/// A real PostgreSQL for the tests: in a container where an engine can run one, else a cluster of our own in a
/// temporary folder. Where WEARWATCH_REQUIRE_CONTAINER is 1 (CI), a missing engine fails instead.
/// </summary>
public sealed class PostgresFixture : IAsyncLifetime
{
    private PostgreSqlContainer? _container;
    private LocalCluster? _cluster;
    private string? _folder;

    public string ConnectionString { get; private set; } = "";

    /// <summary>Where it runs; for messages.</summary>
    public string Where => _container is null ? "local cluster" : "container";

    public async Task InitializeAsync()
    {
        if (await StartContainer()) return;
        _folder = Path.Combine(Path.GetTempPath(), $"wearwatch-tests-{Guid.NewGuid():N}");
        _cluster = await LocalCluster.Start(_folder, durable: false);
        ConnectionString = _cluster.ConnectionString;
    }

    public async Task DisposeAsync()
    {
        NpgsqlConnection.ClearAllPools();
        if (_container is not null) await _container.DisposeAsync();
        if (_cluster is not null) await _cluster.DisposeAsync();
        if (_folder is not null && Directory.Exists(_folder)) Directory.Delete(_folder, recursive: true);
    }

    /// <summary>An empty database of its own, for tests that need one.</summary>
    public async Task<string> NewDatabase()
    {
        var name = $"test_{Guid.NewGuid():N}";
        await using var connection = new NpgsqlConnection(ConnectionString);
        await connection.OpenAsync();
        await using var create = new NpgsqlCommand($"CREATE DATABASE {name}", connection);
        await create.ExecuteNonQueryAsync();
        return new NpgsqlConnectionStringBuilder(ConnectionString) { Database = name }.ConnectionString;
    }

    private async Task<bool> StartContainer()
    {
        var required = Environment.GetEnvironmentVariable("WEARWATCH_REQUIRE_CONTAINER") == "1";
        var engine = Environment.GetEnvironmentVariable("DOCKER_HOST") is { Length: > 0 } || File.Exists("/var/run/docker.sock");
        if (!engine) return required ? throw new InvalidOperationException("WEARWATCH_REQUIRE_CONTAINER is 1 and there is neither DOCKER_HOST nor /var/run/docker.sock") : false;
        try
        {
            _container = new PostgreSqlBuilder(Environment.GetEnvironmentVariable("WEARWATCH_POSTGRES_IMAGE") is { Length: > 0 } image ? image : "postgres:17").Build();
            await _container.StartAsync();
            ConnectionString = _container.GetConnectionString();
            return true;
        }
        catch (Exception) when (!required)
        {
            // An engine is there but cannot run the image (no registry, no rights): a cluster of our own serves as well.
            if (_container is not null) await _container.DisposeAsync();
            _container = null;
            return false;
        }
    }
}

[CollectionDefinition(Name)]
public sealed class PostgresCollection : ICollectionFixture<PostgresFixture>
{
    public const string Name = "PostgreSQL";
}
