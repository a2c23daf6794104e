using WearWatch.Diagnosis.Wear;

namespace WearWatch.Diagnosis.Tests.Wear;

public class RateChangeTests
{
    private const double Normal = 0.1, Variance = 0.08 * 0.08;

    private static (double Km, double Mm, double Variance)[] Points(Func<double, double> loss) => [.. Enumerable.Range(0, 8).Select(i => (4000.0 * i, 12 - loss(4.0 * i), Variance))];

    [Fact]
    public void A_straight_line_is_left_unchanged()
    {
        var courses = RateChange.Of(Points(x => 0.1 * x), Normal, null);
        Assert.Equal(1, courses.Sum(c => c.Weight), 1e-12);
        Assert.True(courses[0].Weight > 0.9);
        Assert.Equal(0.1, courses[0].Now.Value, 1e-3);
    }

    [Fact]
    public void A_rate_that_doubled_half_way_is_found_with_its_place()
    {
        var courses = RateChange.Of(Points(x => 0.1 * x + 0.1 * Math.Max(0, x - 16)), Normal, null);
        Assert.True(courses[0].Weight < 0.01);
        var likeliest = courses.MaxBy(c => c.Weight);
        Assert.Equal(16_000, likeliest.SinceKm);
        Assert.InRange(likeliest.Now.Value, 0.19, 0.205);
        Assert.InRange(likeliest.Before.Value, 0.095, 0.105);
    }

    [Fact]
    public void An_alignment_makes_a_change_more_believable_than_no_alignment()
    {
        double After(double x) => 0.2 * x - 0.05 * Math.Max(0, x - 20);
        var known = RateChange.Of(Points(After), Normal, 20_000).Where(c => c.SinceKm > 0).Sum(c => c.Weight);
        var unknown = RateChange.Of(Points(After), Normal, null).Where(c => c.SinceKm > 0).Sum(c => c.Weight);
        Assert.True(known > unknown, $"{known} {unknown}");
    }

    [Fact]
    public void Two_readings_say_nothing_of_a_change() => Assert.Equal(1, Assert.Single(RateChange.Of(Points(x => 0.1 * x)[..2], Normal, null)).Weight);

    [Fact]
    public void A_tyre_that_wears_faster_since_a_knock_has_less_distance_left_than_its_mean_rate_says()
    {
        var maker = new SmallFleet(17) { FaultyShare = 0, Surveys = 9, NoiseSd = 0.05, TechnicianSd = 0 };
        var fleet = maker.Make(24);
        var wear = FleetWear.Fit([.. fleet.Select(v => v.Tread)], SmallFleet.AsOf);
        var v = fleet[0];
        var plain = VehicleWear.Estimate(v.Tread, wear, SmallFleet.AsOf).Tyres[0];
        // From the fifth walk on the left front tyre loses another 0.4 mm a walk.
        var knocked = Enumerable.Range(5, 4).Aggregate(v.Tread, (tread, s) => SmallFleet.Change(tread, s, t => t.Position != plain.Position ? t
            : t with { Depths = [.. t.Depths.Select(d => d with { DepthMm = Math.Round(d.DepthMm - 0.4 * (s - 4), 2) })] }));
        var after = VehicleWear.Estimate(knocked, wear, SmallFleet.AsOf).Tyres[0];
        Assert.True(after.RemainingKm!.Value.High < plain.RemainingKm!.Value.Value, $"{after.RemainingKm} {plain.RemainingKm}");
        var byMeanRate = (after.RemainingMm!.Value.Value - after.LimitMm!.Value) / after.RateMmPer1000Km!.Value.Value * 1000;
        Assert.True(after.RemainingKm.Value.Value < byMeanRate, $"{after.RemainingKm} {byMeanRate}");
    }
}
