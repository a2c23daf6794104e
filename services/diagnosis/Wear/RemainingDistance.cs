using MathNet.Numerics;
using MathNet.Numerics.Distributions;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Wear;

/// <summary>Distance until a depth is worn down to a limit.</summary>
internal static class RemainingDistance
{
    private const int Nodes = 15;

    /// <summary>
    /// Standard deviations of the share by which the rate ahead differs from the rate measured, the vehicle's condition as it is:
    /// season and weather, which half a year of surveys does not average out, and the slowing of a tread over the rest of its
    /// life, which is not assumed but may be (both from memory; the fleet's own slow-down is admitted on evidence only).
    /// </summary>
    private const double SeasonShareSd = 0.045, SlowDownShareSd = 0.05;

    /// <summary>Quantiles of the standard normal law at the middles of equal shares, brought to unit variance.</summary>
    private static readonly double[] s_nodes = StandardNodes();

    private static double[] StandardNodes()
    {
        var z = Enumerable.Range(0, Nodes).Select(k => Normal.InvCDF(0, 1, (k + 0.5) / Nodes)).ToArray();
        var sd = Math.Sqrt(z.Average(v => v * v));
        return [.. z.Select(v => v / sd)];
    }

    /// <summary>Distance, km, with its 90 % interval; rate log-normal, depth normal given the rate.</summary>
    /// <param name="depthMm">Depth now at the given rate, mm; its error without that of the rate.</param>
    /// <param name="rateMmPer1000Km">Rate, above zero.</param>
    /// <param name="broughtForwardKm">Mean distance over which the readings were brought forward at that rate: a faster tyre is also shallower now.</param>
    /// <param name="limitMm">Limit, mm.</param>
    public static Interval Of(Estimate depthMm, Estimate rateMmPer1000Km, double broughtForwardKm, double limitMm)
    {
        var logSd = Math.Sqrt(Math.Log(1 + Math.Pow(rateMmPer1000Km.StandardError / rateMmPer1000Km.Value, 2)));
        var logMean = Math.Log(rateMmPer1000Km.Value) - logSd * logSd / 2;
        // Of a fast rate ahead only the measured part was there in the past.
        var aheadSd = Math.Sqrt(logSd * logSd + SeasonShareSd * SeasonShareSd + SlowDownShareSd * SlowDownShareSd);
        var rates = s_nodes.Select(z => (Ahead: Math.Exp(logMean + aheadSd * z), Past: Math.Exp(logMean + logSd * logSd / aheadSd * z))).ToArray();
        var sd = Math.Max(depthMm.StandardError, 1e-6);
        double Reached(double km) => rates.Average(r => 0.5 * SpecialFunctions.Erfc(-((limitMm + (r.Ahead * km + (r.Past - rateMmPer1000Km.Value) * broughtForwardKm) / 1000 - depthMm.Value) / sd) / Constants.Sqrt2));
        var most = 1000 * Math.Max(0, depthMm.Value - limitMm + 4 * sd + rateMmPer1000Km.Value * broughtForwardKm / 1000) / rates[0].Ahead + 1;
        return new Interval(Quantile(0.5), Quantile(0.05), Quantile(0.95));

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
}
