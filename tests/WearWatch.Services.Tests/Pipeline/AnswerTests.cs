using Google.Protobuf.WellKnownTypes;
using WearWatch.Contracts.V1;
using WearWatch.Output;

namespace WearWatch.Services.Tests.Pipeline;

/// <summary>What a technician answers, releases, corrects or takes back shows in the next diagnosis; and what one walk may say.</summary>
public sealed class AnswerTests(SmallDepot depot) : IClassFixture<SmallDepot>
{
    private const string Yard = SmallDepot.Depot;

    private static TyreDiagnosis Tyre(GetVehicleReportResponse report, string position) => report.Diagnosis.Tyres.Single(t => t.Position == position);

    private static Fact Withdrawal(string id, WithdrawalKind kind, string fact) =>
        Sample.Fact(Yard, id, f => f.Withdrawal = new Withdrawal { Kind = kind, FactId = fact, At = Sample.Monday.AddDays(201).ToTimestamp() });

    /// <summary>A van of three walks whose fourth is changed; what was asked about that.</summary>
    private async Task<Remark> Asked(string vehicle, Action<TreadSurvey> change)
    {
        await depot.Van(vehicle, 3);
        var answer = Assert.Single(await depot.Record(SmallDepot.Walk(vehicle, 3).With(f => change(f.Survey))));
        Assert.Equal(Outcome.Held, answer.Outcome);
        return answer.Remarks.First(r => r.Choices.Count > 0);
    }

    private static void All(TyreReadings tyre, double depth)
    {
        foreach (var groove in tyre.Grooves) groove.Depth = depth;
    }

    [Fact]
    public async Task Without_an_answer_the_likeliest_explanation_is_carried_on_and_said()
    {
        await Asked("A1", s =>
        {
            foreach (var t in s.Tyres) t.Position = $"{t.Position[0]}{(t.Position[1] == 'L' ? 'R' : 'L')}";
        });
        var report = await depot.Report("A1");
        Assert.Contains(report.Diagnosis.SurveyNotes, n => n.SurveyId == "A1-s3" && n.Note.Contains("Left and right look exchanged", StringComparison.Ordinal));
        Assert.InRange(Tyre(report, "1L").RateMmPer1000Km.Value, 0.1, 0.2); // 0.35 mm in 2 400 km
    }

    [Fact]
    public async Task An_answer_of_a_new_tyre_begins_a_new_tyre()
    {
        var question = await Asked("A2", s => All(s.Tyres[0], 9.0));
        Assert.Equal("tyre_changed 1L", question.Choices[0].Answer);
        await depot.Record(SmallDepot.Answer("A2-a", "A2", "A2-s3", question.Choices[0].Answer));
        var report = await depot.Report("A2");
        Assert.Single(Tyre(report, "1L").Points);
        Assert.Equal(4, Tyre(report, "1R").Points.Count);
        Assert.Contains(report.Diagnosis.SurveyNotes, n => n.SurveyId == "A2-s3" && n.Note.Contains("answered by MK", StringComparison.Ordinal) && n.Note.Contains("Another tyre was put on at 1L.", StringComparison.Ordinal));
    }

    [Fact]
    public async Task An_answer_of_a_mistyped_groove_takes_what_was_meant_and_a_reading_below_the_limit_with_it()
    {
        var question = await Asked("A3", s => s.Tyres[0].Grooves[1].Depth = 0.7); // 6.9 was read; 7.0 was meant
        Assert.StartsWith("groove_mistyped 1L 2", question.Choices[0].Answer);
        Assert.Contains((await depot.Report("A3")).BelowLimit, t => t.Position == "1L" && t.Held);
        await depot.Record(SmallDepot.Answer("A3-a", "A3", "A3-s3", "groove_mistyped 1L 2 6.9"));
        var report = await depot.Report("A3");
        Assert.Empty(report.BelowLimit);
        Assert.Equal(6.9, Tyre(report, "1L").Grooves.Single(g => g.Groove == 2).DepthMm, 6);
    }

    [Fact]
    public async Task What_is_said_to_be_as_written_is_not_explained_any_further()
    {
        await Asked("A4", s =>
        {
            foreach (var t in s.Tyres) t.Position = $"{t.Position[0]}{(t.Position[1] == 'L' ? 'R' : 'L')}";
        });
        await depot.Record(SmallDepot.Answer("A4-a", "A4", "A4-s3", "as_written"));
        Assert.DoesNotContain((await depot.Report("A4")).Diagnosis.SurveyNotes, n => n.SurveyId == "A4-s3" && n.Note.Contains("exchanged", StringComparison.Ordinal));
    }

    [Fact]
    public async Task A_corrected_survey_takes_the_place_of_the_held_one()
    {
        await Asked("A5", s => s.Tyres[0].Grooves[1].Depth = 16.9);
        await depot.Record(SmallDepot.Walk("A5", 3).With(f => (f.Id, f.Replaces) = ("A5-s3b", "A5-s3")));
        var tyre = Tyre(await depot.Report("A5"), "1L");
        Assert.Equal(("A5-s3b", 6.8), (tyre.SurveyIds[^1], Math.Round(tyre.Grooves[1].DepthMm, 6)));
        Assert.DoesNotContain("A5-s3", tyre.SurveyIds);
    }

    [Fact]
    public async Task A_retracted_survey_is_gone_from_the_figures()
    {
        await Asked("A6", s => s.Tyres[0].Grooves[1].Depth = 16.9);
        await depot.Record(Withdrawal("A6-w", WithdrawalKind.Retract, "A6-s3"));
        Assert.Equal("A6-s2", Tyre(await depot.Report("A6"), "1L").SurveyIds[^1]);
    }

    [Fact]
    public async Task A_released_survey_counts_as_it_is()
    {
        await Asked("A7", s => s.Distance = 900);
        await depot.Record(Withdrawal("A7-w", WithdrawalKind.Release, "A7-s3"));
        Assert.Equal("A7-s3", Tyre(await depot.Report("A7"), "1L").SurveyIds[^1]);
        Assert.DoesNotContain((await depot.Installation.Ingest.ListSetAsideAsync(new() { Outcome = Outcome.Held, PageSize = 500 })).Items, i => i.Id == "A7-s3");
    }

    [Fact]
    public async Task A_fitting_recorded_late_replaces_what_was_inferred_and_everything_since_is_judged_again()
    {
        await depot.Van("A8", 3);
        await depot.Record(SmallDepot.Walk("A8", 3).With(f => All(f.Survey.Tyres[0], 9.0)), SmallDepot.Walk("A8", 4).With(f => All(f.Survey.Tyres[0], 8.6)), SmallDepot.Walk("A8", 5).With(f => All(f.Survey.Tyres[0], 8.3)));
        var before = await depot.Report("A8");
        Assert.Contains(before.Diagnosis.SurveyNotes, n => n.Note.Contains("1L seems to have been changed without a record", StringComparison.Ordinal));
        var late = Assert.Single(await depot.Record(Sample.Fitting(Yard, "A8", "A8-f", Sample.Monday.AddDays(70), "1L", 9.1)));
        Assert.Contains(late.Remarks, r => r.Code == "judged_again");
        var after = await depot.Report("A8");
        Assert.DoesNotContain(after.Diagnosis.SurveyNotes, n => n.Note.Contains("1L seems", StringComparison.Ordinal));
        Assert.Equal(3, Tyre(after, "1L").Points.Count);
    }

    [Fact]
    public async Task One_walk_tells_depth_limit_and_a_borrowed_distance_but_no_rate_of_its_own()
    {
        await depot.Van("B1", 1);
        var report = await depot.Report("B1");
        Assert.All(report.Diagnosis.Tyres, t =>
        {
            Assert.True(t.RateBorrowed);
            Assert.Null(t.EdgeSlopeMmPer1000Km);
            Assert.True(t.RemainingKm.High > 1.5 * t.RemainingKm.Low);
        });
        Assert.Equal(1.6, Tyre(report, "1L").LimitMm);
        Assert.Contains("checked 20", Tyre(report, "1L").LimitSource); // the date of the limit
        Assert.DoesNotContain(report.Diagnosis.Findings, f => f.Kind is "fast_wear" or "steering_pull");
    }

    [Fact]
    public async Task Half_a_walk_of_single_depths_and_a_tyre_not_reached_are_taken()
    {
        var walk = SmallDepot.Walk("B2", 0).With(f =>
        {
            f.Survey.Finished = false;
            f.Survey.Resolution = 1;
            f.Survey.Tyres.Clear();
            f.Survey.Tyres.Add(new TyreReadings { Position = "1L", Grooves = { new GrooveDepth { Groove = 0, Depth = 6 } } });
            f.Survey.Tyres.Add(new TyreReadings { Position = "1R", NotReached = "against a wall" });
        });
        var answers = await depot.Record(Sample.Van(Yard, "B2"), walk);
        Assert.All(answers, a => Assert.Equal(Outcome.Stored, a.Outcome));
        Assert.Contains(answers[1].Remarks, r => r.Code == "not_reached");
        var report = await depot.Report("B2");
        Assert.Equal((6, true), (Tyre(report, "1L").DepthMm.Value, Tyre(report, "1L").RateBorrowed));
        Assert.All(new[] { "1R", "2L", "2R" }, p => Assert.True(Tyre(report, p).DepthMm is null && Tyre(report, p).RemainingKm is null));
    }

    [Fact]
    public async Task A_counter_that_was_reset_and_a_vehicle_without_any_fitting_still_have_an_honest_distance()
    {
        await depot.Van("B3", 3);
        var reset = SmallDepot.Walk("B3", 3).With(f => f.Survey.Distance = 2_000);
        Assert.Equal(Outcome.Held, Assert.Single(await depot.Record(reset)).Outcome);
        await depot.Record(SmallDepot.Answer("B3-a", "B3", "B3-s3", "counter_replaced"), SmallDepot.Walk("B3", 4).With(f => f.Survey.Distance = 4_400));
        var tyre = Tyre(await depot.Report("B3"), "1L");
        Assert.Equal(5, tyre.Points.Count);
        Assert.Equal(tyre.Points.Select(p => p.DistanceKm).Order(), tyre.Points.Select(p => p.DistanceKm));
        Assert.InRange(tyre.RateMmPer1000Km.Value, 0.1, 0.2);
    }

    [Fact]
    public async Task The_operators_own_limit_and_change_at_depth_are_dated_facts_and_shown_with_dates()
    {
        await depot.Van("C1", 5);
        await depot.Record(
            Sample.Fact(Yard, "C1-limit", f => f.DepthLimit = new DepthLimit { Jurisdiction = "DE", VehicleClass = VehicleClass.Van, Axle = 2, Limit = 2, DepthUnit = DepthUnit.Mm, From = "2026-02-01", Source = "fleet handbook 7" }),
            Sample.Fact(Yard, "C1-change", f => f.Setting = new Setting { Name = SettingName.ChangeAtDepth, VehicleClass = VehicleClass.Van, Value = 3, From = "2026-02-01" }));
        var report = await depot.Report("C1");
        var rear = Tyre(report, "2L");
        Assert.Equal((2, "fleet handbook 7 (entered by the operator, in force from 2026-02-01)"), (rear.LimitMm, rear.LimitSource));
        Assert.Equal(1.6, Tyre(report, "1L").LimitMm);
        Assert.Equal(3, rear.ChangeAtMm);
        Assert.True(rear.ToChangeKm.Value < rear.RemainingKm.Value);
        Assert.True(string.CompareOrdinal(rear.ChangeOn.Earliest, rear.ChangeOn.Likely) <= 0 && string.CompareOrdinal(rear.ChangeOn.Likely, rear.LimitOn.Likely) < 0 && string.CompareOrdinal(rear.LimitOn.Likely, rear.LimitOn.Latest) < 0);
        var json = Json.Vehicle(report)["tyres"]!.AsArray().Single(t => (string)t!["position"]! == "2L")!;
        Assert.Equal(3, (double)json["change_at_mm"]!);
        Assert.Equal(rear.LimitOn.Likely, (string)json["limit_on"]!["likely"]!);
        var screen = string.Join('\n', TyreTable.Lines(report.Diagnosis));
        Assert.Contains("to change at 3.0 mm", screen);
        Assert.Contains("Limit 2.0 mm (2L, 2R): fleet handbook 7 (entered by the operator, in force from 2026-02-01).", screen);
        Assert.All(TyreTable.Lines(report.Diagnosis).Where(l => !l.StartsWith("Limit", StringComparison.Ordinal)), l => Assert.True(l.Length <= 80, l));
    }

    [Fact]
    public async Task The_past_is_told_without_the_answers_that_came_later()
    {
        var question = await Asked("C2", s => All(s.Tyres[0], 9.0));
        await depot.Record(SmallDepot.Answer("C2-a", "C2", "C2-s3", question.Choices[0].Answer));
        await depot.Report("C2");
        var past = await depot.Installation.Analysis.GetDiagnosisAsync(new GetDiagnosisRequest { VehicleId = "C2", AsOf = "2026-06-01" });
        Assert.DoesNotContain(past.Diagnosis.SurveyNotes, n => n.Note.Contains("answered", StringComparison.Ordinal));
        Assert.Equal("2026-06-01", past.Diagnosis.AsOf);
    }

    [Fact]
    public async Task The_study_of_hands_and_gauges_is_published_and_says_where_it_rests_on_few()
    {
        await depot.Van("D1", 3);
        await depot.Report("D1");
        var study = await depot.Installation.Analysis.GetReaderStudyAsync(new());
        Assert.True(study.FleetFit > 0);
        Assert.All(study.Technicians.Concat(study.Gauges), r =>
        {
            Assert.InRange(r.Bias.Value, r.Bias.Low, r.Bias.High);
            Assert.InRange(r.Repeatability.Value, r.Repeatability.Low, r.Repeatability.High);
            Assert.Equal("mm", r.Bias.Unit);
            Assert.True(r.Few == r.Surveys < 8);
        });
    }
}
