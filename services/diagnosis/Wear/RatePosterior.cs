using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Wear;

/// <summary>
/// A tyre's rate from its own line and the fleet's, by empirical Bayes on ln(rate): most tyres lie about the fleet's
/// middle, some wear faster for a reason, so the prior has a second, wide part above. Integrated on a grid.
/// </summary>
internal static class RatePosterior
{
    /// <summary>Share of tyres worn by something out of order (at most a quarter of a fleet), and how far above; from memory.</summary>
    private const double OddShare = 0.25, OddLogMean = 0.35, OddLogSd = 0.6;

    /// <summary>Prior of the ratio when the tyre is to speak for itself.</summary>
    private const double WideLogSd = 0.8;

    private const int Grid = 121;
    private const double GridLow = -2, GridHigh = 2.5;

    /// <summary>Posterior of the rate, mm per 1000 km; the prior itself without an own line.</summary>
    public static (Estimate Rate, double LogSd) Of(Estimate? own, NormalWear normal)
    {
        var soundSd = Math.Sqrt(normal.LogRateBetweenSd * normal.LogRateBetweenSd + Math.Min(0.5, normal.LogRate.StandardError) * Math.Min(0.5, normal.LogRate.StandardError));
        var m = Moments(own, normal, z => (1 - OddShare) * Density(z, 0, soundSd) + OddShare * Density(z, OddLogMean, OddLogSd));
        return (m.Rate, m.LogRatio.StandardError);
    }

    /// <summary>ln(own ÷ fleet's) from the tyre's own line alone, near enough; null where that says next to nothing.</summary>
    public static Estimate? LogRatio(Estimate? own, NormalWear normal)
    {
        if (own is null) return null;
        var ratio = Moments(own, normal, z => Density(z, 0, WideLogSd)).LogRatio;
        if (ratio.StandardError > 0.85 * WideLogSd) return null;
        return ratio with { StandardError = Math.Sqrt(ratio.StandardError * ratio.StandardError + normal.LogRate.StandardError * normal.LogRate.StandardError) };
    }

    /// <summary>Once over the whole range, and where the likelihood is sharp once more over the part that matters.</summary>
    private static (Estimate Rate, Estimate LogRatio) Moments(Estimate? own, NormalWear normal, Func<double, double> prior)
    {
        var coarse = Moments(own, normal, prior, GridLow, GridHigh);
        var sd = coarse.LogRatio.StandardError;
        if (sd > 4 * (GridHigh - GridLow) / (Grid - 1)) return coarse;
        var reach = Math.Max(6 * sd, 0.15);
        return Moments(own, normal, prior, coarse.LogRatio.Value - reach, coarse.LogRatio.Value + reach);
    }

    private static (Estimate Rate, Estimate LogRatio) Moments(Estimate? own, NormalWear normal, Func<double, double> prior, double from, double to)
    {
        Span<double> log = stackalloc double[Grid];
        var step = (to - from) / (Grid - 1);
        var top = double.NegativeInfinity;
        for (var i = 0; i < Grid; i++)
        {
            var z = from + i * step;
            log[i] = Math.Log(prior(z) + 1e-300);
            if (own is { } o)
            {
                var u = (o.Value - normal.RateMmPer1000Km * Math.Exp(z)) / o.StandardError;
                log[i] -= 0.5 * u * u;
            }
            top = Math.Max(top, log[i]);
        }
        double sum = 0, mean = 0, square = 0, logMean = 0, logSquare = 0;
        for (var i = 0; i < Grid; i++)
        {
            var z = from + i * step;
            var w = Math.Exp(log[i] - top);
            var r = normal.RateMmPer1000Km * Math.Exp(z);
            sum += w;
            mean += w * r;
            square += w * r * r;
            logMean += w * z;
            logSquare += w * z * z;
        }
        (mean, logMean) = (mean / sum, logMean / sum);
        // The share of a grid step keeps a likelihood that falls between two nodes from looking sharper than it is.
        var sd = Math.Sqrt(Math.Max(square / sum - mean * mean, 0) + mean * mean * step * step / 12);
        var logSd = Math.Sqrt(Math.Max(logSquare / sum - logMean * logMean, 0) + step * step / 12);
        return (new(mean, sd), new(logMean, logSd));
    }

    private static double Density(double z, double mean, double sd) => Math.Exp(-0.5 * (z - mean) / sd * ((z - mean) / sd)) / sd;
}
