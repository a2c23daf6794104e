using Dapper;
using Google.Protobuf.WellKnownTypes;
using Grpc.Core;
using Grpc.Health.V1;
using Npgsql;
using WearWatch.Contracts.V1;
using WearWatch.Import;
using WearWatch.Output;

namespace WearWatch.Services.Tests.Pipeline;

/// <summary>From a folder of plain files to the ranked list, over real gRPC and a real PostgreSQL.</summary>
public sealed class PipelineTests(SmallFleet fleet) : IClassFixture<SmallFleet>
{
    private Installation Services => fleet.Installation;

    [Fact]
    public async Task Every_vehicle_of_the_folder_is_ranked_with_a_reason_and_an_interval()
    {
        var list = await WorklistPages.Read(Services.Report, "", WorklistSort.Unspecified, CancellationToken.None);
        Assert.Equal(20, list.Total);
        Assert.Equal(Enumerable.Range(1, 20).Select(r => (long)r), list.Vehicles.Select(v => v.Rank));
        Assert.All(list.Vehicles, v =>
        {
            Assert.EndsWith(".", v.Why);
            Assert.InRange(v.MisalignedProbability, 0, 1);
            Assert.InRange(v.CostOfWaitingPerWeek.Value, v.CostOfWaitingPerWeek.Low, v.CostOfWaitingPerWeek.High);
            Assert.InRange(v.NetBenefit.Value, v.NetBenefit.Low, v.NetBenefit.High);
            Assert.True(v.ListedBecause != ListedBecause.Pays || v.NetBenefit.Value > 0);
        });
        var status = await Services.Analysis.GetAnalysisStatusAsync(new());
        Assert.Equal((0, 0, 20), (status.Due, status.Failed, status.Analysed));
    }

    [Fact]
    public async Task A_folder_imported_twice_is_stored_once()
    {
        var before = await Services.Ingest.GetIngestStatusAsync(new());
        var again = await ImportFolder.Run(Path.Combine(fleet.Folder, "folder"), Services.Ingest, (_, _) => { }, CancellationToken.None);
        var after = await Services.Ingest.GetIngestStatusAsync(new());
        Assert.All(again, o => Assert.Equal(0, o.Stored));
        Assert.Equal((before.Surveys, before.Readings, before.SteeringChunks, before.SteeringSamples, before.Held), (after.Surveys, after.Readings, after.SteeringChunks, after.SteeringSamples, after.Held));
        Assert.Equal(fleet.FirstImport.Sum(o => o.Samples), after.SteeringSamples);
        await Services.Analysed((_, _) => { }, CancellationToken.None);
    }

    [Fact]
    public async Task What_a_finding_rests_on_is_there_to_be_looked_at()
    {
        await using var connection = new NpgsqlConnection(fleet.Database);
        var surveys = (await connection.QueryAsync<string>("SELECT id FROM ingest.fact WHERE kind = 'survey'")).ToHashSet();
        var chunks = (await connection.QueryAsync<string>("SELECT stream_id || '/' || sequence FROM ingest.chunk")).ToHashSet();
        var findings = (await Services.Analysis.ListFindingsAsync(new ListFindingsRequest { PageSize = 500 })).Findings;
        Assert.NotEmpty(findings);
        foreach (var id in findings.SelectMany(f => f.EvidenceFor.Concat(f.EvidenceAgainst)).SelectMany(e => e.RestsOn).Distinct())
            Assert.True(surveys.Contains(id) || chunks.Contains(id) || id.StartsWith("report/", StringComparison.Ordinal) || id.StartsWith("workshop/", StringComparison.Ordinal), id);
    }

    [Fact]
    public async Task Steering_signals_reach_the_diagnosis_and_trailers_have_none()
    {
        var list = await WorklistPages.Read(Services.Report, "", WorklistSort.Vehicle, CancellationToken.None);
        var angles = 0;
        foreach (var row in list.Vehicles)
        {
            var diagnosis = (await Services.Report.GetVehicleReportAsync(new() { VehicleId = row.VehicleId })).Diagnosis;
            if (diagnosis.OffCentreAngle is not null) angles++;
            if (row.VehicleClass == "trailer") Assert.True(diagnosis.OffCentreAngle is null && diagnosis.SteeringPull is null && diagnosis.StraightRuns == 0);
        }
        Assert.InRange(angles, 3, 20);
    }

    [Fact]
    public async Task Pages_join_without_gap_or_double()
    {
        var ids = new List<string>();
        var token = "";
        do
        {
            var page = await Services.Report.GetWorklistAsync(new GetWorklistRequest { PageSize = 7, PageToken = token });
            ids.AddRange(page.Vehicles.Select(v => v.VehicleId));
            token = page.NextPageToken;
        }
        while (token.Length > 0);
        Assert.Equal(20, ids.Distinct().Count());
        Assert.Equal(20, ids.Count);
    }

    [Fact]
    public async Task The_past_is_recomputed_from_the_facts_up_to_then()
    {
        var list = await WorklistPages.Read(Services.Report, "", WorklistSort.Vehicle, CancellationToken.None);
        var vehicle = list.Vehicles[0].VehicleId;
        var past = (await Services.Analysis.GetDiagnosisAsync(new GetDiagnosisRequest { VehicleId = vehicle, AsOf = "2026-10-15" })).Diagnosis;
        Assert.Equal("2026-10-15", past.AsOf);
        Assert.True(past.FactsThrough.ToDateTimeOffset() < new DateTimeOffset(2026, 10, 16, 0, 0, 0, TimeSpan.Zero));
        await using var connection = new NpgsqlConnection(fleet.Database);
        var later = (await connection.QueryAsync<string>("SELECT id FROM ingest.fact WHERE kind = 'survey' AND at >= '2026-10-16Z'")).ToHashSet();
        Assert.NotEmpty(past.Tyres.SelectMany(t => t.SurveyIds));
        Assert.DoesNotContain(past.Tyres.SelectMany(t => t.SurveyIds), later.Contains);
    }

    [Fact]
    public async Task The_json_of_a_vehicle_has_every_name_the_readers_of_it_expect()
    {
        var list = await WorklistPages.Read(Services.Report, "", WorklistSort.Unspecified, CancellationToken.None);
        var json = Json.Vehicle(await Services.Report.GetVehicleReportAsync(new() { VehicleId = list.Vehicles[0].VehicleId }));
        string[] names = ["vehicle_id", "depot", "as_of", "misaligned_probability", "causes", "cost_of_waiting_per_week", "net_benefit", "steering_pull", "off_centre_angle", "tyres", "findings", "cannot_tell", "facts_through", "fleet_fit", "method"];
        Assert.All(names, n => Assert.True(json.ContainsKey(n), n));
        string[] cause = ["quantity", "axle", "side", "value", "low", "high", "unit", "outside_tolerance", "probability"];
        Assert.All(cause, n => Assert.True(json["causes"]![0]!.AsObject().ContainsKey(n), n));
        var probabilities = json["causes"]!.AsArray().Select(c => (double)c!["probability"]!).ToList();
        Assert.Equal(probabilities.OrderDescending(), probabilities);
    }

    [Fact]
    public async Task A_depth_below_the_limit_is_listed_while_its_survey_is_still_held()
    {
        var survey = new TreadSurvey { VehicleId = "V001", At = Timestamp.FromDateTimeOffset(new(2026, 11, 30, 12, 0, 0, TimeSpan.Zero)), DepthUnit = DepthUnit.Mm, Finished = true };
        survey.Tyres.Add(new TyreReadings { Position = "1L", Grooves = { new GrooveDepth { Groove = 1, Depth = 0.7 }, new GrooveDepth { Groove = 2, Depth = 29.5 } } });
        var depot = (await WorklistPages.Read(Services.Report, "", WorklistSort.Vehicle, CancellationToken.None)).Vehicles.Single(v => v.VehicleId == "V001").Depot;
        var answer = (await Services.Ingest.RecordFactsAsync(new() { Facts = { new Fact { Id = "held-and-bald", DepotId = depot, Survey = survey } } })).Answers[0];
        Assert.Equal(Outcome.Held, answer.Outcome);
        Assert.Contains(answer.Remarks, r => r.Safety);
        await Services.Analysed((_, _) => { }, CancellationToken.None);
        var tyre = (await Services.Report.GetWorklistAsync(new())).BelowLimit.Single(t => t.VehicleId == "V001" && t.Position == "1L");
        Assert.True(tyre.Held);
        Assert.Equal(("held-and-bald", 0.7), (tyre.SurveyId, tyre.DepthMm));
        Assert.NotEmpty(tyre.LimitSource);
    }

    [Fact]
    public async Task A_vehicle_nobody_knows_and_a_page_size_out_of_range_are_refused_by_name()
    {
        var unknown = await Assert.ThrowsAsync<RpcException>(async () => await Services.Report.GetVehicleReportAsync(new() { VehicleId = "NOBODY" }));
        Assert.Equal(StatusCode.NotFound, unknown.StatusCode);
        var size = await Assert.ThrowsAsync<RpcException>(async () => await Services.Report.GetWorklistAsync(new() { PageSize = 501 }));
        Assert.Equal(StatusCode.InvalidArgument, size.StatusCode);
        Assert.Equal("page_size", size.GetRpcStatus()!.GetDetail<Google.Rpc.BadRequest>()!.FieldViolations[0].Field);
    }

    [Fact]
    public async Task Two_workers_from_scratch_find_the_same_from_the_same_facts()
    {
        var before = await Diagnoses();
        await using (var other = await Installation.Start(fleet.Folder, new HostOptions { Database = fleet.Database, Only = ["analysis"] }, CancellationToken.None))
        {
            await using var connection = new NpgsqlConnection(fleet.Database);
            await connection.ExecuteAsync("DELETE FROM analysis.diagnosis; DELETE FROM analysis.finding; DELETE FROM analysis.straight_run; DELETE FROM analysis.reduction; DELETE FROM analysis.progress; DELETE FROM analysis.fleet_fit");
            await Services.Analysed((_, _) => { }, CancellationToken.None);
        }
        Assert.Equal(before, await Diagnoses());
    }

    /// <summary>Every diagnosis without what tells when and on which snapshot it was made.</summary>
    private async Task<SortedDictionary<string, string>> Diagnoses()
    {
        var found = new SortedDictionary<string, string>(StringComparer.Ordinal);
        foreach (var row in (await WorklistPages.Read(Services.Report, "", WorklistSort.Vehicle, CancellationToken.None)).Vehicles)
        {
            var diagnosis = (await Services.Report.GetVehicleReportAsync(new() { VehicleId = row.VehicleId })).Diagnosis;
            diagnosis.FleetFit = 0;
            foreach (var finding in diagnosis.Findings) (finding.OpenedAt, finding.OpenedBecause, finding.Id) = (null, "", "");
            found[row.VehicleId] = diagnosis.ToString();
        }
        return found;
    }

    [Fact]
    public async Task A_list_of_one_depot_holds_its_vehicles_only()
    {
        var all = await WorklistPages.Read(Services.Report, "", WorklistSort.Vehicle, CancellationToken.None);
        var depots = all.Vehicles.CountBy(v => v.Depot).ToDictionary();
        Assert.True(depots.Count > 1);
        foreach (var (depot, count) in depots)
        {
            var own = await WorklistPages.Read(Services.Report, depot, WorklistSort.Probability, CancellationToken.None);
            Assert.Equal(count, own.Total);
            Assert.All(own.Vehicles, v => Assert.Equal(depot, v.Depot));
            Assert.Equal(own.Vehicles.Select(v => v.MisalignedProbability).OrderDescending(), own.Vehicles.Select(v => v.MisalignedProbability));
        }
    }

    [Fact]
    public async Task The_services_say_that_they_are_well()
    {
        var health = await new Health.HealthClient(Services.Channel).CheckAsync(new HealthCheckRequest());
        Assert.Equal(HealthCheckResponse.Types.ServingStatus.Serving, health.Status);
    }
}
