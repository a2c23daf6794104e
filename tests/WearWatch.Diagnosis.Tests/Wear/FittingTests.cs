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
}
