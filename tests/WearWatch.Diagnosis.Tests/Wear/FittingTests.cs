using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Tread;
using WearWatch.Diagnosis.Wear;

namespace WearWatch.Diagnosis.Tests.Wear;

public class FittingTests
{
    private static readonly DateTimeOffset s_first = new(2026, 1, 5, 7, 0, 0, TimeSpan.Zero);
    private static readonly DateOnly s_asOf = new(2026, 12, 1);
    private static readonly Position s_left = new(1, Side.Left), s_right = new(1, Side.Right);

    private static readonly Vehicle s_van = new()
    {
        VehicleId = "V",
        Depot = "north",
        Class = VehicleClass.Van,
        KmPerWeek = 1000,
        GrossMassKg = 3500,
        Axles = [new() { Number = 1, Steered = true, PressureKpa = 400 }, new() { Number = 2, Driven = true }],
    };

    private static StoredSurvey Survey(int week, double? km, Func<Position, int, double> depth, bool replaced = false) => new($"S{week:00}", new TreadSurvey
    {
        VehicleId = "V",
        At = s_first.AddDays(7 * week),
        Technician = "a",
        DistanceKm = km,
        CounterReplaced = replaced,
        DistanceSource = km is null ? DistanceSource.None : DistanceSource.Odometer,
        Tyres = [.. s_van.Positions().Select(p => new TyreReadings { Position = p, Depths = [.. Enumerable.Range(1, 4).Select(g => new GrooveDepth(g, Math.Round(depth(p, g), 2)))] })],
    });

    private static VehicleWearResult Estimate(IReadOnlyList<StoredSurvey> surveys, params FittingRecord[] fittings)
    {
        var tread = new VehicleTread { Vehicle = s_van, Depot = SmallFleet.Yard, Surveys = surveys, Fittings = fittings };
        return VehicleWear.Estimate(tread, FleetWear.Fit([], s_asOf), s_asOf);
    }

    private static TyreFigures At(VehicleWearResult result, Position p) => result.Tyres.Single(t => t.Position == p);

    /// <summary>0.15 mm per 1000 km at 1000 km a week from 9 mm.</summary>
    private static double Plain(int week) => 9 - 0.15 * week;

    [Fact]
    public void A_rate_is_the_loss_per_distance()
    {
        var result = Estimate([.. new[] { 0, 8, 16, 24, 32 }.Select(w => Survey(w, 50_000 + 1000 * w, (_, _) => Plain(w)))]);
        Assert.Equal(0.15, At(result, s_left).RateMmPer1000Km!.Value.Value, 0.01);
        Assert.False(At(result, s_left).RateBorrowed);
        Assert.Equal(1000, result.KmPerWeek, 1.0);
        Assert.All(result.Surveys, s => Assert.Equal(1, s.Weight));
    }

    [Fact]
    public void A_replaced_counter_does_not_break_the_rate()
    {
        var result = Estimate([.. new[] { 0, 8, 16, 24, 32 }.Select(w => Survey(w, w < 20 ? 50_000 + 1000 * w : 1000 * (w - 20), (_, _) => Plain(w), w == 24))]);
        Assert.Equal(0.15, At(result, s_left).RateMmPer1000Km!.Value.Value, 0.02);
    }

    [Fact]
    public void Distance_typed_with_a_digit_too_many_is_left_out()
    {
        var result = Estimate([.. new[] { 0, 8, 16, 24, 32 }.Select(w => Survey(w, w == 16 ? 660_000 : 50_000 + 1000 * w, (_, _) => Plain(w)))]);
        Assert.Equal(0.15, At(result, s_left).RateMmPer1000Km!.Value.Value, 0.015);
    }

    [Fact]
    public void Without_any_distance_the_usual_use_serves_with_a_wider_error()
    {
        int[] weeks = [0, 8, 16, 24, 32];
        var read = At(Estimate([.. weeks.Select(w => Survey(w, 50_000 + 1000 * w, (_, _) => Plain(w)))]), s_left).RateMmPer1000Km!.Value;
        var unread = At(Estimate([.. weeks.Select(w => Survey(w, null, (_, _) => Plain(w)))]), s_left).RateMmPer1000Km!.Value;
        Assert.Equal(0.15, unread.Value, 0.03);
        Assert.True(unread.StandardError > read.StandardError);
    }

    [Fact]
    public void A_recorded_new_tyre_starts_afresh()
    {
        var fitted = new FittingRecord { VehicleId = "V", At = s_first.AddDays(7 * 12), Event = FittingEvent.Fitted, Position = s_left, NewDepthMm = 9, TyreId = "T9", Pattern = "rib" };
        var result = Estimate([.. new[] { 0, 8, 16, 24, 32 }.Select(w => Survey(w, 50_000 + 1000 * w, (p, _) => p == s_left && w > 12 ? 9 - 0.15 * (w - 12) : Plain(w)))], fitted);
        var tyre = At(result, s_left);
        Assert.Equal(("T9", "rib", 3), (tyre.TyreId, tyre.Pattern, tyre.SurveyIds.Count));
        Assert.Equal(0.15, tyre.RateMmPer1000Km!.Value.Value, 0.015);
        Assert.Empty(result.Inferred);
    }

    [Fact]
    public void Tyres_moved_across_carry_on_by_tyre()
    {
        // Left wears 0.25, right 0.12 mm per 1000 km as positions; the tyres change places in week 16.
        double Depth(Position p, int w)
        {
            if (p.Axle == 2) return Plain(w);
            double Rate(bool left) => left ? 0.25 : 0.12;
            var left = p == s_left;
            return w <= 16 ? 10 - Rate(left) * w : 10 - Rate(!left) * 16 - Rate(left) * (w - 16);
        }
        FittingRecord Moved(Position to, Position from) => new() { VehicleId = "V", At = s_first.AddDays(7 * 16 + 1), Event = FittingEvent.Moved, Position = to, FromPosition = from };
        var surveys = new[] { 0, 8, 16, 24, 32 }.Select(w => Survey(w, 50_000 + 1000 * w, (p, _) => Depth(p, w))).ToList();
        var result = Estimate(surveys, Moved(s_left, s_right), Moved(s_right, s_left));
        Assert.Equal(0.25, At(result, s_left).RateMmPer1000Km!.Value.Value, 0.03);
        Assert.Equal(0.12, At(result, s_right).RateMmPer1000Km!.Value.Value, 0.03);
        Assert.Empty(result.Inferred);
        Assert.All(result.Surveys, s => Assert.Equal(ExplanationKind.AsWritten, s.Used.Kind));
    }

    [Fact]
    public void Tyres_moved_across_without_a_record_are_seen_as_moved()
    {
        double Depth(Position p, int w)
        {
            if (p.Axle == 2) return Plain(w);
            var was = w <= 16 ? p : p.Mirrored;
            return (was == s_left ? 11.0 : 8.0) - 0.15 * w;
        }
        var result = Estimate([.. new[] { 0, 8, 16, 24, 32 }.Select(w => Survey(w, 50_000 + 1000 * w, (p, _) => Depth(p, w)))]);
        Assert.Equal([s_left, s_right], result.Inferred.Select(i => i.Position));
        Assert.All(result.Inferred, i => Assert.Equal((InferredEvent.Moved, i.Position.Mirrored), (i.Event, i.FromPosition!.Value)));
        Assert.All(result.Surveys, s => Assert.Equal(ExplanationKind.AsWritten, s.Used.Kind));
    }

    [Fact]
    public void A_tyre_turned_on_its_rim_keeps_its_depth_and_changes_its_edges()
    {
        // The outboard edge wears faster throughout; the tyre is turned in week 16.
        double Depth(Position p, int g, int w)
        {
            if (p != s_left) return Plain(w);
            var u = TreadShape.Across(g, 4);
            return Plain(w) - 0.04 * (w <= 16 ? w * u : (w - 16) * u - 16 * u);
        }
        var turned = new FittingRecord { VehicleId = "V", At = s_first.AddDays(7 * 16 + 1), Event = FittingEvent.TurnedOnRim, Position = s_left };
        var result = Estimate([.. new[] { 0, 8, 16, 24, 32, 40 }.Select(w => Survey(w, 50_000 + 1000 * w, (p, g) => Depth(p, g, w)))], turned);
        var edge = At(result, s_left).EdgeSlopeMmPer1000Km!.Value;
        var normal = NormalWear.BuiltIn(VehicleClass.Van, AxleRole.Steer, Dual.Single).EdgePerMmAt(s_left, TrafficSide.Right).Value * 0.15;
        Assert.Equal(0.08 - normal, edge.Value, 0.015);
        Assert.Empty(result.Inferred);
    }

    [Fact]
    public void A_summer_set_put_on_again_goes_on_from_where_it_came_off()
    {
        // Summer tyres until week 12, winter tyres until week 24, the summer tyres again: 12 000 km in the rack take nothing off them.
        FittingRecord On(int week, string set, bool winter, double newMm) => new()
        {
            VehicleId = "V",
            At = s_first.AddDays(7 * week),
            Event = FittingEvent.Fitted,
            Position = s_left,
            TyreId = set,
            Seasonal = true,
            Winter = winter,
            NewDepthMm = newMm,
        };
        double Depth(int week) => week < 12 ? 7 - 0.15 * week : week < 24 ? 9 - 0.15 * (week - 12) : 7 - 0.15 * (week - 12);
        var walks = new[] { 1, 6, 11, 14, 20, 26, 32, 38 }.Select(w => Survey(w, 50_000 + 1000 * w, (p, _) => p == s_left ? Depth(w) : Plain(w) / 2)).ToList();
        var result = Estimate(walks, On(0, "summer", false, 9), On(12, "winter", true, 9), On(24, "summer", false, 9));
        var tyre = At(result, s_left);
        Assert.Equal("summer", tyre.TyreId);
        Assert.Equal(0.15, tyre.RateMmPer1000Km!.Value.Value, 0.01);
        Assert.Empty(result.Inferred);
        // One walk after it came back the set already has a rate of its own: where it came off is known.
        var early = At(Estimate([.. walks.Take(6)], On(0, "summer", false, 9), On(12, "winter", true, 9), On(24, "summer", false, 9)), s_left);
        Assert.NotNull(early.LogRateRatio);
    }

    [Fact]
    public void A_tyre_below_the_limit_has_no_distance_left()
    {
        var result = Estimate([.. new[] { 0, 8, 16 }.Select(w => Survey(w, 50_000 + 1000 * w, (p, g) => p == s_right && g == 4 ? 3.9 - 0.15 * w : Plain(w)))]);
        var tyre = At(result, s_right);
        Assert.Equal((4, 1.6), (tyre.GoverningGroove!.Value, tyre.LimitMm!.Value));
        Assert.Equal(1.5, tyre.RemainingMm!.Value.Value, 1e-9);
        Assert.Equal(0, tyre.RemainingKm!.Value.High);
    }

    [Fact]
    public void Known_new_depth_lets_one_survey_speak_of_the_edge()
    {
        var fitted = new FittingRecord { VehicleId = "V", At = s_first.AddDays(-7 * 30), Event = FittingEvent.Fitted, Position = s_left, NewDepthMm = 9 };
        var result = Estimate([Survey(0, 50_000, (p, g) => 9 - 0.15 * 30 - (p == s_left ? 0.6 * TreadShape.Across(g, 4) : 0))], fitted);
        var tyre = At(result, s_left);
        Assert.True(tyre.EdgeSlopeMmPer1000Km!.Value.Value > 0);
        Assert.Null(At(result, s_right).EdgeSlopeMmPer1000Km);
        Assert.True(At(result, s_right).RateBorrowed);
    }

    [Fact]
    public void Pressure_is_told_as_a_share_of_the_set_one()
    {
        var surveys = new[] { 0, 8 }.Select(w => Survey(w, 50_000 + 1000 * w, (_, _) => Plain(w))).Select(s => s with { Survey = s.Survey with { Tyres = [.. s.Survey.Tyres.Select(t => t with { PressureKpa = t.Position == s_left ? 320 : 400 })] } }).ToList();
        Assert.Equal(-0.2, At(Estimate(surveys), s_left).PressureShare!.Value.Value, 1e-9);
        Assert.Null(At(Estimate(surveys), new Position(2, Side.Left)).PressureShare);
    }

    /// <summary>Front tyres at 8 and 5 mm, rear ones at 7 and 6 mm in week 0: every wheel is known by its depth.</summary>
    private static double Own(Position p, int week) => (p.Axle, p.Side) switch { (1, Side.Left) => 8, (1, _) => 5.5, (_, Side.Left) => 7, _ => 6.2 } - 0.02 * week;

    [Fact]
    public void A_walk_begun_at_the_wrong_corner_is_recognised_and_its_wheels_put_back()
    {
        var (front, rear) = (s_left, new Position(2, Side.Left));
        Position Wrong(Position p) => p == front ? rear : p == rear ? front : p;
        var result = Estimate([.. new[] { 0, 8, 16, 24, 32 }.Select(w => Survey(w, 50_000 + 1000 * w, (p, _) => Own(w == 16 ? Wrong(p) : p, w)))]);
        Assert.Equal(new Explanation(ExplanationKind.PositionsExchanged, Position: front, OtherPosition: rear), result.Surveys[2].Used);
        Assert.Empty(result.Inferred);
        Assert.Equal(5, At(result, front).Points.Count);
    }

    [Fact]
    public void Tyres_of_both_axles_changed_before_the_last_walk_are_new_tyres_and_not_another_vehicle()
    {
        var result = Estimate([.. new[] { 0, 4, 8, 12, 16 }.Select(w => Survey(w, 50_000 + 1000 * w, (p, g) => w == 16 ? 8.8 : Own(p, w) - 0.3 * (g - 2.5) * (p.Side == Side.Left ? 1 : -1)))]);
        Assert.Equal(ExplanationKind.AsWritten, result.Surveys[^1].Used.Kind);
        Assert.Equal(4, result.Inferred.Count);
        Assert.All(result.Tyres, t => Assert.Single(t.Points));
    }

    [Fact]
    public void Grooves_counted_from_the_inboard_side_in_one_walk_are_turned_back()
    {
        double Sloped(Position p, int g, int w) => Own(p, w) + 0.5 * (g - 2.5);
        var result = Estimate([.. new[] { 0, 8, 16, 24, 32 }.Select(w => Survey(w, 50_000 + 1000 * w, (p, g) => Sloped(p, w == 16 ? 5 - g : g, w)))]);
        Assert.Equal(ExplanationKind.GroovesReversed, result.Surveys[2].Used.Kind);
        Assert.Empty(result.Inferred);
    }

    [Fact]
    public void Surveys_that_agree_are_not_talked_into_another_unit_by_a_contradicting_one()
    {
        // New tyres all round after week 20; the depths before are 1 / 1.26 of what is there after.
        var result = Estimate([.. new[] { 0, 5, 10, 15, 20, 25, 30 }.Select(w => Survey(w, 50_000 + 1000 * w, (p, _) => w <= 20 ? 6.6 - 0.04 * w : 8.7 - 0.04 * (w - 20)))]);
        Assert.All(result.Surveys, s => Assert.Equal(ExplanationKind.AsWritten, s.Used.Kind));
        Assert.All(result.Inferred, i => Assert.Equal(s_first.AddDays(7 * 20), i.After));
        Assert.Equal(4, result.Inferred.Count);
    }

    [Fact]
    public void A_groove_read_on_a_wear_bar_is_named_as_such()
    {
        var result = Estimate([.. new[] { 0, 8, 16, 24, 32 }.Select(w => Survey(w, 50_000 + 1000 * w, (p, g) => Plain(w) - (w == 16 && p == s_left && g == 3 ? 1.6 : 0)))]);
        var odd = Assert.Single(result.Surveys[2].Odd);
        Assert.Equal((ExplanationKind.ReadOnWearBar, s_left, 3), (odd.Explanation.Kind, odd.Explanation.Position!.Value, odd.Explanation.Groove!.Value));
    }

    [Fact]
    public void A_cupped_tyre_read_at_other_places_is_not_taken_for_another_tyre()
    {
        // Waves of 1 mm; the first walk reads three places, the others one that may lie anywhere on them.
        double Wave(int w) => w switch { 8 => 1, 16 => -1, 24 => 0.8, _ => -0.6 };
        var surveys = new[] { 0, 8, 16, 24, 32 }.Select(w => Survey(w, 50_000 + 1000 * w, (p, _) => Own(p, w) + (p == s_left && w > 0 ? Wave(w) : 0))).ToList();
        TyreReadings ThreePlaces(TyreReadings t) => t.Position != s_left ? t : t with { Depths = [.. t.Depths.SelectMany(d => new[] { (20.0, 1.0), (140, -0.9), (260, 0.1) }.Select(x => d with { ClockDeg = x.Item1, DepthMm = d.DepthMm + x.Item2 }))] };
        surveys[0] = surveys[0] with { Survey = surveys[0].Survey with { Tyres = [.. surveys[0].Survey.Tyres.Select(ThreePlaces)] } };
        Assert.Empty(Estimate(surveys).Inferred);
    }

    [Fact]
    public void Contradictory_histories_are_answered_and_never_with_a_confident_number()
    {
        var same = new[] { Survey(0, 50_000, (_, _) => 8), Survey(0, 50_000, (_, _) => 4) with { SurveyId = "again" }, Survey(8, 42_000, (_, _) => 7) };
        var twice = new FittingRecord { VehicleId = "V", At = s_first.AddDays(3), Event = FittingEvent.Fitted, Position = s_left, NewDepthMm = 9 };
        foreach (var result in new[] { Estimate(same), Estimate(same, twice, twice with { NewDepthMm = 6 }), Estimate([], twice) })
        {
            Assert.Equal(4, result.Tyres.Count);
            Assert.All(result.Tyres, t => Assert.True(t.RemainingKm is not { } km || km.High > 2 * km.Low));
        }
    }

    [Fact]
    public void Ten_thousand_grooves_make_no_exception()
    {
        var many = Survey(0, 50_000, (_, _) => 8);
        many = many with { Survey = many.Survey with { Tyres = [.. many.Survey.Tyres.Select(t => t with { Depths = [.. Enumerable.Range(1, 10_000).Select(g => new GrooveDepth(g, 8))] })] } };
        Assert.Equal(4, Estimate([many, Survey(8, 58_000, (_, _) => 7)]).Tyres.Count);
    }
}
