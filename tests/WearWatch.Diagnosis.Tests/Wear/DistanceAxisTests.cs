using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Wear;

namespace WearWatch.Diagnosis.Tests.Wear;

public class DistanceAxisTests
{
    private static readonly DateTimeOffset s_first = new(2026, 1, 5, 7, 0, 0, TimeSpan.Zero);
    private static readonly Vehicle s_trailer = new() { VehicleId = "T", Depot = "north", Class = VehicleClass.Trailer, KmPerWeek = 1500, GrossMassKg = 30000, Axles = [new() { Number = 1 }, new() { Number = 2 }] };

    private static TreadSurvey Walk(int week, double? km, DistanceSource source, bool replaced = false) => new()
    {
        VehicleId = "T",
        At = s_first.AddDays(7 * week),
        DistanceKm = km,
        DistanceSource = source,
        CounterReplaced = replaced,
        Tyres = [],
    };

    [Fact]
    public void A_hub_counter_read_at_every_walk_has_no_error_at_the_walks()
    {
        var axis = DistanceAxis.Of(s_trailer, [Walk(0, 20_000, DistanceSource.HubCounter), Walk(6, 29_000, DistanceSource.HubCounter), Walk(12, 38_000, DistanceSource.HubCounter)]);
        Assert.Equal(18_000, axis.At(s_first.AddDays(84)).Value - axis.At(s_first).Value, 1e-9);
        Assert.Equal(0, axis.At(s_first.AddDays(42)).StandardError);
        Assert.Equal(1500, axis.KmPerWeek, 1e-9);
    }

    [Fact]
    public void A_replaced_hub_counter_starts_anew_and_the_gap_is_filled_from_use_with_its_error()
    {
        var axis = DistanceAxis.Of(s_trailer, [Walk(0, 120_000, DistanceSource.HubCounter), Walk(6, 129_000, DistanceSource.HubCounter), Walk(12, 400, DistanceSource.HubCounter, replaced: true), Walk(18, 9_400, DistanceSource.HubCounter)]);
        var (before, after, last) = (axis.At(s_first.AddDays(42)), axis.At(s_first.AddDays(84)), axis.At(s_first.AddDays(126)));
        Assert.Equal(9_000, after.Value - before.Value, 1e-6);
        Assert.Equal(9_000, last.Value - after.Value, 1e-6);
        Assert.True(after.StandardError > 500);
    }

    [Fact]
    public void A_walk_that_read_the_towing_vehicles_odometer_does_not_break_the_hub_counters_line()
    {
        var axis = DistanceAxis.Of(s_trailer, [Walk(0, 20_000, DistanceSource.HubCounter), Walk(6, 512_000, DistanceSource.Odometer), Walk(12, 38_000, DistanceSource.HubCounter)]);
        Assert.Equal(9_000, axis.At(s_first.AddDays(42)).Value - axis.At(s_first).Value, 1.0);
        Assert.True(axis.At(s_first.AddDays(42)).StandardError > 0);
    }

    [Fact]
    public void Without_any_counter_the_weekly_use_serves_and_its_error_grows_with_time()
    {
        var axis = DistanceAxis.Of(s_trailer, [Walk(0, null, DistanceSource.None), Walk(10, null, DistanceSource.None), Walk(20, null, DistanceSource.None)]);
        var (ten, twenty) = (axis.At(s_first.AddDays(70)), axis.At(s_first.AddDays(140)));
        Assert.Equal(15_000, ten.Value, 1e-6);
        Assert.True(twenty.StandardError > 1.5 * ten.StandardError && ten.StandardError > 1000);
    }

    [Fact]
    public void Without_even_a_weekly_use_the_usual_one_of_the_class_serves()
    {
        var axis = DistanceAxis.Of(s_trailer with { KmPerWeek = null }, [Walk(0, null, DistanceSource.None), Walk(10, null, DistanceSource.None)]);
        Assert.True(axis.KmPerWeek > 0);
        Assert.True(axis.At(s_first.AddDays(70)).StandardError > 0.1 * axis.At(s_first.AddDays(70)).Value);
    }
}
