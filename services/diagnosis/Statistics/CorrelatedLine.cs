namespace WearWatch.Diagnosis.Statistics;

/// <summary>One reading for a line.</summary>
/// <param name="X">Place.</param>
/// <param name="Y">Reading.</param>
/// <param name="Variance">Own variance of the reading.</param>
/// <param name="Group">Readings of one group share an error; −1 for none.</param>
/// <param name="GroupVariance">Variance of that shared error.</param>
public readonly record struct LineReading(double X, double Y, double Variance, int Group = -1, double GroupVariance = 0);

/// <summary>
/// Generalised least-squares line with known variances and errors shared within groups (one technician's bias cancels from
/// the slope when he took every reading, and does not otherwise), made robust by Huber weights. For few points the first
/// residuals come from the median of pair slopes.
/// </summary>
public sealed record CorrelatedLine
{
    public required Estimate Slope { get; init; }
    /// <summary>The line at the last X.</summary>
    public required Estimate AtLast { get; init; }
    /// <summary>Residuals in their own standard deviations, in the order given.</summary>
    public required double[] Standardised { get; init; }
    public required int Count { get; init; }

    /// <summary>Residuals against their whole covariance, r'V⁻¹r on n − 2 degrees of freedom, with the robust weights in.</summary>
    public required double ChiSquare { get; init; }

    /// <summary>Null with fewer than two places.</summary>
    public static CorrelatedLine? Fit(IReadOnlyList<LineReading> readings)
    {
        var n = readings.Count;
        if (n < 2) return null;
        var x0 = readings[n - 1].X;
        if (readings.All(r => Math.Abs(r.X - x0) < 1e-9)) return null;
        var weights = new double[n];
        Array.Fill(weights, 1);
        if (n > 3) Reweigh(readings, weights, TheilSenResiduals(readings));
        var residuals = new double[n];
        var fit = Solve(readings, weights, x0, residuals);
        for (var step = 0; n > 3 && step < 8; step++)
        {
            if (!Reweigh(readings, weights, residuals)) break;
            fit = Solve(readings, weights, x0, residuals);
        }
        for (var i = 0; i < n; i++) residuals[i] /= Math.Sqrt(readings[i].Variance + readings[i].GroupVariance);
        return new CorrelatedLine
        {
            Slope = new(fit.B, Math.Sqrt(fit.Bb)),
            AtLast = new(fit.A, Math.Sqrt(fit.Aa)),
            Standardised = residuals,
            ChiSquare = fit.ChiSquare,
            Count = n,
        };
    }

    private static double[] TheilSenResiduals(IReadOnlyList<LineReading> readings)
    {
        var line = TheilSen.Fit([.. readings.Select(r => r.X)], [.. readings.Select(r => r.Y)]);
        return [.. readings.Select(r => r.Y - line.Intercept - line.Slope * r.X)];
    }

    private static bool Reweigh(IReadOnlyList<LineReading> readings, double[] weights, double[] residuals)
    {
        var change = 0.0;
        for (var i = 0; i < weights.Length; i++)
        {
            var w = RobustRegression.Weight(residuals[i] / Math.Sqrt(readings[i].Variance + readings[i].GroupVariance), RobustLoss.Huber);
            change = Math.Max(change, Math.Abs(w - weights[i]));
            weights[i] = w;
        }
        return change > 1e-4;
    }

    private static (double A, double B, double Aa, double Bb, double ChiSquare) Solve(IReadOnlyList<LineReading> readings, double[] weights, double x0, double[] residuals)
    {
        var n = readings.Count;
        var v = new double[n, n];
        for (var i = 0; i < n; i++)
        {
            for (var j = 0; j <= i; j++)
                if (readings[i].Group >= 0 && readings[i].Group == readings[j].Group) v[i, j] = readings[i].GroupVariance;
            v[i, i] += readings[i].Variance / weights[i];
        }
        SmallCholesky.Factor(v);
        var one = new double[n];
        var x = new double[n];
        var y = new double[n];
        for (var i = 0; i < n; i++) (one[i], x[i], y[i]) = (1, readings[i].X - x0, readings[i].Y);
        SmallCholesky.Whiten(v, one);
        SmallCholesky.Whiten(v, x);
        SmallCholesky.Whiten(v, y);
        double s11 = 0, s1x = 0, sxx = 0, s1y = 0, sxy = 0;
        for (var i = 0; i < n; i++)
        {
            s11 += one[i] * one[i];
            s1x += one[i] * x[i];
            sxx += x[i] * x[i];
            s1y += one[i] * y[i];
            sxy += x[i] * y[i];
        }
        var determinant = s11 * sxx - s1x * s1x;
        var b = (s11 * sxy - s1x * s1y) / determinant;
        var a = (sxx * s1y - s1x * sxy) / determinant;
        double chiSquare = 0;
        for (var i = 0; i < n; i++)
        {
            residuals[i] = readings[i].Y - a - b * (readings[i].X - x0);
            var white = y[i] - a * one[i] - b * x[i];
            chiSquare += white * white;
        }
        return (a, b, sxx / determinant, s11 / determinant, chiSquare);
    }
}

/// <summary>Cholesky factor of the few-by-few covariance matrices of one fitting, in place; larger systems go to MathNet.</summary>
internal static class SmallCholesky
{
    /// <summary>Replaces the lower triangle of a positive definite matrix by its factor.</summary>
    public static void Factor(double[,] a)
    {
        for (var j = 0; j < a.GetLength(0); j++)
        {
            for (var k = 0; k < j; k++)
                for (var i = j; i < a.GetLength(0); i++) a[i, j] -= a[i, k] * a[j, k];
            var root = Math.Sqrt(Math.Max(a[j, j], 1e-15));
            for (var i = j; i < a.GetLength(0); i++) a[i, j] /= root;
        }
    }

    /// <summary>Solves L·z = b in place, after which inner products are those of the inverse covariance.</summary>
    public static void Whiten(double[,] factor, double[] b)
    {
        for (var i = 0; i < b.Length; i++)
        {
            for (var k = 0; k < i; k++) b[i] -= factor[i, k] * b[k];
            b[i] /= factor[i, i];
        }
    }
}
