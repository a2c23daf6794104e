using Google.Protobuf.WellKnownTypes;
using Grpc.Core;
using WearWatch.Contracts.V1;
using WearWatch.Storage.Facts;
using Remark = WearWatch.Contracts.V1.Remark;
using WithdrawalKind = WearWatch.Contracts.V1.WithdrawalKind;

namespace WearWatch.Services.Tests.Ingest;

/// <summary>The technician is asked while still at the vehicle, and the answer is a fact like any other.</summary>
public sealed class QuestionTests(PostgresFixture postgres) : IngestTest(postgres)
{
    private static readonly double[] s_then = [7.1, 7.4, 7.3, 6.9], s_now = [6.9, 7.2, 7.1, 6.7];

    private Fact Survey(string id, int week, double km, params double[] depths) => Sample.Survey(Depot, Van, id, Sample.Monday.AddDays(7 * week), km, depths);

    private Fact Answer(string id, string about, string answer) => Sample.Fact(Depot, id, f => f.Decision = new Contracts.V1.Decision
    {
        Kind = Contracts.V1.DecisionKind.Answered,
        VehicleId = Van,
        About = about,
        At = Sample.Monday.AddDays(60).ToTimestamp(),
        Answer = answer,
        Who = "MK",
    });

    private Fact Withdrawal(string id, WithdrawalKind kind, string fact) =>
        Sample.Fact(Depot, id, f => f.Withdrawal = new Contracts.V1.Withdrawal { Kind = kind, FactId = fact, At = Sample.Monday.AddDays(61).ToTimestamp() });

    private async Task<VehicleFacts> Load() => (await new FactReader(Server.Database.Analysis).LoadVehicle(Van, null, default))!;

    /// <summary>The questions that a changed second survey raises.</summary>
    private async Task<List<Remark>> Asked(Action<TreadSurvey> change, Outcome outcome = Outcome.Held)
    {
        await Store(Survey("s1", 0, 40_000, s_then));
        var answer = Assert.Single(await Record(Survey("s2", 4, 41_500, s_now).With(f => change(f.Survey))));
        Assert.Equal(outcome, answer.Outcome);
        return [.. answer.Remarks.Where(r => r.Choices.Count > 0)];
    }

    private static void Depth(TreadSurvey survey, int tyre, int groove, double depth) => survey.Tyres[tyre].Grooves[groove - 1].Depth = depth;

    [Fact]
    public async Task A_groove_that_grew_is_asked_about_in_plain_words_with_weighed_answers()
    {
        var question = Assert.Single(await Asked(s => Depth(s, 1, 2, 8.6)));
        Assert.Equal(("depth_grew", "survey.tyres[1].grooves[1].depth"), (question.Code, question.Field));
        Assert.Equal("Groove 2 of 1R reads 1.2 mm deeper than on 2 March 2026: typed wrong, or a new tyre?", question.Message);
        Assert.Contains(question.Choices, c => c.Answer.StartsWith("groove_mistyped 1R 2", StringComparison.Ordinal));
        Assert.Contains(question.Choices, c => c.Answer == "as_written 1R"); // the walk before may have been read on a wear bar
        Assert.Equal(question.Choices.Select(c => c.Probability).OrderDescending(), question.Choices.Select(c => c.Probability));
        Assert.All(question.Choices, c => Assert.EndsWith(".", c.Words));
    }

    [Fact]
    public async Task A_dropped_decimal_point_and_transposed_digits_name_what_was_meant()
    {
        var question = Assert.Single(await Asked(s => Depth(s, 2, 3, 1.7)));
        Assert.Equal(("depth_unlikely", "groove_mistyped 2L 3 7.1"), (question.Code, question.Choices[0].Answer));
        var refused = Assert.Single(await Record(Survey("s3", 5, 42_000, s_now).With(f => Depth(f.Survey, 0, 1, 68))));
        Assert.Contains(refused.Remarks, r => r.Code == "depth_out_of_range" && r.Message.Contains("was 6.8 mm meant", StringComparison.Ordinal));
    }

    [Fact]
    public async Task A_reading_on_a_wear_bar_is_asked_about()
    {
        var question = Assert.Single(await Asked(s => Depth(s, 3, 2, 5.6)));
        Assert.Equal("read_on_wear_bar 2R 2", question.Choices[0].Answer);
    }

    [Fact]
    public async Task A_new_tyre_is_asked_about()
    {
        var question = Assert.Single(await Asked(s => s.Tyres[0] = Sample.Tyre("1L", 8.9, 9.0, 9.0, 9.1)));
        Assert.Equal("tyre_changed 1L", question.Choices[0].Answer);
        Assert.Contains("a new tyre", question.Message);
    }

    /// <summary>A survey whose tyres all differ, so that exchanges can be told.</summary>
    private static Fact Distinct(string depot, string van, string id, int week, double km, double loss, Func<string, string>? from = null, double factor = 1, bool reversed = false)
    {
        var depths = new Dictionary<string, double[]> { ["1L"] = [7.9, 7.3, 6.8, 6.1], ["1R"] = [5.0, 5.2, 5.1, 4.9], ["2L"] = [6.1, 6.6, 6.5, 6.2], ["2R"] = [4.2, 4.0, 3.6, 3.2] };
        var survey = Sample.Survey(depot, van, id, Sample.Monday.AddDays(7 * week), km, 1);
        survey.Survey.Tyres.Clear();
        survey.Survey.Tyres.Add(depths.Keys.Select(p => Sample.Tyre(p, [.. (reversed ? depths[from?.Invoke(p) ?? p].Reverse() : depths[from?.Invoke(p) ?? p]).Select(d => Math.Round((d - loss) * factor, 2))])));
        return survey;
    }

    private async Task<Remark> Whole(Fact second)
    {
        await Store(Distinct(Depot, Van, "s1", 0, 40_000, 0));
        var answer = Assert.Single(await Record(second));
        Assert.Equal(Outcome.Held, answer.Outcome);
        return Assert.Single(answer.Remarks, r => r.Choices.Count > 0);
    }

    private static string Likeliest(Remark question) => question.Choices.First(c => c.Answer != "as_written").Answer;

    private static string Across(string p) => $"{p[0]}{(p[1] == 'L' ? 'R' : 'L')}";

    [Fact]
    public async Task Exchanged_sides_are_asked_about_on_paper_or_on_the_vehicle()
    {
        var question = await Whole(Distinct(Depot, Van, "s2", 4, 41_500, 0.2, Across));
        Assert.Equal("sides_swapped", question.Code);
        // Of two walks that contradict each other either may be the wrong one.
        Assert.Equal(["as_written", "moved sides_swapped", "sides_swapped"], question.Choices.Take(3).Select(c => c.Answer).Order(StringComparer.Ordinal));
        Assert.Contains("left and right exchanged on paper, or the tyres moved?", question.Message);
    }

    [Fact]
    public async Task Exchanged_axles_are_asked_about() =>
        Assert.Equal("axles_swapped 1 2", Likeliest(await Whole(Distinct(Depot, Van, "s2", 4, 41_500, 0.2, p => $"{(p[0] == '1' ? 2 : 1)}{p[1]}"))));

    [Fact]
    public async Task Thirty_seconds_written_as_mm_are_asked_about() =>
        Assert.Equal("thirty_seconds_taken_for_mm", Likeliest(await Whole(Distinct(Depot, Van, "s2", 4, 41_500, 0.2, factor: 1 / 0.79375))));

    [Fact]
    public async Task Grooves_counted_from_the_inboard_side_are_asked_about() =>
        Assert.Equal("grooves_reversed", Likeliest(await Whole(Distinct(Depot, Van, "s2", 4, 41_500, 0.2, reversed: true))));

    [Fact]
    public async Task An_answered_survey_is_let_through_and_read_as_answered()
    {
        await Whole(Distinct(Depot, Van, "s2", 4, 41_500, 0.2, Across));
        await Store(Answer("a1", "s2", "sides_swapped"));
        var facts = await Load();
        Assert.Empty(facts.HeldSurveys);
        Assert.DoesNotContain(await SetAside(Outcome.Held), item => item.Id == "s2");
        Assert.Equal([7.7, 7.1, 6.6, 5.9], facts.Surveys[1].Body.Tyres.Single(t => t.Position == Diagnosis.Facts.Position.Parse("1L")).Depths.Select(d => Math.Round(d.DepthMm, 3)));
        // The survey on record is the one that was sent, and the next one is held against what was answered.
        Assert.Equal(4.8, (await Client.GetFactAsync(new GetFactRequest { Id = "s2", DepotId = Depot })).Fact.Survey.Tyres[0].Grooves[0].Depth, 6);
        await Store(Distinct(Depot, Van, "s3", 8, 43_000, 0.4));
    }

    [Fact]
    public async Task The_next_walk_that_fits_the_one_that_waits_is_not_asked_the_same_again()
    {
        await Asked(s => s.Tyres[0] = Sample.Tyre("1L", 8.9, 9.0, 9.0, 9.1));
        var next = Assert.Single(await Store(Survey("s3", 8, 43_000, s_now).With(f => f.Survey.Tyres[0] = Sample.Tyre("1L", 8.7, 8.8, 8.8, 8.9))));
        Assert.Equal("fits_held", Assert.Single(next.Remarks).Code);
    }

    [Fact]
    public async Task An_answer_lets_a_later_walk_through_that_fits_what_was_answered()
    {
        await Whole(Distinct(Depot, Van, "s3", 8, 43_000, 0.4, Across));
        Assert.Equal(Outcome.Held, Assert.Single(await Record(Distinct(Depot, Van, "s2", 4, 41_500, 0.2, Across))).Outcome); // came late
        var answer = Assert.Single(await Store(Answer("a1", "s2", "moved sides_swapped")));
        Assert.Equal("judged_again", Assert.Single(answer.Remarks).Code);
        Assert.Equal(["s1", "s2", "s3"], (await Load()).Surveys.Select(s => s.FactId));
    }

    [Fact]
    public async Task An_answer_taken_back_leaves_the_survey_held_again()
    {
        await Whole(Distinct(Depot, Van, "s2", 4, 41_500, 0.2, Across));
        await Store(Answer("a1", "s2", "as_written"));
        Assert.Equal(["s1", "s2"], (await Load()).Surveys.Select(s => s.FactId));
        await Store(Withdrawal("w1", WithdrawalKind.Retract, "a1"));
        var facts = await Load();
        Assert.Equal(("s1", "s2"), (Assert.Single(facts.Surveys).FactId, Assert.Single(facts.HeldSurveys).FactId));
    }

    [Fact]
    public async Task A_survey_with_two_questions_waits_for_both_answers()
    {
        var questions = await Asked(s =>
        {
            Depth(s, 0, 1, 9.9);
            Depth(s, 3, 2, 2.7);
        });
        Assert.Equal(2, questions.Count);
        var first = Assert.Single(await Record(Answer("a1", "s2", questions[0].Choices[0].Answer)));
        Assert.Equal("still_open", Assert.Single(first.Remarks).Code);
        Assert.Single((await Load()).HeldSurveys);
        await Store(Answer("a2", "s2", questions[1].Choices[0].Answer));
        Assert.Empty((await Load()).HeldSurveys);
    }

    [Fact]
    public async Task An_answer_that_is_none_or_about_nothing_is_refused()
    {
        await Asked(s => Depth(s, 1, 2, 8.6));
        await Refused(Answer("a1", "s2", "perhaps"), "answer_unknown", "decision.answer");
        await Refused(Answer("a2", "s9", "as_written"), "unknown_fact", "decision.about");
        await Refused(Answer("a3", "s2", "tyre_changed 3L"), "unknown_position", "decision.answer");
        await Refused(Answer("a4", "s2", "as_written").With(f => f.Decision.VehicleId = ""), "missing", "decision.vehicle_id");
    }

    [Fact]
    public async Task A_fitting_recorded_late_lets_the_survey_through_that_it_explains()
    {
        await Asked(s => s.Tyres[0] = Sample.Tyre("1L", 8.9, 9.0, 9.0, 9.1));
        var answer = Assert.Single(await Store(Sample.Fitting(Depot, Van, "f1", Sample.Monday.AddDays(10), "1L", 9)));
        Assert.Equal("judged_again", Assert.Single(answer.Remarks).Code);
        Assert.Equal(["s1", "s2"], (await Load()).Surveys.Select(s => s.FactId));
    }

    [Fact]
    public async Task A_fitting_of_another_tyre_lets_nothing_through()
    {
        await Asked(s => s.Tyres[0] = Sample.Tyre("1L", 8.9, 9.0, 9.0, 9.1));
        await Store(Sample.Fitting(Depot, Van, "f1", Sample.Monday.AddDays(10), "2R", 9));
        Assert.Single((await Load()).HeldSurveys);
    }

    [Fact]
    public async Task Taking_back_the_survey_that_was_wrong_lets_the_right_one_through()
    {
        await Store(Survey("s1", 0, 40_000, s_then));
        await Record(Survey("s3", 5, 42_000, 9.0, 9.1, 9.0, 8.9));
        Assert.Equal("s3", Assert.Single((await Load()).HeldSurveys).FactId);
        // The walk that it was held against was another vehicle's.
        await Store(Withdrawal("w1", WithdrawalKind.Retract, "s1"));
        Assert.Equal(["s3"], (await Load()).Surveys.Select(s => s.FactId));
    }

    [Fact]
    public async Task A_counter_that_ran_back_is_asked_about_and_can_be_said_to_be_new()
    {
        var question = Assert.Single(await Asked(s => s.Distance = 900));
        Assert.Equal("distance_ran_back", question.Code);
        Assert.Contains(question.Choices, c => c.Answer == "counter_replaced");
        await Store(Answer("a1", "s2", "counter_replaced"));
        Assert.True((await Load()).Surveys[1].Body.CounterReplaced);
    }

    [Fact]
    public async Task Two_surveys_at_one_time_that_differ_are_asked_about()
    {
        await Store(Survey("s1", 0, 40_000, s_then));
        await Store(Survey("same", 0, 40_000, s_then));
        var answer = Assert.Single(await Record(Survey("s2", 0, 40_000, s_then).With(f => f.Survey.Tyres[2] = Sample.Tyre("2L", 4.9, 5.2, 5.1, 4.8))));
        Assert.Equal(Outcome.Held, answer.Outcome);
        var question = Assert.Single(answer.Remarks, r => r.Choices.Count > 0);
        Assert.Equal("same_time_differs", question.Code);
        Assert.Contains("than in the other survey of the same time", question.Message);
    }

    [Fact]
    public async Task A_tyre_that_the_last_walk_did_not_reach_is_held_against_the_walk_before()
    {
        await Store(Survey("s1", 0, 40_000, s_then), Survey("s2", 4, 41_500, s_now).With(f =>
        {
            f.Survey.Finished = false;
            f.Survey.Tyres[3] = new TyreReadings { Position = "2R", NotReached = "against a wall" };
        }));
        var answer = Assert.Single(await Record(Survey("s3", 8, 43_000, s_now).With(f => Depth(f.Survey, 3, 1, 9.4))));
        Assert.Equal("survey.tyres[3].grooves[0].depth", Assert.Single(answer.Remarks, r => r.Choices.Count > 0).Field);
    }

    [Fact]
    public async Task What_was_asked_is_asked_again_when_the_survey_is_sent_again_and_listed_while_it_waits()
    {
        var question = Assert.Single(await Asked(s => Depth(s, 1, 2, 8.6)));
        var again = Assert.Single(await Record(Survey("s2", 4, 41_500, s_now).With(f => Depth(f.Survey, 1, 2, 8.6))));
        Assert.True(again.Known);
        Assert.Equal(question, Assert.Single(again.Remarks, r => r.Choices.Count > 0));
        Assert.Equal(question, Assert.Single(Assert.Single(await SetAside(Outcome.Held)).Remarks, r => r.Choices.Count > 0));
        Assert.Equal(question, Assert.Single((await Client.GetFactAsync(new GetFactRequest { Id = "s2", DepotId = Depot })).Remarks, r => r.Choices.Count > 0));
    }

    [Fact]
    public async Task A_fact_that_is_not_there_or_is_there_twice_is_said_so()
    {
        var missing = await Assert.ThrowsAsync<RpcException>(async () => await Client.GetFactAsync(new GetFactRequest { Id = "nothing" }));
        Assert.Equal(StatusCode.NotFound, missing.StatusCode);
        var other = $"{Depot}o";
        await Store(Sample.Depot(other), Sample.Van(other, $"{other}-V"), Sample.Survey(other, $"{other}-V", "both" + Depot, Sample.Monday, 1, 7), Survey("both" + Depot, 0, 1, 7));
        var twice = await Assert.ThrowsAsync<RpcException>(async () => await Client.GetFactAsync(new GetFactRequest { Id = "both" + Depot }));
        Assert.Equal(StatusCode.InvalidArgument, twice.StatusCode);
    }

    [Fact]
    public async Task A_row_that_could_not_be_read_is_kept_until_it_comes_corrected_or_is_laid_to_rest()
    {
        Fact Row(string id) => Sample.Fact(Depot, id, f => f.UnreadRow = new UnreadRow { File = "surveys.csv", Line = 7, Column = "depth", Reason = "'7,1' has a decimal comma", Text = "s1,V1,\"7,1\"" });
        var answer = Assert.Single(await Record(Row("s1")));
        Assert.Equal(Outcome.Refused, answer.Outcome);
        Assert.Equal("surveys.csv line 7, depth: '7,1' has a decimal comma", Assert.Single(answer.Remarks).Message);
        await Record(Row("readings.csv:9"));
        Assert.Equal(["readings.csv:9", "s1"], (await SetAside(Outcome.Refused)).Select(i => i.Id).Order(StringComparer.Ordinal));
        await Store(Survey("s1", 0, 40_000, s_then));
        await Store(Withdrawal("w1", WithdrawalKind.Retract, "readings.csv:9"));
        Assert.Empty(await SetAside(Outcome.Refused));
    }
}
