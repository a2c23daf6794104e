using MathNet.Numerics;
using MathNet.Numerics.Distributions;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Wear;

/// <summary>Distance until a depth is worn down to a limit.</summary>
internal static class RemainingDistance
{
    private const int Nodes = 15;

    /// <summary>
    /// Standard deviation of the share by which the rate ahead differs from the rate measured, the vehicle's condition as it is: season
    /// and weather, which half a year of surveys does not average out (from memory).
    /// </summary>
    private const double SeasonShareSd = 0.06;

    /// <summary>Quantiles of the standard normal law at the middles of equal shares, brought to unit variance.</summary>
    private static readonly double[] s_nodes = StandardNodes();

    private static double[] StandardNodes()
    {
        var z = Enumerable.Range(0, Nodes).Select(k => Normal.InvCDF(0, 1, (k + 0.5) / Nodes)).ToArray();
        var sd = Math.Sqrt(z.Average(v => v * v));
        return [.. z.Select(v => v / sd)];
    }

    /// <summary>One course that the wear of a groove may take to the limit.</summary>
    /// <param name="Weight">Probability, 0 to 1.</param>
    /// <param name="DepthMm">Depth now at the given rate, mm; its error without that of the rate.</param>
    /// <param name="RateMmPer1000Km">Rate, above zero.</param>
    /// <param name="BroughtForwardKm">Mean distance over which the readings were brought forward at that rate: a faster tyre is also shallower now.</param>
    /// <param name="Ahead">Rate ahead over the rate measured, see <see cref="RunIn.RateAhead"/>.</param>
    public readonly record struct Course(double Weight, Estimate DepthMm, Estimate RateMmPer1000Km, double BroughtForwardKm, Estimate Ahead);

    /// <summary>Distance, km, with its 90 % interval; rate log-normal and depth normal given the rate in every course.</summary>
    /// <param name="courses">At least one.</param>
    /// <param name="limitMm">Limit, mm.</param>
    public static Interval Of(IReadOnlyList<Course> courses, double limitMm)
    {
        var (total, most) = (courses.Sum(c => c.Weight), 0.0);
        var rates = new (double Ahead, double Past)[courses.Count][];
        for (var i = 0; i < rates.Length; i++)
        {
            var c = courses[i];
            rates[i] = Rates(c);
            most = Math.Max(most, 1000 * Math.Max(0, c.DepthMm.Value - limitMm + 4 * c.DepthMm.StandardError + c.RateMmPer1000Km.Value * c.BroughtForwardKm / 1000) / rates[i][0].Ahead + 1);
        }
        return new Interval(Quantile(0.5), Quantile(0.05), Quantile(0.95));

        double Reached(double km)
        {
            double sum = 0;
            for (var i = 0; i < rates.Length; i++)
            {
                var c = courses[i];
                var sd = Math.Max(c.DepthMm.StandardError, 1e-6);
                foreach (var (ahead, past) in rates[i])
                    sum += c.Weight / Nodes * 0.5 * SpecialFunctions.Erfc(-((limitMm + (ahead * km + (past - c.RateMmPer1000Km.Value) * c.BroughtForwardKm) / 1000 - c.DepthMm.Value) / sd) / Constants.Sqrt2);
            }
            return sum / total;
        }

        double Quantile(double share)
        {
            if (Reached(0) >= share) return 0;
            double low = 0, high = most;
            for (var step = 0; step < 24; step++)
            {
                var mid = (low + high) / 2;
                if (Reached(mid) < share) low = mid;
                else high = mid;
            }
            return (low + high) / 2;
        }
    }

    private static (double Ahead, double Past)[] Rates(in Course c)
    {
        var logSd = Math.Sqrt(Math.Log(1 + Math.Pow(c.RateMmPer1000Km.StandardError / c.RateMmPer1000Km.Value, 2)));
        var logMean = Math.Log(c.RateMmPer1000Km.Value) - logSd * logSd / 2;
        // Of a fast rate ahead only the measured part was there in the past.
        var aheadSd = Math.Sqrt(logSd * logSd + SeasonShareSd * SeasonShareSd + c.Ahead.StandardError * c.Ahead.StandardError);
        var ahead = c.Ahead.Value;
        return [.. s_nodes.Select(z => (ahead * Math.Exp(logMean + aheadSd * z), Math.Exp(logMean + logSd * logSd / aheadSd * z)))];
    }
}
