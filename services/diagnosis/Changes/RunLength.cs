using MathNet.Numerics.Distributions;
using MathNet.Numerics.LinearAlgebra;

namespace WearWatch.Diagnosis.Changes;

/// <summary>
/// Average number of values until a chart sounds, for independent normal values: the chart's statistic as a Markov chain over narrow
/// classes, (I − Q)·L = 1.
/// </summary>
/// <remarks>CUSUM: Brook and Evans, Biometrika 59 (1972) 539; EWMA: Lucas and Saccucci, Technometrics 32 (1990) 1.</remarks>
public static class RunLength
{
    private const int Classes = 120;

    /// <summary>Two-sided CUSUM from zero: 1/L = 1/L⁺ + 1/L⁻.</summary>
    /// <param name="slack">k, standard deviations.</param>
    /// <param name="limit">h, standard deviations.</param>
    /// <param name="shift">Mean of the values, standard deviations.</param>
    /// <param name="classes">Classes of the chain; more are finer.</param>
    public static double Cusum(double slack, double limit, double shift = 0, int classes = Classes) =>
        1 / (1 / OneSided(slack, limit, shift, classes) + 1 / OneSided(slack, limit, -shift, classes));

    private static double OneSided(double slack, double limit, double shift, int classes)
    {
        // The first class stands for zero and is half as wide as the others (Brook and Evans).
        var width = 2 * limit / (2 * classes - 1);
        return Solve(classes, (i, j) =>
        {
            var at = (j - i) * width + slack - shift;
            return Normal.CDF(0, 1, at + width / 2) - (j == 0 ? 0 : Normal.CDF(0, 1, at - width / 2));
        })[0];
    }

    /// <summary>Two-sided EWMA from the target with its lasting limits ±L·√(λ/(2 − λ)).</summary>
    public static double Ewma(double weight, double limit, double shift = 0, int classes = Classes)
    {
        var n = classes | 1;
        var bound = limit * Math.Sqrt(weight / (2 - weight));
        var width = 2 * bound / n;
        double Centre(int i) => -bound + (i + 0.5) * width;
        return Solve(n, (i, j) =>
        {
            var from = (1 - weight) * Centre(i) + weight * shift;
            return Normal.CDF(0, 1, (Centre(j) + width / 2 - from) / weight) - Normal.CDF(0, 1, (Centre(j) - width / 2 - from) / weight);
        })[n / 2];
    }

    /// <summary>Limit at which a chart in order sounds once in so many values on average.</summary>
    /// <param name="wanted">Above 2.</param>
    /// <param name="length">Run length for a limit, growing.</param>
    public static double LimitFor(double wanted, Func<double, double> length)
    {
        var (low, high) = (0.5, 12.0);
        for (var step = 0; step < 40 && high - low > 1e-4; step++)
        {
            var middle = (low + high) / 2;
            if (length(middle) < wanted) low = middle;
            else high = middle;
        }
        return high;
    }

    private static Vector<double> Solve(int n, Func<int, int, double> probability) =>
        (Matrix<double>.Build.DenseIdentity(n) - Matrix<double>.Build.Dense(n, n, probability)).Solve(Vector<double>.Build.Dense(n, 1.0));
}
