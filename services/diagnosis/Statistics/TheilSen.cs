using MathNet.Numerics.Distributions;

namespace WearWatch.Diagnosis.Statistics;

/// <summary>Median slope of all pairs: a line for few points that 29 % of bad ones cannot break.</summary>
/// <remarks>H. Theil, Proc. Kon. Ned. Akad. Wet. 53 (1950) 386; P. K. Sen, J. Am. Statist. Assoc. 63 (1968) 1379 (interval from Kendall's S).</remarks>
public sealed record TheilSen
{
    public required double Slope { get; init; }
    /// <summary>Median of y − slope·x.</summary>
    public required double Intercept { get; init; }
    /// <summary>Bounds of the slope; the whole range of pair slopes when the points are too few for the confidence.</summary>
    public required double Low { get; init; }
    public required double High { get; init; }
    public required int Pairs { get; init; }

    /// <summary>Needs two points at different x; pairs at the same x tell nothing and are left out.</summary>
    public static TheilSen Fit(ReadOnlySpan<double> x, ReadOnlySpan<double> y, double confidence = 0.90)
    {
        if (x.Length != y.Length || x.Length < 2) throw new ArgumentException("a line needs at least two pairs");
        var n = x.Length;
        var slopes = new List<double>(n * (n - 1) / 2);
        for (var i = 0; i < n; i++)
        {
            for (var j = i + 1; j < n; j++)
                if (x[i] != x[j]) slopes.Add((y[j] - y[i]) / (x[j] - x[i]));
        }
        if (slopes.Count == 0) throw new ArgumentException("all x are the same", nameof(x));
        slopes.Sort();
        var sorted = slopes.ToArray();
        var slope = Medians.OfSorted(sorted);
        var rest = new double[n];
        for (var i = 0; i < n; i++) rest[i] = y[i] - slope * x[i];
        Array.Sort(rest);
        var c = Normal.InvCDF(0, 1, 0.5 + confidence / 2) * Math.Sqrt(n * (n - 1.0) * (2 * n + 5) / 18);
        var low = (int)Math.Floor((sorted.Length - c) / 2) - 1;
        var high = (int)Math.Ceiling((sorted.Length + c) / 2);
        return new TheilSen
        {
            Slope = slope,
            Intercept = Medians.OfSorted(rest),
            Low = sorted[Math.Clamp(low, 0, sorted.Length - 1)],
            High = sorted[Math.Clamp(high, 0, sorted.Length - 1)],
            Pairs = sorted.Length,
        };
    }
}
