using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Tread;

/// <summary>A tyre's rate of wear as the treadwear regulation defines it, beside the fleet's own estimate.</summary>
/// <remarks>
/// 49 CFR 575.104(e)(2)(ix): the absolute value of the slope of the least-squares line of tread depth (mils) against distance
/// (thousands of miles); adjusted by the ratio of a base rate to the rate that control tyres showed on the same course.
/// </remarks>
public static class RegulationWearRate
{
    /// <summary>A thousandth of an inch, mm; exact.</summary>
    public const double MilMm = 0.0254;

    /// <summary>A statute mile, km; exact.</summary>
    public const double MileKm = 1.609344;

    /// <summary>Mils per 1000 miles.</summary>
    /// <param name="km">Distance at each reading, km; at least three readings at two different distances.</param>
    /// <param name="depthMm">Mean depth, mm.</param>
    public static double MilsPer1000Miles(ReadOnlySpan<double> km, ReadOnlySpan<double> depthMm) => FromMetric(Math.Abs(Line.Fit(km, depthMm).Slope) * 1000);

    /// <summary>The same rate on the base course.</summary>
    /// <param name="rate">Rate of the tyre, any unit.</param>
    /// <param name="controlRate">Rate of the control tyres on the same course, the same unit; above zero.</param>
    /// <param name="baseControlRate">Rate of such control tyres on the base course, the same unit.</param>
    public static double Adjusted(double rate, double controlRate, double baseControlRate) =>
        controlRate > 0 ? rate * baseControlRate / controlRate : throw new ArgumentOutOfRangeException(nameof(controlRate), "the control tyres must have worn");

    /// <summary>Mils per 1000 miles from mm per 1000 km.</summary>
    public static double FromMetric(double mmPer1000Km) => mmPer1000Km / MilMm * MileKm;
}
