using Dapper;
using DbUp;
using DbUp.Engine.Output;
using Npgsql;

namespace WearWatch.Storage;

/// <summary>The one database: migrated when opened, with a data source for each service under its own role.</summary>
public sealed class Database : IAsyncDisposable
{
    /// <summary>Advisory lock that lets one process at a time migrate; any constant of our own.</summary>
    private const long MigrationLock = 0x57656172_57617463;

    static Database() => DefaultTypeMap.MatchNamesWithUnderscores = true;

    private Database(string connectionString)
    {
        ConnectionString = connectionString;
        Ingest = Source(connectionString, "wearwatch_ingest");
        Analysis = Source(connectionString, "wearwatch_analysis");
        Report = Source(connectionString, "wearwatch_report");
    }

    public string ConnectionString { get; }

    /// <summary>Writes facts; reads what analysis has published.</summary>
    public NpgsqlDataSource Ingest { get; }

    /// <summary>Reads facts; writes estimates and findings.</summary>
    public NpgsqlDataSource Analysis { get; }

    /// <summary>Reads facts and findings; writes plans.</summary>
    public NpgsqlDataSource Report { get; }

    /// <summary>Brings the database up to date and opens the services' data sources.</summary>
    /// <exception cref="InvalidOperationException">A migration failed; the message names it.</exception>
    /// <exception cref="NpgsqlException">The database cannot be reached.</exception>
    public static async Task<Database> Open(string connectionString, CancellationToken cancel = default)
    {
        await Migrate(connectionString, cancel);
        return new Database(connectionString);
    }

    public async ValueTask DisposeAsync()
    {
        await Ingest.DisposeAsync();
        await Analysis.DisposeAsync();
        await Report.DisposeAsync();
    }

    private static async Task Migrate(string connectionString, CancellationToken cancel)
    {
        await using var guard = new NpgsqlConnection(new NpgsqlConnectionStringBuilder(connectionString) { Pooling = false }.ConnectionString);
        await guard.OpenAsync(cancel);
        await guard.ExecuteAsync(new CommandDefinition("SELECT pg_advisory_lock(@MigrationLock)", new { MigrationLock }, commandTimeout: 300, cancellationToken: cancel));
        await guard.ExecuteAsync(new CommandDefinition("CREATE SCHEMA IF NOT EXISTS migration", commandTimeout: 30, cancellationToken: cancel));
        var result = await Task.Run(() => DeployChanges.To.PostgresqlDatabase(connectionString)
            .WithScriptsEmbeddedInAssembly(typeof(Database).Assembly)
            .WithVariablesDisabled()
            .WithTransactionPerScript()
            .WithExecutionTimeout(TimeSpan.FromMinutes(10))
            .JournalToPostgresqlTable("migration", "done")
            .LogTo(new NoOpUpgradeLog())
            .Build().PerformUpgrade(), cancel);
        if (!result.Successful)
            throw new InvalidOperationException($"Migration {result.ErrorScript?.Name ?? "journal"} failed: {result.Error.Message}", result.Error);
    }

    /// <summary>
    /// The role is set when a connection starts. Resetting a pooled connection would run SET SESSION AUTHORIZATION
    /// DEFAULT, which drops the role again, so the reset is off; no code here leaves session state behind.
    /// </summary>
    private static NpgsqlDataSource Source(string connectionString, string role)
    {
        var settings = new NpgsqlConnectionStringBuilder(connectionString) { NoResetOnClose = true, ApplicationName = role, Timeout = 10, IncludeErrorDetail = false };
        settings.Options = string.Join(' ', new[] { settings.Options, $"-c role={role}" }.Where(o => !string.IsNullOrEmpty(o)));
        return NpgsqlDataSource.Create(settings);
    }
}
