using Dapper;
using Npgsql;

namespace WearWatch.Storage.Analysis;

/// <summary>Vehicles claimed for analysis: published together when committed, due again when not.</summary>
public sealed class DiagnosisClaim : IAsyncDisposable
{
    private readonly NpgsqlConnection _connection;
    private readonly NpgsqlTransaction _transaction;

    internal DiagnosisClaim(NpgsqlConnection connection, NpgsqlTransaction transaction, IReadOnlyList<DueVehicle> due) =>
        (_connection, _transaction, Due) = (connection, transaction, due);

    public IReadOnlyList<DueVehicle> Due { get; }

    // Served by finding_open.
    private const string OpenSql = """
        SELECT finding_id, kind, place, opened_at, opened_because FROM analysis.finding
        WHERE depot = @depot AND vehicle_id = @vehicle AND closed_at IS NULL
        """;

    public async Task<IReadOnlyList<OpenFindingKey>> OpenFindings(DueVehicle due, CancellationToken cancel) =>
        (await _connection.QueryAsync<OpenFindingKey>(Command(OpenSql, new { depot = due.Depot, vehicle = due.VehicleId }, cancel))).AsList();

    private const string DiagnosisSql = """
        INSERT INTO analysis.diagnosis (depot, vehicle_id, vehicle_class, revision, settings_revision, fleet_fit, method, as_of, misaligned_probability, body)
        VALUES (@depot, @vehicle, @vehicleClass, @revision, @settings, @fit, @method, @asOf::date, @probability, @body::jsonb)
        ON CONFLICT (depot, vehicle_id) DO UPDATE SET vehicle_class = excluded.vehicle_class, revision = excluded.revision,
          settings_revision = excluded.settings_revision, fleet_fit = excluded.fleet_fit, method = excluded.method, as_of = excluded.as_of,
          made_at = clock_timestamp(), misaligned_probability = excluded.misaligned_probability, body = excluded.body
        """;

    // A vehicle that changed its home depot leaves nothing behind in the old one.
    private const string MovedSql = """
        DELETE FROM analysis.diagnosis WHERE vehicle_id = @vehicle AND depot <> @depot;
        DELETE FROM analysis.progress WHERE vehicle_id = @vehicle AND depot <> @depot;
        DELETE FROM analysis.unsafe_tyre WHERE vehicle_id = @vehicle;
        """;

    private const string UnsafeSql = """
        INSERT INTO analysis.unsafe_tyre (depot, vehicle_id, position, depth_mm, limit_mm, limit_source, survey_id, measured_at, held, sentence)
        VALUES (@depot, @vehicle, @Position, @DepthMm, @LimitMm, @LimitSource, @SurveyId, @MeasuredAt, @Held, @Sentence)
        """;

    private const string FindingSql = """
        INSERT INTO analysis.finding (depot, finding_id, vehicle_id, kind, place, alignment_mends, safety, strength, body, opened_because)
        VALUES (@depot, @FindingId, @vehicle, @Kind, @Place, @AlignmentMends, @Safety, @Strength, @Body::jsonb, @Because)
        ON CONFLICT (depot, finding_id) DO UPDATE SET alignment_mends = excluded.alignment_mends, safety = excluded.safety,
          strength = excluded.strength, body = excluded.body,
          changed_at = CASE WHEN analysis.finding.body->>'sentence' = excluded.body->>'sentence' THEN analysis.finding.changed_at ELSE now() END
        """;

    private const string CloseSql = """
        UPDATE analysis.finding SET closed_at = now(), closed_because = @because
        WHERE vehicle_id = @vehicle AND closed_at IS NULL AND (depot <> @depot OR NOT finding_id = ANY(@kept))
        """;

    private const string DoneSql = """
        UPDATE analysis.progress
        SET done_revision = @revision, done_settings = @settings, done_fit = @fit, done_method = @method, failure = NULL
        WHERE depot = @depot AND vehicle_id = @vehicle
        """;

    /// <summary>Writes a diagnosis with its findings; visible when the claim is committed.</summary>
    public async Task Publish(DiagnosisToPublish d, CancellationToken cancel)
    {
        var (depot, vehicle) = (d.Due.Depot, d.Due.VehicleId);
        await Execute(MovedSql, new { depot, vehicle }, cancel);
        await Execute(DiagnosisSql, new
        {
            depot,
            vehicle,
            vehicleClass = d.VehicleClass,
            revision = d.Due.Revision,
            settings = d.Due.SettingsRevision,
            fit = d.FleetFit,
            method = d.Method,
            asOf = d.AsOf,
            probability = d.MisalignedProbability,
            body = d.Body,
        }, cancel);
        foreach (var tyre in d.UnsafeTyres)
            await Execute(UnsafeSql, new { depot, vehicle, tyre.Position, tyre.DepthMm, tyre.LimitMm, tyre.LimitSource, tyre.SurveyId, tyre.MeasuredAt, tyre.Held, tyre.Sentence }, cancel);
        await Execute(CloseSql, new { depot, vehicle, kept = d.Findings.Select(f => f.FindingId).ToArray(), because = $"no longer stands out in the facts of revision {d.Due.Revision}" }, cancel);
        foreach (var f in d.Findings)
            await Execute(FindingSql, new { depot, vehicle, f.FindingId, f.Kind, f.Place, f.AlignmentMends, f.Safety, f.Strength, f.Body, f.Because }, cancel);
        await Execute(DoneSql, new { depot, vehicle, revision = d.Due.Revision, settings = d.Due.SettingsRevision, fit = d.FleetFit, method = d.Method }, cancel);
    }

    public Task Commit(CancellationToken cancel) => _transaction.CommitAsync(cancel);

    public async ValueTask DisposeAsync()
    {
        await _transaction.DisposeAsync();
        await _connection.DisposeAsync();
    }

    private Task Execute(string sql, object parameters, CancellationToken cancel) => _connection.ExecuteAsync(Command(sql, parameters, cancel));

    private CommandDefinition Command(string sql, object parameters, CancellationToken cancel) => DiagnosisStore.Command(sql, parameters, _transaction, cancel);
}
