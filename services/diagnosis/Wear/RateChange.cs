using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Wear;

/// <summary>One way in which a tyre's rate may have gone: the same all along, or another since a distance.</summary>
/// <param name="Weight">Probability, 0 to 1.</param>
/// <param name="SinceKm">Distance since which the rate is another; minus infinity where it never changed.</param>
/// <param name="Before">Rate before that, mm per 1000 km.</param>
/// <param name="Now">Rate since, mm per 1000 km.</param>
internal readonly record struct RateCourse(double Weight, double SinceKm, Estimate Before, Estimate Now);

/// <summary>
/// Whether a tyre still wears as it did: a knock, a repair or another driver changes the rate from one walk to the next. Every walk
/// but the first and the last is weighed as the place of one break, by the evidence of the broken line against the straight one; what lies ahead is
/// then a mixture over them. Conjugate Bayesian regression with known variances.
/// </summary>
internal static class RateChange
{
    /// <summary>Prior probability that the rate changed between two walks of a tyre's present fitting, and that an alignment changed it; from memory.</summary>
    private const double Prior = 0.12, AdjustedPrior = 0.5;

    /// <summary>By how much a change differs from the rate before, and one rate from the normal, shares; from memory.</summary>
    private const double ChangeShare = 0.4, OwnShare = 0.5;

    private const double LevelSdMm = 5;

    /// <summary>Courses with their weights, which sum to 1; the unchanged one first.</summary>
    /// <param name="points">Km, loss-free depth in mm and its variance, in order of distance.</param>
    /// <param name="normalMmPer1000Km">Usual rate of the kind of position.</param>
    /// <param name="adjustedKm">Where the vehicle was last aligned; null where it was not.</param>
    public static IReadOnlyList<RateCourse> Of(IReadOnlyList<(double Km, double Mm, double Variance)> points, double normalMmPer1000Km, double? adjustedKm)
    {
        var n = points.Count;
        if (n < 3) return [new(1, double.NegativeInfinity, default, default)];
        var adjusted = adjustedKm is { } a && a > points[0].Km && a < points[^1].Km ? adjustedKm : null;
        var breaks = new List<(double Km, double Prior)>();
        for (var i = 1; i + 1 < n; i++) breaks.Add((points[i].Km, Prior / (n - 2)));
        if (adjusted is { } at) breaks.Add((at, AdjustedPrior));
        var straight = Fit(points, double.NegativeInfinity, normalMmPer1000Km);
        var courses = new List<(double Log, RateCourse Course)> { (Math.Log(1 - Math.Min(0.9, breaks.Sum(b => b.Prior))) + straight.Log, straight.Course) };
        foreach (var (km, prior) in breaks)
        {
            var (log, course) = Fit(points, km, normalMmPer1000Km);
            courses.Add((Math.Log(prior) + log, course));
        }
        var top = courses.Max(c => c.Log);
        var sum = courses.Sum(c => Math.Exp(c.Log - top));
        return [.. courses.Select(c => c.Course with { Weight = Math.Exp(c.Log - top) / sum })];
    }

    /// <summary>Log evidence of a line with one break and the rates on either side; level at the break, rate before, change.</summary>
    private static (double Log, RateCourse Course) Fit(IReadOnlyList<(double Km, double Mm, double Variance)> points, double breakKm, double normal)
    {
        var broken = !double.IsNegativeInfinity(breakKm);
        var origin = broken ? breakKm : points[^1].Km;
        double[] mean = [points.Average(p => p.Mm), normal, 0];
        var c = new double[3, 3];
        c[0, 0] = LevelSdMm * LevelSdMm;
        c[1, 1] = OwnShare * OwnShare * normal * normal;
        c[2, 2] = broken ? ChangeShare * ChangeShare * normal * normal : 0;
        double log = 0;
        var gain = new double[3];
        foreach (var (km, mm, variance) in points)
        {
            var x = (km - origin) / 1000;
            double[] row = [1, -x, broken ? -Math.Max(0, x) : 0];
            double predicted = 0, total = variance;
            for (var i = 0; i < 3; i++)
            {
                predicted += row[i] * mean[i];
                gain[i] = 0;
                for (var j = 0; j < 3; j++) gain[i] += c[i, j] * row[j];
                total += row[i] * gain[i];
            }
            log += LineBelief.LogDensity(mm - predicted, total);
            for (var i = 0; i < 3; i++) mean[i] += gain[i] / total * (mm - predicted);
            for (var i = 0; i < 3; i++)
                for (var j = 0; j < 3; j++) c[i, j] -= gain[i] * gain[j] / total;
        }
        var now = new Estimate(mean[1] + mean[2], Math.Sqrt(Math.Max(0, c[1, 1] + 2 * c[1, 2] + c[2, 2])));
        return (log, new(0, breakKm, new(mean[1], Math.Sqrt(Math.Max(0, c[1, 1]))), now));
    }
}
