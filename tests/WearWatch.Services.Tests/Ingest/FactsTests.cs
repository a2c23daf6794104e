using Google.Protobuf.WellKnownTypes;
using Grpc.Core;
using WearWatch.Contracts.V1;
using WearWatch.Storage.Facts;
using WithdrawalKind = WearWatch.Contracts.V1.WithdrawalKind;

namespace WearWatch.Services.Tests.Ingest;

/// <summary>Facts in, and what can be read of them afterwards.</summary>
public sealed class FactsTests(PostgresFixture postgres) : IngestTest(postgres)
{
    private FactReader Reader => new(Server.Database.Analysis);

    private async Task<VehicleFacts> Load(string? vehicle = null, DateOnly? asOf = null) =>
        await Reader.LoadVehicle(vehicle ?? Van, asOf, default) ?? throw new InvalidOperationException("the vehicle is not known");

    private Fact Survey(string id, int week, double km, params double[] depths) => Sample.Survey(Depot, Van, id, Sample.Monday.AddDays(7 * week), km, depths);

    [Fact]
    public async Task What_is_sent_twice_is_stored_once()
    {
        var survey = Survey("s1", 0, 40_000, 7.1, 7.2, 7.0);
        Assert.False((await Store(survey))[0].Known);
        var before = await Load();
        var again = Assert.Single(await Record(survey.With(f => f.RecordedBy = "someone else")));
        Assert.Equal((Outcome.Stored, true), (again.Outcome, again.Known));
        var after = await Load();
        Assert.Single(after.Surveys);
        Assert.Equal(before.Revision, after.Revision);
    }

    [Fact]
    public async Task The_same_fact_twice_in_one_batch_is_stored_once()
    {
        var survey = Survey("s1", 0, 40_000, 7.1, 7.2, 7.0);
        var answers = await Record(survey, survey);
        Assert.Equal([false, true], answers.Select(a => a.Known));
        Assert.Single((await Load()).Surveys);
    }

    [Fact]
    public async Task Later_facts_of_a_batch_see_earlier_ones()
    {
        var depot = $"{Depot}b";
        await Store(Sample.Depot(depot), Sample.Van(depot, $"{depot}-V"), Sample.Survey(depot, $"{depot}-V", "s1", Sample.Monday, 40_000, 7.1, 7.2, 7.0));
    }

    [Fact]
    public async Task Every_fact_raises_the_vehicles_revision()
    {
        var first = (await Load()).Revision;
        await Store(Survey("s1", 0, 40_000, 7.1, 7.2, 7.0));
        var second = (await Load()).Revision;
        await Store(Sample.Fact(Depot, "r1", f => f.DriverReport = new DriverReport { VehicleId = Van, At = Sample.Monday.ToTimestamp(), Symptom = Symptom.PullsRight }));
        Assert.True(first < second && second < (await Load()).Revision);
    }

    [Fact]
    public async Task Millimetres_and_thirty_seconds_of_an_inch_are_equal_behind_the_door()
    {
        var inches = Sample.Survey(Depot, Van, "in", Sample.Monday, 100, 9, 10, 9).With(f =>
        {
            f.Survey.DepthUnit = DepthUnit.ThirtySecondsInch;
            f.Survey.DistanceUnit = DistanceUnit.Miles;
        });
        await Store(inches);
        var survey = Assert.Single((await Load()).Surveys).Body;
        Assert.Equal([9 * 0.79375, 10 * 0.79375, 9 * 0.79375], survey.Tyres[0].Depths.Select(d => d.DepthMm)); // 25.4 mm ÷ 32, exact
        Assert.Equal(160.9344, survey.DistanceKm!.Value, 10); // international mile, exact
        Assert.Equal(0.79375, survey.ResolutionMm);
    }

    [Fact]
    public async Task Minutes_of_arc_become_degrees()
    {
        await Store(Sample.Fact(Depot, "w1", f => f.WorkshopRecord = new WorkshopRecord
        {
            VehicleId = Van,
            At = Sample.Monday.ToTimestamp(),
            Angles = { new MeasuredAngle { Quantity = Quantity.FrontTotalToe, AngleUnit = AngleUnit.Minutes, Before = 15, After = -6 } },
        }));
        var angle = Assert.Single(Assert.Single((await Load()).WorkshopRecords).Body.Angles);
        Assert.Equal((0.25, -0.1), (angle.BeforeDeg!.Value, angle.AfterDeg!.Value));
    }

    [Fact]
    public async Task A_depth_below_the_limit_is_said_at_once_even_while_the_survey_is_held()
    {
        await Store(Survey("s1", 0, 40_000, 7.1, 7.2, 7.0));
        var answer = Assert.Single(await Record(Survey("s2", 1, 39_000, 1.2, 1.3, 1.2)));
        Assert.Equal(Outcome.Held, answer.Outcome);
        Assert.Contains(answer.Remarks, r => r.Code == "below_limit" && r.Safety);
        var facts = await Load();
        Assert.Equal("s1", Assert.Single(facts.Surveys).FactId);
        Assert.Equal("s2", Assert.Single(facts.HeldSurveys).FactId);
        var again = Assert.Single(await Record(Survey("s2", 1, 39_000, 1.2, 1.3, 1.2)));
        Assert.Equal((Outcome.Held, true), (again.Outcome, again.Known));
        Assert.Contains(again.Remarks, r => r.Code == "below_limit" && r.Safety);
    }

    [Fact]
    public async Task A_correction_takes_the_place_of_what_it_corrects()
    {
        await Store(Survey("s1", 0, 40_000, 7.1, 7.2, 7.0));
        await Store(Survey("s1b", 0, 40_000, 6.1, 6.2, 6.0).With(f => f.Replaces = "s1"));
        Assert.Equal("s1b", Assert.Single((await Load()).Surveys).FactId);
    }

    [Fact]
    public async Task A_correction_of_a_correction_leaves_only_the_last()
    {
        await Store(Survey("s1", 0, 40_000, 7.1, 7.2, 7.0), Survey("s2", 0, 40_000, 6.9, 7.0, 6.8).With(f => f.Replaces = "s1"), Survey("s3", 0, 40_000, 6.8, 6.9, 6.7).With(f => f.Replaces = "s2"));
        Assert.Equal("s3", Assert.Single((await Load()).Surveys).FactId);
    }

    [Fact]
    public async Task A_held_correction_does_not_yet_take_the_place()
    {
        await Store(Survey("s1", 0, 40_000, 7.1, 7.2, 7.0), Survey("s2", 1, 40_600, 7.0, 7.1, 6.9));
        var held = Assert.Single(await Record(Survey("s2b", 1, 30_000, 7.0, 7.1, 6.9).With(f => f.Replaces = "s2")));
        Assert.Equal(Outcome.Held, held.Outcome);
        Assert.Equal(["s1", "s2"], (await Load()).Surveys.Select(s => s.FactId));
        await Store(Withdrawal("w1", WithdrawalKind.Release, "s2b"));
        Assert.Equal(["s1", "s2b"], (await Load()).Surveys.Select(s => s.FactId));
    }

    [Fact]
    public async Task A_retracted_fact_no_longer_holds_and_a_retracted_correction_gives_way()
    {
        await Store(Survey("s1", 0, 40_000, 7.1, 7.2, 7.0), Survey("s1b", 0, 40_000, 6.1, 6.2, 6.0).With(f => f.Replaces = "s1"));
        var before = (await Load()).Revision;
        await Store(Withdrawal("w1", WithdrawalKind.Retract, "s1b"));
        var facts = await Load();
        Assert.Equal("s1", Assert.Single(facts.Surveys).FactId);
        Assert.True(facts.Revision > before);
        await Store(Withdrawal("w2", WithdrawalKind.Retract, "s1"));
        Assert.Empty((await Load()).Surveys);
    }

    [Fact]
    public async Task A_released_survey_is_reckoned_with()
    {
        await Store(Survey("s1", 0, 40_000, 7.1, 7.2, 7.0));
        await Record(Survey("s2", 1, 39_000, 7.0, 7.1, 6.9));
        await Store(Withdrawal("w1", WithdrawalKind.Release, "s2"));
        var facts = await Load();
        Assert.Equal(["s1", "s2"], facts.Surveys.Select(s => s.FactId));
        Assert.Empty(facts.HeldSurveys);
        Assert.DoesNotContain(await SetAside(Outcome.Held), item => item.Id == "s2");
    }

    [Fact]
    public async Task Only_what_is_held_can_be_released_and_only_what_is_known_retracted()
    {
        await Store(Survey("s1", 0, 40_000, 7.1, 7.2, 7.0));
        await Refused(Withdrawal("w1", WithdrawalKind.Release, "s1"), "not_held", "withdrawal.fact_id");
        await Refused(Withdrawal("w2", WithdrawalKind.Retract, "nothing"), "unknown_fact", "withdrawal.fact_id");
        await Refused(Survey("s2", 1, 40_600, 7.0, 7.1, 6.9).With(f => f.Replaces = "nothing"), "unknown_fact", "replaces");
    }

    [Fact]
    public async Task The_past_is_read_without_what_came_later()
    {
        await Store(Survey("s1", 0, 40_000, 7.1, 7.2, 7.0), Survey("s2", 1, 40_600, 7.0, 7.1, 6.9));
        Assert.Equal("s1", Assert.Single((await Load(asOf: DateOnly.FromDateTime(Sample.Monday.UtcDateTime))).Surveys).FactId);
    }

    [Fact]
    public async Task A_vehicles_dated_change_holds_from_its_date_on()
    {
        await Store(Sample.Van(Depot, Van, "2026-06-01").With(f => f.Vehicle.KmPerWeek = 900));
        Assert.Equal(600, (await Load(asOf: new DateOnly(2026, 5, 31))).Vehicle.KmPerWeek);
        Assert.Equal(900, (await Load(asOf: new DateOnly(2026, 6, 1))).Vehicle.KmPerWeek);
    }

    [Fact]
    public async Task Settings_raise_the_depots_revision_and_are_read_with_their_dates()
    {
        var before = (await Reader.LoadSettings(default))[Depot].Revision;
        await Store(
            Sample.Fact(Depot, "p1", f => f.Price = new Price { Kind = PriceKind.AlignmentJob, Amount = 119.9, Currency = "EUR", From = "2026-01-01" }),
            Sample.Fact(Depot, "l1", f => f.DepthLimit = new DepthLimit { Jurisdiction = "DE", Limit = 3, DepthUnit = DepthUnit.Mm, From = "2026-01-01", Source = "operator" }),
            Sample.Fact(Depot, "t1", f => f.Tolerance = new Tolerance { VehicleClass = VehicleClass.Van, Quantity = Quantity.FrontTotalToe, PlusMinus = 12, AngleUnit = AngleUnit.Minutes, From = "2026-01-01" }),
            Sample.Fact(Depot, "g1", f => f.Setting = new Setting { Name = SettingName.HorizonWeeks, Value = 40, From = "2026-01-01" }));
        var settings = (await Reader.LoadSettings(default))[Depot];
        Assert.True(settings.Revision > before);
        Assert.Equal(119.9m, Assert.Single(settings.Prices).Body.Amount);
        Assert.Equal(0.2, Assert.Single(settings.Tolerances).Body.PlusMinus);
        Assert.Equal(40, Assert.Single(settings.Settings).Body.Value);
        var answer = Assert.Single(await Record(Survey("s1", 0, 40_000, 2.5, 2.6, 2.5)));
        Assert.Contains(answer.Remarks, r => r.Code == "below_limit" && r.Message.Contains("operator", StringComparison.Ordinal));
    }

    [Fact]
    public async Task The_fleet_is_read_as_its_vehicles_are()
    {
        await Store(Survey("s1", 0, 40_000, 7.1, 7.2, 7.0), Sample.Fitting(Depot, Van, "f1", Sample.Monday.AddDays(-3), "1L", 8));
        var one = await Load();
        var same = Assert.Single(await Reader.LoadFleet(default), v => v.Vehicle.VehicleId == Van);
        Assert.Equal(FactJsonOf(one), FactJsonOf(same));
    }

    [Fact]
    public async Task Two_senders_at_once_store_every_fact_once_and_count_every_revision()
    {
        var before = (await Load()).Revision;
        var batches = Enumerable.Range(0, 8).Select(i => Record(
            Sample.Fact(Depot, $"r{i % 4}", f => f.DriverReport = new DriverReport { VehicleId = Van, At = Sample.Monday.ToTimestamp(), Symptom = Symptom.Shakes, Note = $"{i % 4}" })));
        var answers = (await Task.WhenAll(batches)).SelectMany(a => a).ToList();
        Assert.All(answers, a => Assert.Equal(Outcome.Stored, a.Outcome));
        Assert.Equal(4, answers.Count(a => !a.Known));
        var after = await Load();
        Assert.Equal(4, after.DriverReports.Count);
        Assert.Equal(before + 4, after.Revision);
    }

    [Fact]
    public async Task Counts_grow_with_what_is_stored_held_and_refused()
    {
        var before = await Client.GetIngestStatusAsync(new GetIngestStatusRequest());
        await Record(Survey("s1", 0, 40_000, 7.1, 7.2, 7.0), Survey("s2", 1, 39_000, 7.0, 7.1, 6.9), Survey("s3", 2, 41_000, -1));
        var after = await Client.GetIngestStatusAsync(new GetIngestStatusRequest());
        Assert.Equal(before.Surveys + 2, after.Surveys);
        Assert.Equal(before.Readings + 24, after.Readings);
        Assert.Equal((before.Held + 1, before.Refused + 1), (after.Held, after.Refused));
        Assert.True(after.Due > 0);
    }

    [Fact]
    public async Task What_was_set_aside_is_listed_in_pages_newest_first()
    {
        await Record(Enumerable.Range(0, 5).Select(i => Survey($"bad{i}", i, 40_000, -1)).ToArray());
        var ids = new List<string>();
        var token = "";
        do
        {
            var page = await Client.ListSetAsideAsync(new ListSetAsideRequest { DepotId = Depot, PageSize = 2, PageToken = token });
            ids.AddRange(page.Items.Select(i => i.Id));
            token = page.NextPageToken;
        } while (token.Length > 0);
        Assert.Equal(["bad4", "bad3", "bad2", "bad1", "bad0"], ids);
    }

    [Fact]
    public async Task A_deadline_that_passes_is_told_so()
    {
        var error = await Assert.ThrowsAsync<RpcException>(async () =>
            await Client.GetIngestStatusAsync(new GetIngestStatusRequest(), deadline: DateTime.UtcNow.AddMilliseconds(-1)));
        Assert.Equal(StatusCode.DeadlineExceeded, error.StatusCode);
    }

    private Fact Withdrawal(string id, WithdrawalKind kind, string fact) =>
        Sample.Fact(Depot, id, f => f.Withdrawal = new Contracts.V1.Withdrawal { Kind = kind, FactId = fact, At = Sample.Monday.AddDays(8).ToTimestamp() });

    private static string FactJsonOf(VehicleFacts facts) => WearWatch.Storage.FactJson.Write(facts);
}
