using Npgsql;
using WearWatch.Storage;

namespace WearWatch.Services.Tests.Storage;

/// <summary>Migrations and roles.</summary>
[Collection(PostgresCollection.Name)]
public sealed class DatabaseTests(PostgresFixture postgres)
{
    private static async Task<string> Refused(NpgsqlDataSource source, string sql)
    {
        await using var command = source.CreateCommand(sql);
        return (await Assert.ThrowsAsync<PostgresException>(async () => await command.ExecuteNonQueryAsync())).SqlState;
    }

    [Fact]
    public async Task Several_processes_may_open_an_empty_database_at_once()
    {
        var connection = await postgres.NewDatabase();
        var opened = await Task.WhenAll(Enumerable.Range(0, 4).Select(_ => Database.Open(connection)));
        foreach (var database in opened) await database.DisposeAsync();
    }

    [Fact]
    public async Task Only_ingest_writes_facts_and_not_even_it_overwrites_them()
    {
        await using var database = await Database.Open(postgres.ConnectionString);
        const string Insert = "INSERT INTO ingest.settings_revision (depot, revision) VALUES ('x', 1)";
        Assert.Equal(PostgresErrorCodes.InsufficientPrivilege, await Refused(database.Analysis, Insert));
        Assert.Equal(PostgresErrorCodes.InsufficientPrivilege, await Refused(database.Report, Insert));
        Assert.Equal(PostgresErrorCodes.InsufficientPrivilege, await Refused(database.Ingest, "UPDATE ingest.fact SET outcome = 'held'"));
        Assert.Equal(PostgresErrorCodes.InsufficientPrivilege, await Refused(database.Ingest, "DELETE FROM ingest.fact"));
        Assert.Equal(PostgresErrorCodes.InsufficientPrivilege, await Refused(database.Ingest, "DELETE FROM ingest.chunk"));
    }

    [Fact]
    public async Task A_pooled_connection_keeps_its_services_role()
    {
        await using var database = await Database.Open(postgres.ConnectionString);
        for (var use = 0; use < 3; use++)
        {
            await using var command = database.Analysis.CreateCommand("SELECT current_user::text");
            Assert.Equal("wearwatch_analysis", await command.ExecuteScalarAsync());
        }
    }

    [Fact]
    public async Task Tables_made_later_belong_to_their_schemas_service_alone()
    {
        var connection = await postgres.NewDatabase();
        await using var database = await Database.Open(connection);
        await using (var owner = NpgsqlDataSource.Create(connection))
        {
            await using var create = owner.CreateCommand("CREATE TABLE analysis.later (n integer); CREATE TABLE report.later (n integer)");
            await create.ExecuteNonQueryAsync();
        }
        await using (var write = database.Analysis.CreateCommand("INSERT INTO analysis.later (n) VALUES (1)")) await write.ExecuteNonQueryAsync();
        await using (var read = database.Ingest.CreateCommand("SELECT count(*) FROM analysis.later")) Assert.Equal(1L, await read.ExecuteScalarAsync());
        await using (var write = database.Report.CreateCommand("INSERT INTO report.later (n) SELECT n FROM analysis.later")) await write.ExecuteNonQueryAsync();
        Assert.Equal(PostgresErrorCodes.InsufficientPrivilege, await Refused(database.Report, "DELETE FROM analysis.later"));
        Assert.Equal(PostgresErrorCodes.InsufficientPrivilege, await Refused(database.Analysis, "DELETE FROM report.later"));
    }
}
