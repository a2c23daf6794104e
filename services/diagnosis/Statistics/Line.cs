using MathNet.Numerics.Distributions;

namespace WearWatch.Diagnosis.Statistics;

/// <summary>Least-squares straight line with what its intervals need.</summary>
public sealed record Line
{
    public required double Intercept { get; init; }
    public required double Slope { get; init; }
    /// <summary>Residual standard deviation on n − 2 degrees of freedom.</summary>
    public required double ResidualSd { get; init; }
    public required double RSquared { get; init; }
    public required int Count { get; init; }
    public required double MeanX { get; init; }
    /// <summary>Sum of squares of x about its mean.</summary>
    public required double Sxx { get; init; }

    public double SlopeStandardError => ResidualSd / Math.Sqrt(Sxx);

    /// <summary>Ordinary least squares; at least three points at two different places.</summary>
    public static Line Fit(ReadOnlySpan<double> x, ReadOnlySpan<double> y)
    {
        if (x.Length != y.Length || x.Length < 3) throw new ArgumentException("a line needs at least three pairs");
        double meanX = 0, meanY = 0;
        for (var i = 0; i < x.Length; i++) { meanX += x[i]; meanY += y[i]; }
        meanX /= x.Length;
        meanY /= y.Length;
        double sxx = 0, sxy = 0, syy = 0;
        for (var i = 0; i < x.Length; i++)
        {
            sxx += (x[i] - meanX) * (x[i] - meanX);
            sxy += (x[i] - meanX) * (y[i] - meanY);
            syy += (y[i] - meanY) * (y[i] - meanY);
        }
        if (sxx <= 0) throw new ArgumentException("all x are the same", nameof(x));
        var slope = sxy / sxx;
        double rss = 0;
        for (var i = 0; i < x.Length; i++)
        {
            var r = y[i] - meanY - slope * (x[i] - meanX);
            rss += r * r;
        }
        return new Line
        {
            Intercept = meanY - slope * meanX,
            Slope = slope,
            ResidualSd = Math.Sqrt(rss / (x.Length - 2)),
            RSquared = syy > 0 ? 1 - rss / syy : 1,
            Count = x.Length,
            MeanX = meanX,
            Sxx = sxx,
        };
    }

    public double At(double x) => Intercept + Slope * x;

    /// <summary>Half width of the interval for one new reading at x.</summary>
    /// <param name="x">Where.</param>
    /// <param name="confidence">Two-sided, such as 0.95.</param>
    public double NewReadingHalfWidth(double x, double confidence) =>
        Quantile(confidence) * ResidualSd * Math.Sqrt(1 + 1.0 / Count + (x - MeanX) * (x - MeanX) / Sxx);

    /// <summary>Standard error of the line itself at x.</summary>
    public double StandardErrorAt(double x) => ResidualSd * Math.Sqrt(1.0 / Count + (x - MeanX) * (x - MeanX) / Sxx);

    /// <summary>Where the line reaches <paramref name="level"/>, with its interval; null where the slope cannot be told from zero.</summary>
    /// <remarks>E. C. Fieller, J. R. Statist. Soc. B 16 (1954) 175: (a+bx−L)² = t²s²(1/n + (x−x̄)²/Sxx).</remarks>
    public Interval? Reaches(double level, double confidence)
    {
        var t = Quantile(confidence);
        var g = t * t * ResidualSd * ResidualSd / (Slope * Slope * Sxx);
        if (!(g < 1)) return null;
        var centre = (level - At(MeanX)) / Slope;
        var root = t * ResidualSd / Math.Abs(Slope) * Math.Sqrt((1 - g) / Count + centre * centre / Sxx);
        return new Interval(MeanX + centre, MeanX + (centre - root) / (1 - g), MeanX + (centre + root) / (1 - g));
    }

    private double Quantile(double confidence) => StudentT.InvCDF(0, 1, Count - 2, 0.5 + confidence / 2);
}
