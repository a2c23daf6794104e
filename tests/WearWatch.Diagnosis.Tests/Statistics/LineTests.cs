using WearWatch.Diagnosis.Statistics;
using WearWatch.Diagnosis.Tread;

namespace WearWatch.Diagnosis.Tests.Statistics;

public class LineTests
{
    [Fact]
    public void Norris_is_fitted_to_eleven_digits()
    {
        // NIST StRD, Norris: certified values.
        var data = ReferenceData.Read("norris.csv");
        var line = Line.Fit(data["x"], data["y"]);
        Assert.Equal(1.00211681802045, line.Slope, 1e-11);
        Assert.Equal(-0.262323073774029, line.Intercept, 1e-9);
        Assert.Equal(0.884796396144373, line.ResidualSd, 1e-10);
        Assert.Equal(0.999993745883712, line.RSquared, 1e-12);
    }

    [Fact]
    public void Tyre_life_by_groove_depth_predicts_life_by_weight()
    {
        // Stichler, Richey and Mandel, Rubber Age 73:2 (1953); fit recomputed with R 4.2.2.
        var data = ReferenceData.Read("tyre_wear_1953.csv");
        var line = Line.Fit(data["x"], data["y"]);
        Assert.Equal(1.32648, line.Intercept, 1e-5);
        Assert.Equal(1.136855, line.Slope, 1e-6);
        Assert.Equal(3.14348, line.ResidualSd, 1e-5);
        Assert.Equal(0.898357, line.RSquared, 1e-6);
    }

    [Fact]
    public void Distance_to_the_limit_has_fiellers_interval()
    {
        // Worked from E. C. Fieller, J. R. Statist. Soc. B 16 (1954): depths 8 to 4.9 mm over 40 000 km, limit 1.6 mm.
        var line = Line.Fit([0, 10, 20, 30, 40], [8, 7.2, 6.5, 5.6, 4.9]);
        Assert.Equal(-0.078, line.Slope, 1e-12);
        Assert.Equal(0.05164, line.ResidualSd, 1e-5);
        var reached = line.Reaches(1.6, 0.95)!.Value;
        Assert.Equal(82.0513, reached.Value, 1e-3);
        Assert.Equal(78.069, reached.Low, 0.01);
        Assert.Equal(86.587, reached.High, 0.01);
        Assert.Equal(4.1, line.At(50) + 0.02, 0.03);
        Assert.Equal(0.238, line.NewReadingHalfWidth(50, 0.95), 1e-3);
    }

    [Fact]
    public void A_flat_line_never_reaches_a_limit()
    {
        var line = Line.Fit([0, 10, 20, 30], [8.0, 8.1, 7.9, 8.0]);
        Assert.Null(line.Reaches(1.6, 0.95));
    }

    [Fact]
    public void Wear_per_mile_of_the_trade_in_mm_per_1000_km()
    {
        // Trade press on line-haul trucks: 10 000 miles per 1/32 inch.
        Assert.Equal(0.04932, GaugeNoise.ThirtySecondInchMm / (10_000 * 1.609344) * 1000, 1e-5);
        Assert.Equal(3.175, 4 * GaugeNoise.ThirtySecondInchMm, 12);
        Assert.Equal(0.028868, GaugeNoise.Quantisation(0.1), 1e-6);
        // Two readings of σ 0.25 mm show a slope of 0.05 mm per 1000 km at two standard errors after this distance.
        Assert.Equal(14142, GaugeNoise.KmForTwoSigma(0.05, 0.25), 1.0);
    }
}
