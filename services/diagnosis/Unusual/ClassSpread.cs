using MathNet.Numerics.Statistics;
using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Unusual;

/// <summary>How one class stands: the centre and spread of each figure, and of the three distances.</summary>
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
    /// <summary>By how much a deviation must be divided for the spread being known from few vehicles only; 1 for many.</summary>
    public required double[] Doubt { get; init; }
    public required DistanceSpread Greatest { get; init; }
    public required DistanceSpread Breadth { get; init; }
    public required DistanceSpread Along { get; init; }
}

/// <summary>
/// Centre and scale of the cube root of a mean squared distance. The cube root of a chi-square over its degrees of freedom is
/// close to normal (Wilson &amp; Hilferty, PNAS 17 (1931) 684), whatever its scale and degrees. Figures of real fleets have heavier tails,
/// so the scale is not the root's standard deviation but what puts the limit where this fleet's own upper tail leads to.
/// </summary>
public sealed record DistanceSpread(double Centre, double Scale)
{
    /// <summary>Share of sound vehicles that may be flagged, by any of the three distances.</summary>
    public const double StatedRate = 0.01;

    /// <summary>Normal quantile with a third of the rate above it: three distances.</summary>
    public const double LimitErrors = 2.7130518884727204;

    /// <summary>
    /// How far beyond the upper quartile the limit lies, in steps from the upper quartile to the ninetieth percentile, by the ratio of that
    /// step to the one from the median. Worked out from the quantiles of the largest of 17 figures, to the power of 2/3, where these follow
    /// the normal law and Student's with 5, 3 and 2 degrees of freedom; for 6 to 25 figures they differ by less than a twentieth.
    /// </summary>
    private static readonly (double Ratio, double Steps)[] Tails = [(0.98, 3.6), (1.21, 5.3), (1.36, 6.6), (1.55, 8.55)];

    /// <summary>Ratio taken before anything is seen, and for how many vehicles it counts (from memory).</summary>
    private const double UsualRatio = 1.1, UsualRatioVehicles = 300;

    /// <summary>Spread of distances of sound vehicles, each measured by a fit that has not seen it; a few odd ones among them do no harm.</summary>
    public static DistanceSpread Of(IEnumerable<double> meanSquares)
    {
        var roots = meanSquares.Select(Math.Cbrt).Order().ToArray();
        if (roots.Length == 0) return new(1, 1);
        double At(double share) => roots.QuantileCustom(share, QuantileDefinition.R7);
        var (median, quartile, ninetieth) = (At(0.5), At(0.75), At(0.9));
        var (inner, outer) = (Math.Max(quartile - median, 1e-3), Math.Max(ninetieth - quartile, 1e-3));
        var ratio = (roots.Length * outer / inner + UsualRatioVehicles * UsualRatio) / (roots.Length + UsualRatioVehicles);
        // Both steps speak for the size of a step; the outer one alone is vague in small fleets.
        var step = (outer + ratio * inner) / 2;
        var limit = quartile + Steps(ratio) * step;
        return new(median, Math.Max((limit - median) / LimitErrors, 0.05));
    }

    private static double Steps(double ratio)
    {
        var k = 1;
        while (k < Tails.Length - 1 && ratio > Tails[k].Ratio) k++;
        var (low, high) = (Tails[k - 1], Tails[k]);
        var share = Math.Clamp((ratio - low.Ratio) / (high.Ratio - low.Ratio), 0, 1);
        return low.Steps + share * (high.Steps - low.Steps);
    }

    /// <summary>Scales of the class above its centre; the limit stands at <see cref="LimitErrors"/>.</summary>
    public double Errors(double meanSquare) => (Math.Cbrt(meanSquare) - Centre) / Scale;

    /// <summary>Mean squared distance above which a vehicle is unusual.</summary>
    public double Limit => Math.Pow(Centre + LimitErrors * Scale, 3);
}
