using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Tread;

namespace WearWatch.Diagnosis.Tests.Tread;

public class SurveyCheckTests
{
    private static readonly DateTimeOffset s_then = new(2026, 3, 3, 8, 0, 0, TimeSpan.Zero), s_now = s_then.AddDays(56);

    private static readonly Vehicle s_truck = new()
    {
        VehicleId = "T1",
        Depot = "d",
        Class = VehicleClass.Truck,
        GrossMassKg = 18000,
        KmPerWeek = 2000,
        Axles = [new() { Number = 1, Steered = true }, new() { Number = 2, Driven = true, Duals = true }],
    };

    private static readonly Dictionary<string, double> s_depths = new() { ["1L"] = 11, ["1R"] = 9, ["2LO"] = 15, ["2LI"] = 13.6, ["2RI"] = 14.4, ["2RO"] = 12.2 };

    private static TyreReadings Tyre(string position, double mean, double edge = 0) => new()
    {
        Position = Position.Parse(position),
        Depths = [.. Enumerable.Range(1, 4).Select(g => new GrooveDepth(g, Math.Round(mean - edge / 2 * TreadShape.Across(g, 4), 1)))],
    };

    private static TreadSurvey Survey(DateTimeOffset at, Func<string, string>? where = null, double loss = 0, double km = 100_000, double factor = 1) => new()
    {
        VehicleId = "T1",
        At = at,
        DistanceKm = km,
        DistanceSource = DistanceSource.Odometer,
        Tyres = [.. s_depths.Select(d => Tyre(d.Key, (s_depths[where?.Invoke(d.Key) ?? d.Key] - loss) * factor, d.Key[1] == 'L' ? 0.6 : 0))],
    };

    private static IReadOnlyList<ReadingIssue> Check(TreadSurvey survey, TreadSurvey? previous = null, IReadOnlyList<FittingRecord>? fittings = null, double? newDepth = 16) =>
        SurveyCheck.Check(survey, s_truck, previous is null ? [] : [previous], fittings ?? [], _ => newDepth, p => DepthLimits.For("DE", s_truck, p, false, DateOnly.FromDateTime(survey.At.UtcDateTime), []));

    private static TreadSurvey With(TreadSurvey survey, int tyre, Func<TyreReadings, TyreReadings> change) =>
        survey with { Tyres = [.. survey.Tyres.Select((t, i) => i == tyre ? change(t) : t)] };

    private static TreadSurvey WithDepth(TreadSurvey survey, int tyre, int depth, double mm) =>
        With(survey, tyre, t => t with { Depths = [.. t.Depths.Select((d, j) => j == depth ? d with { DepthMm = mm } : d)] });

    [Fact]
    public void A_plausible_survey_gets_no_issue() =>
        Assert.Empty(Check(Survey(s_now, loss: 0.8, km: 116_000), Survey(s_then)));

    [Theory]
    [InlineData(double.NaN, "depth_not_a_number")]
    [InlineData(double.PositiveInfinity, "depth_not_a_number")]
    [InlineData(-0.1, "depth_negative")]
    [InlineData(64, "depth_out_of_range")]
    public void An_impossible_depth_is_refused_and_its_field_named(double mm, string code)
    {
        var issue = Assert.Single(Check(WithDepth(Survey(s_now), 3, 1, mm)), i => i.Weight == IssueWeight.Refuse);
        Assert.Equal((code, "tyres[3].depths[1].depth_mm"), (issue.Code, issue.Field));
        Assert.Equal((Position.Parse("2LI"), 2), (issue.Position, issue.Groove));
    }

    [Fact]
    public void What_cannot_be_is_refused()
    {
        void Refused(string code, TreadSurvey survey) => Assert.Contains(Check(survey), i => i.Code == code && i.Weight == IssueWeight.Refuse);
        Refused("time_absent", Survey(s_now) with { At = default });
        Refused("empty_survey", Survey(s_now) with { Tyres = [] });
        Refused("unknown_position", Survey(s_now) with { Tyres = [Tyre("2L", 10)] });
        Refused("unknown_position", Survey(s_now) with { Tyres = [Tyre("3L", 10)] });
        Refused("position_twice", Survey(s_now) with { Tyres = [Tyre("1L", 10), Tyre("1L", 10)] });
        Refused("groove_out_of_range", With(Survey(s_now), 0, t => t with { Depths = [new(25, 8)] }));
        Refused("groove_out_of_range", With(Survey(s_now), 0, t => t with { Depths = [new(-1, 8)] }));
        Refused("distance_not_a_number", Survey(s_now) with { DistanceKm = double.NaN });
    }

    [Fact]
    public void A_groove_that_grew_is_held_with_the_question_a_technician_can_answer()
    {
        var issue = Assert.Single(Check(WithDepth(Survey(s_now, loss: 0.8, km: 116_000), 2, 1, 16.4), Survey(s_then), newDepth: 22), i => i.Weight == IssueWeight.Hold);
        Assert.Equal("depth_grew", issue.Code);
        Assert.Equal("tyres[2].depths[1].depth_mm", issue.Field);
        Assert.StartsWith("Groove 2 of 2LO reads", issue.Message);
        Assert.EndsWith("deeper than on 3 March 2026: typed wrong, or a new tyre?", issue.Message);
    }

    [Fact]
    public void A_recorded_fitting_explains_growth()
    {
        var fitted = new FittingRecord { VehicleId = "T1", At = s_then.AddDays(20), Event = FittingEvent.Fitted, Position = Position.Parse("1R") };
        var survey = With(Survey(s_now, loss: 0.8, km: 116_000), 1, _ => Tyre("1R", 15.5));
        Assert.Contains(Check(survey, Survey(s_then)), i => i.Code == "depth_grew");
        Assert.Empty(Check(survey, Survey(s_then), [fitted]));
    }

    [Fact]
    public void Swapped_sides_are_held_as_such()
    {
        static string Other(string p) => p.Contains('L') ? p.Replace('L', 'R') : p.Replace('R', 'L');
        var issue = Assert.Single(Check(Survey(s_now, Other, 0.8, 116_000), Survey(s_then)), i => i.Weight == IssueWeight.Hold);
        Assert.Equal("sides_swapped", issue.Code);
    }

    [Fact]
    public void Thirty_seconds_written_as_mm_are_held_as_such()
    {
        var issue = Assert.Single(Check(Survey(s_now, loss: 0.8, km: 116_000, factor: 1 / 0.79375), Survey(s_then), newDepth: 22), i => i.Weight == IssueWeight.Hold);
        Assert.Equal("unit_mix_up", issue.Code);
        Assert.Contains("32nds", issue.Message);
    }

    [Fact]
    public void A_distance_that_ran_back_is_held_unless_the_counter_was_replaced()
    {
        var survey = Survey(s_now, loss: 0.4, km: 2_000);
        Assert.Contains(Check(survey, Survey(s_then)), i => i is { Code: "distance_ran_back", Field: "distance_km", Weight: IssueWeight.Hold });
        Assert.DoesNotContain(Check(survey with { CounterReplaced = true }, Survey(s_then)), i => i.Field == "distance_km");
        Assert.Contains(Check(Survey(s_now, km: 1_160_000), Survey(s_then)), i => i.Code == "distance_jumped");
    }

    [Fact]
    public void A_depth_above_new_is_held() =>
        Assert.Contains(Check(WithDepth(Survey(s_now), 0, 0, 17.4)), i => i is { Code: "depth_above_new", Weight: IssueWeight.Hold });

    [Fact]
    public void Below_the_limit_is_told_even_when_the_survey_is_held()
    {
        var survey = WithDepth(WithDepth(Survey(s_now), 0, 0, 17.4), 1, 3, 1.2);
        var issues = Check(survey);
        Assert.Contains(issues, i => i.Weight == IssueWeight.Hold);
        var below = Assert.Single(issues, i => i.Code == "below_limit");
        Assert.Equal((Position.Parse("1R"), 4), (below.Position, below.Groove));
        Assert.Contains("StVZO", below.Message);
    }

    [Fact]
    public void Cord_or_bulge_is_told_at_once_and_a_missed_tyre_too()
    {
        var survey = With(With(Survey(s_now), 0, t => t with { Seen = [Seen.Cord] }), 3, t => t with { Depths = [], NotReached = "snow" });
        Assert.Contains(Check(survey), i => i is { Code: "unsafe_seen", Weight: IssueWeight.Tell });
        Assert.Contains(Check(survey), i => i is { Code: "not_reached", Weight: IssueWeight.Tell });
    }

    [Fact]
    public void One_rounded_depth_is_taken_and_told_honestly()
    {
        var issues = Check(With(Survey(s_now), 0, t => t with { Depths = [new(0, 10)] }));
        Assert.Equal("one_groove_only", Assert.Single(issues).Code);
    }
}
