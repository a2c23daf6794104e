using MathNet.Numerics;
using MathNet.Numerics.Distributions;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Wear;

/// <summary>Distance until a depth is worn down to a limit.</summary>
internal static class RemainingDistance
{
    private const int Nodes = 9;

    /// <summary>Quantiles of the standard normal law at the middles of equal shares.</summary>
    private static readonly double[] s_nodes = [.. Enumerable.Range(0, Nodes).Select(k => Normal.InvCDF(0, 1, (k + 0.5) / Nodes))];

    /// <summary>Distance, km, with its 90 % interval; depth normal, rate log-normal and independent of it.</summary>
    /// <param name="depthMm">Depth now, mm.</param>
    /// <param name="rateMmPer1000Km">Rate, above zero.</param>
    /// <param name="limitMm">Limit, mm.</param>
    public static Interval Of(Estimate depthMm, Estimate rateMmPer1000Km, double limitMm)
    {
        var logSd = Math.Sqrt(Math.Log(1 + Math.Pow(rateMmPer1000Km.StandardError / rateMmPer1000Km.Value, 2)));
        var logMean = Math.Log(rateMmPer1000Km.Value) - logSd * logSd / 2;
        var rates = s_nodes.Select(z => Math.Exp(logMean + logSd * z)).ToArray();
        var sd = Math.Max(depthMm.StandardError, 1e-6);
        double Reached(double km) => rates.Average(r => 0.5 * SpecialFunctions.Erfc(-((limitMm + r * km / 1000 - depthMm.Value) / sd) / Constants.Sqrt2));
        var most = 1000 * Math.Max(0, depthMm.Value - limitMm + 4 * sd) / rates[0] + 1;
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
