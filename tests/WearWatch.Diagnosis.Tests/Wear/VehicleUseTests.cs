using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Wear;

namespace WearWatch.Diagnosis.Tests.Wear;

/// <summary>A vehicle's own use with its variation turns distances into dates.</summary>
public class VehicleUseTests
{
    private static readonly DateTimeOffset s_first = new(2026, 3, 2, 8, 0, 0, TimeSpan.Zero);
    private static readonly DateOnly s_day = new(2026, 6, 1);

    private static List<TreadSurvey> Walks(params double[] km) => [.. km.Select((d, i) => new TreadSurvey { VehicleId = "V", At = s_first.AddDays(28 * i), DistanceKm = d, DistanceSource = DistanceSource.Odometer, Tyres = [] })];

    [Fact]
    public void Use_is_the_distance_between_the_first_and_the_last_reading_over_the_weeks()
    {
        var use = VehicleUse.Of(Walks(0, 2400, 4800, 7200), 999);
        Assert.Equal((600, 12, 3), (use.KmPerWeek, use.Weeks, use.Intervals));
    }

    [Fact]
    public void A_counter_that_ran_back_or_was_replaced_says_nothing_of_the_use()
    {
        var walks = Walks(0, 2400, 100, 2500);
        Assert.Equal(600, VehicleUse.Of(walks, 999).KmPerWeek);
        walks[2] = walks[2] with { CounterReplaced = true };
        Assert.Equal(2, VehicleUse.Of(walks, 999).Intervals);
    }

    [Fact]
    public void Without_a_counter_the_usual_use_stands_with_a_wider_interval()
    {
        var unread = VehicleUse.Of([], 600);
        Assert.Equal((600, 0), (unread.KmPerWeek, unread.Intervals));
        var (read, blind) = (VehicleUse.Of(Walks(0, 2400, 4800, 7200), 600).Reaches(s_day, new Interval(12_000, 10_000, 14_000))!.Value, unread.Reaches(s_day, new Interval(12_000, 10_000, 14_000))!.Value);
        Assert.Equal(read.Likely, blind.Likely);
        Assert.True(blind.Earliest < read.Earliest && blind.Latest > read.Latest);
    }

    [Fact]
    public void A_vehicle_whose_weeks_differ_has_wider_dates()
    {
        var (steady, uneven) = (VehicleUse.Of(Walks(0, 2400, 4800, 7200, 9600), 600), VehicleUse.Of(Walks(0, 800, 4800, 5200, 9600), 600));
        Assert.Equal(steady.KmPerWeek, uneven.KmPerWeek);
        Assert.True(uneven.WeekSdKm > 1.5 * steady.WeekSdKm);
        var km = new Interval(6000, 5500, 6500);
        Assert.True(uneven.Reaches(s_day, km)!.Value.Latest > steady.Reaches(s_day, km)!.Value.Latest);
    }

    [Fact]
    public void Dates_are_at_least_as_wide_as_the_distance_alone_and_a_reached_limit_is_the_day_of_the_walk()
    {
        var use = VehicleUse.Of(Walks(0, 2400, 4800, 7200), 600);
        var on = use.Reaches(s_day, new Interval(12_000, 9_000, 18_000))!.Value;
        Assert.Equal(s_day.AddDays(140), on.Likely);
        Assert.True(on.Earliest <= s_day.AddDays(105) && on.Latest >= s_day.AddDays(210));
        Assert.Equal(new DateInterval(s_day, s_day, s_day), use.Reaches(s_day, new Interval(0, 0, 0)));
        Assert.Null(use.Reaches(s_day, new Interval(3e6, 2e6, 9e6)));
    }
}
