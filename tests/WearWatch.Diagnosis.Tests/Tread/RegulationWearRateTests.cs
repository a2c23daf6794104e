using CsCheck;
using WearWatch.Diagnosis.Tread;

namespace WearWatch.Diagnosis.Tests.Tread;

public class RegulationWearRateTests
{
    [Fact]
    public void Mils_per_thousand_miles_by_the_least_squares_line()
    {
        // 49 CFR 575.104(e)(2)(ix): absolute slope of depth (mils) against distance (thousands of miles). 300 mils less 10 a thousand.
        double[] miles = [0, 800, 1600, 3200, 6400];
        var rate = RegulationWearRate.MilsPer1000Miles([.. miles.Select(m => m * 1.609344)], [.. miles.Select(m => (300 - 10 * m / 1000) * 0.0254)]);
        Assert.Equal(10, rate, 1e-9);
    }

    [Fact]
    public void A_course_that_wore_the_control_tyres_twice_as_fast_halves_the_rate() => Assert.Equal(5, RegulationWearRate.Adjusted(10, 8, 4), 1e-12);

    [Fact]
    public void The_rate_of_the_trade_in_the_units_of_the_regulation()
    {
        // 10 000 miles per 1/32 inch (31.25 mils) are 3.125 mils per 1000 miles, 0.04932 mm per 1000 km.
        Assert.Equal(3.125, RegulationWearRate.FromMetric(0.04932), 1e-3);
    }

    [Fact]
    public void Shifting_the_depths_does_not_change_the_rate() => Gen.Select(Gen.Double[0.5, 5], Gen.Double[-2, 2]).Sample((slope, shift) =>
    {
        double[] km = [0, 1000, 2500, 4000];
        var plain = RegulationWearRate.MilsPer1000Miles(km, [.. km.Select(k => 9 - slope * k / 10000)]);
        Assert.Equal(plain, RegulationWearRate.MilsPer1000Miles(km, [.. km.Select(k => 9 + shift - slope * k / 10000)]), 1e-7);
    });
}
