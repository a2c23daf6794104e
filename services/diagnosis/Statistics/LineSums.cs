namespace WearWatch.Diagnosis.Statistics;

/// <summary>
/// Weighted sums of readings of a line, from which the posterior and the evidence of <see cref="LineBelief"/> follow at once for
/// any stretch of them: sums are added and subtracted instead of taking the readings in again one by one.
/// </summary>
/// <remarks>Information form of conjugate Bayesian linear regression; the caller centres x and y, so that differences keep their digits.</remarks>
public struct LineSums
{
    private double _s, _sx, _sxx, _sy, _sxy, _syy, _logVariance;
    // Product of the variances so far: one logarithm for many readings.
    private double _variance;

    public int Count { get; private set; }

    public void Add(double x, double y, double variance)
    {
        var w = 1 / variance;
        _s += w;
        _sx += w * x;
        _sxx += w * x * x;
        _sy += w * y;
        _sxy += w * x * y;
        _syy += w * y * y;
        _variance = Count == 0 ? variance : _variance * variance;
        Count++;
        if (_variance is > 1e-100 and < 1e100) return;
        _logVariance += Math.Log(_variance);
        _variance = 1;
    }

    public static LineSums operator -(in LineSums a, in LineSums b) => new()
    {
        _s = a._s - b._s,
        _sx = a._sx - b._sx,
        _sxx = a._sxx - b._sxx,
        _sy = a._sy - b._sy,
        _sxy = a._sxy - b._sxy,
        _syy = a._syy - b._syy,
        _logVariance = a._logVariance - b._logVariance,
        _variance = b.Count == 0 ? a._variance : a._variance / b._variance,
        Count = a.Count - b.Count,
    };

    /// <summary>The line at <paramref name="origin"/> after these readings.</summary>
    /// <param name="origin">x where the prior's intercept stands.</param>
    /// <param name="intercept">Prior of the line at the origin.</param>
    /// <param name="slope">Prior of the slope, independent of the intercept.</param>
    public readonly Estimate At(double origin, in Estimate intercept, in Estimate slope)
    {
        if (Count == 0) return intercept;
        var (aa, ab, bb, ra, rb, _) = About(origin, intercept, slope);
        var determinant = aa * bb - ab * ab;
        return new(intercept.Value + (bb * ra - ab * rb) / determinant, Math.Sqrt(Math.Max(0, bb / determinant)));
    }

    /// <summary>Log marginal likelihood of these readings.</summary>
    public readonly double Evidence(double origin, in Estimate intercept, in Estimate slope)
    {
        if (Count == 0) return 0;
        var (aa, ab, bb, ra, rb, rr) = About(origin, intercept, slope);
        var determinant = aa * bb - ab * ab;
        var gained = (bb * ra * ra - 2 * ab * ra * rb + aa * rb * rb) / determinant;
        var prior = intercept.StandardError * slope.StandardError;
        return -0.5 * (Count * s_logTwoPi + _logVariance + Math.Log(determinant * prior * prior * _variance) + rr - gained);
    }

    private static readonly double s_logTwoPi = Math.Log(2 * Math.PI);

    /// <summary>Posterior precision about the origin, and the weighted residuals from the prior's line there.</summary>
    private readonly (double Aa, double Ab, double Bb, double Ra, double Rb, double Rr) About(double origin, in Estimate intercept, in Estimate slope)
    {
        var sx = _sx - origin * _s;
        var sxx = _sxx - origin * (2 * _sx - origin * _s);
        var sxy = _sxy - origin * _sy;
        var (a, b) = (intercept.Value, slope.Value);
        return (_s + 1 / (intercept.StandardError * intercept.StandardError), sx, sxx + 1 / (slope.StandardError * slope.StandardError),
            _sy - a * _s - b * sx, sxy - a * sx - b * sxx, _syy - 2 * (a * _sy + b * sxy) + a * (a * _s + 2 * b * sx) + b * b * sxx);
    }
}
