using Google.Protobuf;
using Google.Protobuf.WellKnownTypes;
using Google.Rpc;
using Grpc.Core;
using WearWatch.Contracts.V1;
using WearWatch.Storage.Facts;

namespace WearWatch.Services.Tests.Ingest;

/// <summary>Every way a fact can be wrong gets a clear answer with its field named, and is kept.</summary>
public sealed class BadFactsTests(PostgresFixture postgres) : IngestTest(postgres)
{
    private Fact Good(string id = "s1") => Sample.Survey(Depot, Van, id, Sample.Monday, 40_000, 7.1, 7.2, 7.0);

    [Fact]
    public Task A_depth_that_is_not_a_number_is_refused() =>
        Refused(Good().With(f => f.Survey.Tyres[1].Grooves[2].Depth = double.NaN), "not_a_number", "survey.tyres[1].grooves[2].depth");

    [Fact]
    public Task An_infinite_distance_is_refused() =>
        Refused(Good().With(f => f.Survey.Distance = double.PositiveInfinity), "not_a_number", "survey.distance");

    [Fact]
    public Task A_negative_depth_is_refused() =>
        Refused(Good().With(f => f.Survey.Tyres[0].Grooves[0].Depth = -0.1), "depth_negative", "survey.tyres[0].grooves[0].depth");

    [Fact]
    public Task A_depth_no_road_tyre_has_is_refused() =>
        Refused(Good().With(f => f.Survey.Tyres[0].Grooves[1].Depth = 75), "depth_out_of_range", "survey.tyres[0].grooves[1].depth");

    [Fact]
    public async Task A_depth_above_the_tyres_new_depth_is_held_and_named()
    {
        await Store(Sample.Fitting(Depot, Van, "f1", Sample.Monday.AddDays(-1), "1R", 8));
        var answer = Assert.Single(await Record(Good().With(f => f.Survey.Tyres[1].Grooves[0].Depth = 11)));
        Assert.Equal(Outcome.Held, answer.Outcome);
        Assert.Contains(answer.Remarks, r => r.Code == "depth_above_new" && r.Field == "survey.tyres[1].grooves[0].depth");
        Assert.Contains(await SetAside(Outcome.Held), item => item.Id == "s1");
    }

    [Fact]
    public async Task Distance_running_back_is_held_and_named()
    {
        await Store(Good());
        var answer = Assert.Single(await Record(Sample.Survey(Depot, Van, "s2", Sample.Monday.AddDays(7), 39_000, 7.0, 7.1, 6.9)));
        Assert.Equal(Outcome.Held, answer.Outcome);
        Assert.Contains(answer.Remarks, r => r.Field == "survey.distance");
    }

    [Fact]
    public async Task A_late_survey_with_more_distance_than_the_one_after_it_is_held()
    {
        await Store(Good());
        var answer = Assert.Single(await Record(Sample.Survey(Depot, Van, "s0", Sample.Monday.AddDays(-7), 41_000, 7.2, 7.3, 7.1)));
        Assert.Equal(Outcome.Held, answer.Outcome);
        Assert.Contains(answer.Remarks, r => r.Field == "survey.distance");
    }

    [Fact]
    public Task A_time_in_the_future_is_refused() =>
        Refused(Good().With(f => f.Survey.At = DateTimeOffset.UtcNow.AddDays(30).ToTimestamp()), "time_ahead", "survey.at");

    [Fact]
    public Task A_survey_without_a_time_is_refused() => Refused(Good().With(f => f.Survey.At = null), "missing", "survey.at");

    [Fact]
    public async Task A_coupling_that_ends_before_it_begins_is_refused()
    {
        var trailer = Sample.Van(Depot, $"{Depot}-T1").With(f => f.Vehicle.VehicleClass = VehicleClass.Trailer);
        await Store(trailer);
        await Refused(Sample.Fact(Depot, "c1", f => f.Coupling = new Coupling
        {
            TrailerId = $"{Depot}-T1",
            TractorId = Van,
            From = Sample.Monday.ToTimestamp(),
            To = Sample.Monday.AddHours(-1).ToTimestamp(),
        }), "time_back", "coupling.to");
    }

    [Fact]
    public Task An_unknown_vehicle_is_refused() => Refused(Good().With(f => f.Survey.VehicleId = "NOBODY"), "unknown_vehicle", "survey.vehicle_id");

    [Fact]
    public async Task An_unknown_depot_is_refused()
    {
        var answer = Assert.Single(await Record(Good().With(f => f.DepotId = $"{Depot}x")));
        Assert.Equal(Outcome.Refused, answer.Outcome);
        Assert.Contains(answer.Remarks, r => r.Code == "unknown_depot" && r.Field == "depot_id");
    }

    [Theory]
    [InlineData("3L", "unknown_position")]
    [InlineData("2LO", "unknown_position")]
    [InlineData("front left", "position_malformed")]
    public Task A_position_the_vehicle_does_not_have_is_refused(string position, string code) =>
        Refused(Good().With(f => f.Survey.Tyres[3].Position = position), code, "survey.tyres[3].position");

    [Fact]
    public Task The_same_position_twice_is_refused() =>
        Refused(Good().With(f => f.Survey.Tyres[3].Position = "1L"), "position_twice", "survey.tyres[3].position");

    [Theory]
    [InlineData(DepthUnit.Unspecified)]
    [InlineData((DepthUnit)77)]
    public Task An_unknown_depth_unit_is_refused(DepthUnit unit) => Refused(Good().With(f => f.Survey.DepthUnit = unit), "unit_unknown", "survey.depth_unit");

    [Fact]
    public Task A_distance_without_a_unit_is_refused() =>
        Refused(Good().With(f => f.Survey.DistanceUnit = DistanceUnit.Unspecified), "unit_unknown", "survey.distance_unit");

    [Fact]
    public Task An_angle_without_a_unit_is_refused() => Refused(Sample.Fact(Depot, "w1", f => f.WorkshopRecord = new WorkshopRecord
    {
        VehicleId = Van,
        At = Sample.Monday.ToTimestamp(),
        Angles = { new MeasuredAngle { Quantity = Quantity.FrontTotalToe, Before = 0.3 } },
    }), "unit_unknown", "workshop_record.angles[0].angle_unit");

    [Fact]
    public Task A_look_alike_is_no_angle_of_a_workshop_record() => Refused(Sample.Fact(Depot, "w1", f => f.WorkshopRecord = new WorkshopRecord
    {
        VehicleId = Van,
        At = Sample.Monday.ToTimestamp(),
        Angles = { new MeasuredAngle { Quantity = Quantity.Conicity, AngleUnit = AngleUnit.Degrees, Before = 1 } },
    }), "not_an_angle", "workshop_record.angles[0].quantity");

    [Fact]
    public Task A_fact_without_content_is_refused() => Refused(new Fact { Id = "e1", DepotId = Depot }, "missing", "body");

    [Fact]
    public Task Axles_with_a_gap_are_refused() =>
        Refused(Sample.Van(Depot, $"{Depot}-V2").With(f => f.Vehicle.Axles[1].Number = 3), "axle_number", "vehicle.axles[1].number");

    [Fact]
    public Task A_date_with_the_day_first_is_refused() =>
        Refused(Sample.Van(Depot, $"{Depot}-V2").With(f => f.Vehicle.LeavesOn = "02.03.2027"), "date_malformed", "vehicle.leaves_on");

    [Fact]
    public Task Control_characters_are_refused_and_still_kept() =>
        Refused(Good().With(f => f.Survey.Technician = "A\0B"), "text_malformed", "survey.technician");

    [Fact]
    public async Task A_malformed_id_is_answered_under_what_was_sent()
    {
        var answer = Assert.Single(await Record(Good("with space\0")));
        Assert.Equal(("with space\0", Outcome.Refused), (answer.Id, answer.Outcome));
        Assert.Contains(await SetAside(Outcome.Refused), item => item.Id == "with space?");
    }

    [Fact]
    public Task Ten_thousand_grooves_on_one_tyre_are_refused_and_still_kept() => Refused(Good().With(f =>
    {
        f.Survey.Tyres[2].Grooves.Clear();
        f.Survey.Tyres[2].Grooves.AddRange(Enumerable.Range(0, 10_000).Select(i => new GrooveDepth { Groove = i, Depth = 7 }));
    }), "too_many", "survey.tyres[2].grooves");

    [Fact]
    public Task A_vehicle_without_axles_is_refused() =>
        Refused(Sample.Van(Depot, $"{Depot}-V9").With(f => f.Vehicle.Axles.Clear()), "axles_count", "vehicle.axles");

    [Fact]
    public async Task A_vehicle_without_any_fitting_record_is_measured_like_any_other() => await Store(Good());

    [Fact]
    public async Task One_bad_item_never_costs_the_good_ones_beside_it()
    {
        var answers = await Record(Good("a"), Good("b").With(f => f.Survey.VehicleId = "NOBODY"), Sample.Survey(Depot, Van, "c", Sample.Monday.AddDays(7), 40_600, 7.0, 7.1, 6.9));
        Assert.Equal([Outcome.Stored, Outcome.Refused, Outcome.Stored], answers.Select(a => a.Outcome));
        Assert.Equal(["a", "b", "c"], answers.Select(a => a.Id));
    }

    [Fact]
    public async Task An_id_sent_again_with_other_content_is_refused_and_both_are_kept()
    {
        await Store(Good());
        await Refused(Good().With(f => f.Survey.Tyres[0].Grooves[0].Depth = 6.5), "id_in_use", "id");
        var facts = await new FactReader(Server.Database.Analysis).LoadVehicle(Van, null, default);
        Assert.Equal(7.1, Assert.Single(facts!.Surveys).Body.Tyres[0].Depths[0].DepthMm);
        var aside = Assert.Single(await SetAside(Outcome.Refused), item => item.Id == "s1");
        Assert.Equal(6.5, JsonParser.Default.Parse<Fact>(aside.ContentJson).Survey.Tyres[0].Grooves[0].Depth);
    }

    [Fact]
    public async Task A_refused_fact_can_be_corrected_and_sent_again_under_its_id()
    {
        await Refused(Good().With(f => f.Survey.DepthUnit = DepthUnit.Unspecified), "unit_unknown", "survey.depth_unit");
        await Store(Good());
        Assert.DoesNotContain(await SetAside(Outcome.Refused), item => item.Id == "s1");
    }

    [Fact]
    public async Task A_message_over_the_limit_is_told_so_and_the_service_keeps_serving()
    {
        var huge = Good().With(f => f.Survey.Technician = new string('x', 5_000_000));
        var error = await Assert.ThrowsAsync<RpcException>(async () => await Record(huge));
        Assert.Equal(StatusCode.ResourceExhausted, error.StatusCode);
        await Store(Good());
    }

    [Fact]
    public async Task More_than_500_facts_in_a_call_are_too_many()
    {
        var error = await Assert.ThrowsAsync<RpcException>(async () => await Record(Enumerable.Range(0, 501).Select(i => new Fact { Id = $"x{i}", DepotId = Depot }).ToArray()));
        Assert.Equal(StatusCode.ResourceExhausted, error.StatusCode);
    }

    [Fact]
    public async Task A_fact_without_any_id_ends_the_call_and_names_the_field()
    {
        var error = await Assert.ThrowsAsync<RpcException>(async () => await Record(Good(), Good("")));
        Assert.Equal(StatusCode.InvalidArgument, error.StatusCode);
        Assert.Equal("facts[1].id", Assert.Single(error.GetRpcStatus()!.GetDetail<BadRequest>()!.FieldViolations).Field);
    }

    [Fact]
    public async Task An_empty_batch_is_malformed() =>
        Assert.Equal(StatusCode.InvalidArgument, (await Assert.ThrowsAsync<RpcException>(async () => await Record())).StatusCode);

    [Theory]
    [InlineData(501, "", "page_size")]
    [InlineData(-1, "", "page_size")]
    [InlineData(0, "12.x.1", "page_token")]
    public async Task A_page_that_cannot_be_is_refused(int size, string token, string field)
    {
        var error = await Assert.ThrowsAsync<RpcException>(async () => await Client.ListSetAsideAsync(new ListSetAsideRequest { PageSize = size, PageToken = token }));
        Assert.Equal(StatusCode.InvalidArgument, error.StatusCode);
        Assert.Equal(field, Assert.Single(error.GetRpcStatus()!.GetDetail<BadRequest>()!.FieldViolations).Field);
    }
}
