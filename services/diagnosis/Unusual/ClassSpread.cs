using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Unusual;

/// <summary>How one class stands: the centre and spread of each figure, and of the two distances.</summary>
public sealed record ClassSpread
{
    public required VehicleClass Class { get; init; }
    /// <summary>Vehicles the class was fitted on.</summary>
    public required int Vehicles { get; init; }
    /// <summary>Median of each figure, in its unit.</summary>
    public required double[] Centre { get; init; }
    /// <summary>Robust standard deviation of each figure, in its unit; 0 where too few vehicles of the class have it.</summary>
    public required double[] Scale { get; init; }
    /// <summary>Median standard error of each figure, in its unit.</summary>
    public required double[] TypicalError { get; init; }
    public required DistanceSpread SquaredPredictionError { get; init; }
    public required DistanceSpread HotellingT2 { get; init; }
}

/// <summary>
/// Centre and robust standard deviation of the cube root of a mean squared distance. The cube root of a chi-square over its
/// degrees of freedom is close to normal (Wilson &amp; Hilferty, PNAS 17 (1931) 684), whatever its scale and degrees.
/// </summary>
public sealed record DistanceSpread(double Centre, double Scale)
{
    /// <summary>Normal quantile with 0.5 % above it: two distances, about 1 % of sound vehicles together.</summary>
    public const double LimitErrors = 2.5758293035489004;

    /// <summary>Robust standard deviations of the class above its centre.</summary>
    public double Errors(double meanSquare) => (Math.Cbrt(meanSquare) - Centre) / Scale;

    /// <summary>Mean squared distance above which a vehicle is unusual.</summary>
    public double Limit => Math.Pow(Centre + LimitErrors * Scale, 3);
}
