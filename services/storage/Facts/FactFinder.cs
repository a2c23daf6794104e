using Dapper;
using Npgsql;

namespace WearWatch.Storage.Facts;

/// <summary>One fact as it was sent.</summary>
public sealed record FoundFact
{
    public required string Depot { get; init; }
    /// <summary>Waits held.</summary>
    public required bool Held { get; init; }
    /// <summary>Holds now.</summary>
    public required bool Holds { get; init; }
    public required string Remarks { get; init; }
    /// <summary>A message of the contract.</summary>
    public required byte[] Sent { get; init; }
}

/// <summary>Finds a fact by its id.</summary>
public sealed class FactFinder(NpgsqlDataSource source)
{
    private const int TimeoutSeconds = 30;

    // By depot served by the primary key; without one a scan, for a person who types an id.
    private const string Sql = """
        SELECT f.depot, f.remarks::text AS remarks, f.sent,
          EXISTS (SELECT FROM ingest.held_fact h WHERE h.depot = f.depot AND h.id = f.id) AS held,
          EXISTS (SELECT FROM ingest.current_fact c WHERE c.depot = f.depot AND c.id = f.id) AS holds
        FROM ingest.fact f
        WHERE f.id = @id AND (@depot = '' OR f.depot = @depot)
        ORDER BY f.depot
        """;

    /// <summary>Facts of that id: one, or one of each of several depots.</summary>
    public async Task<IReadOnlyList<FoundFact>> Find(string id, string depot, CancellationToken cancel)
    {
        await using var connection = await source.OpenConnectionAsync(cancel);
        return [.. await connection.QueryAsync<FoundFact>(new CommandDefinition(Sql, new { id, depot }, commandTimeout: TimeoutSeconds, cancellationToken: cancel))];
    }
}
