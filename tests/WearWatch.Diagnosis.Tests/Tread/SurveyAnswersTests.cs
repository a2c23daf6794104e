using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Tread;

namespace WearWatch.Diagnosis.Tests.Tread;

/// <summary>Answers in words, and what a survey says once it is answered.</summary>
public class SurveyAnswersTests
{
    private static readonly DateTimeOffset s_at = new(2026, 4, 1, 8, 0, 0, TimeSpan.Zero);

    private static readonly TreadSurvey s_survey = new()
    {
        VehicleId = "V",
        At = s_at,
        DistanceKm = 1000,
        DistanceSource = DistanceSource.Odometer,
        Tyres =
        [
            new() { Position = Position.Parse("1L"), Depths = [new(1, 7), new(2, 6), new(3, 5)] },
            new() { Position = Position.Parse("1R"), Depths = [new(1, 4), new(2, 4), new(3, 4)] },
        ],
    };

    private static TreadSurvey Read(string answer) => SurveyAnswers.Read(s_survey, ExplanationText.ReadAll(answer)!)!;

    private static double[] Depths(TreadSurvey survey, string position) => [.. survey.Tyres.Single(t => t.Position == Position.Parse(position)).Depths.OrderBy(d => d.Groove).Select(d => d.DepthMm)];

    [Theory]
    [InlineData("as_written")]
    [InlineData("as_written 1L")]
    [InlineData("sides_swapped")]
    [InlineData("moved sides_swapped")]
    [InlineData("axle_sides_swapped 2")]
    [InlineData("moved axles_swapped 1 3")]
    [InlineData("positions_exchanged 2LO 2LI")]
    [InlineData("grooves_reversed")]
    [InlineData("grooves_reversed left")]
    [InlineData("grooves_reversed 1R")]
    [InlineData("groove_mistyped 2LO 2")]
    [InlineData("groove_mistyped 2LO 2 7.1")]
    [InlineData("read_on_wear_bar 1L 3")]
    [InlineData("tyre_changed 1L")]
    [InlineData("counter_replaced")]
    [InlineData("other_vehicle")]
    public void An_answer_is_written_as_it_is_read(string answer) => Assert.Equal(answer, ExplanationText.Write(ExplanationText.Read(answer)!));

    [Theory]
    [InlineData("")]
    [InlineData("yes")]
    [InlineData("tyre_changed")]
    [InlineData("tyre_changed 13L")]
    [InlineData("moved tyre_changed 1L")]
    [InlineData("groove_mistyped 1L 25")]
    [InlineData("groove_mistyped 1L 2 99")]
    [InlineData("axles_swapped 1 1")]
    [InlineData("as_written; nonsense")]
    [InlineData("sides_swapped 1L")]
    public void What_is_no_answer_is_not_understood(string text) => Assert.Null(ExplanationText.ReadAll(text));

    [Fact]
    public void Sides_exchanged_on_paper_are_read_the_other_way_round_and_nothing_is_fitted()
    {
        Assert.Equal([4, 4, 4], Depths(Read("sides_swapped"), "1L"));
        Assert.Empty(SurveyAnswers.Fittings(s_survey, ExplanationText.ReadAll("sides_swapped")!, null, []));
    }

    [Fact]
    public void Tyres_that_changed_sides_leave_the_survey_as_it_is_and_are_fittings()
    {
        Assert.Equal([7, 6, 5], Depths(Read("moved sides_swapped"), "1L"));
        var fittings = SurveyAnswers.Fittings(s_survey, ExplanationText.ReadAll("moved sides_swapped")!, null, []).ToList();
        Assert.Equal([("1L", "1R"), ("1R", "1L")], fittings.Select(f => (f.Position.ToString(), f.FromPosition!.Value.ToString())));
        Assert.All(fittings, f => Assert.True(f.At < s_at && f.Event == FittingEvent.Moved));
    }

    [Fact]
    public void A_mistyped_groove_is_left_out_or_reads_what_was_meant()
    {
        Assert.Equal([7, 5], Depths(Read("groove_mistyped 1L 2"), "1L"));
        Assert.Equal([7, 6.6, 5], Depths(Read("groove_mistyped 1L 2 6.6"), "1L"));
        Assert.Equal([4, 4, 4], Depths(Read("groove_mistyped 1L 2 6.6"), "1R"));
    }

    [Fact]
    public void A_reading_on_a_wear_bar_is_left_out_and_never_filled_in() => Assert.Equal([7, 6], Depths(Read("read_on_wear_bar 1L 3"), "1L"));

    [Fact]
    public void Grooves_counted_from_the_wrong_side_are_turned_round_where_it_was_said()
    {
        Assert.Equal([5, 6, 7], Depths(Read("grooves_reversed 1L"), "1L"));
        Assert.Equal([5, 6, 7], Depths(Read("grooves_reversed left"), "1L"));
    }

    [Fact]
    public void Thirty_seconds_become_mm() => Assert.Equal([7 * 0.79375, 6 * 0.79375, 5 * 0.79375], Depths(Read("thirty_seconds_taken_for_mm"), "1L"));

    [Fact]
    public void Another_vehicles_survey_is_left_out() => Assert.Null(SurveyAnswers.Read(s_survey, ExplanationText.ReadAll("other_vehicle")!));

    [Fact]
    public void Distance_answers_touch_no_depth()
    {
        Assert.True(Read("counter_replaced").CounterReplaced);
        Assert.Null(Read("distance_mistyped").DistanceKm);
        Assert.Equal([7, 6, 5], Depths(Read("distance_mistyped"), "1L"));
    }

    [Fact]
    public void A_late_record_of_the_same_tyre_replaces_what_was_answered()
    {
        var late = new FittingRecord { VehicleId = "V", At = s_at.AddDays(-3), Event = FittingEvent.Fitted, Position = Position.Parse("1L"), NewDepthMm = 8 };
        Assert.Single(SurveyAnswers.Fittings(s_survey, ExplanationText.ReadAll("tyre_changed 1L")!, s_at.AddDays(-10), []));
        Assert.Empty(SurveyAnswers.Fittings(s_survey, ExplanationText.ReadAll("tyre_changed 1L")!, s_at.AddDays(-10), [late]));
        Assert.Single(SurveyAnswers.Fittings(s_survey, ExplanationText.ReadAll("tyre_changed 1R")!, s_at.AddDays(-10), [late]));
    }

    [Fact]
    public void A_later_answer_replaces_an_earlier_one_about_the_same_tyre_only()
    {
        static string All(params string[] decisions) => string.Join("; ", SurveyAnswers.Merge(decisions.Select(d => ExplanationText.ReadAll(d)!)).Select(ExplanationText.Write));
        Assert.Equal("tyre_changed 1R; groove_mistyped 1L 2", All("tyre_changed 1L; tyre_changed 1R", "groove_mistyped 1L 2"));
        Assert.Equal("as_written", All("tyre_changed 1L", "as_written"));
    }
}
