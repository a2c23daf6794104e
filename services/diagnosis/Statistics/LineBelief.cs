namespace WearWatch.Diagnosis.Statistics;

/// <summary>
/// Normal belief about a straight line a + b·x, updated reading by reading with known variances: gives predictions with
/// their variance and the evidence (marginal likelihood) of a set of readings. Conjugate Bayesian linear regression.
/// </summary>
public struct LineBelief
{
    private double _a, _b, _aa, _ab, _bb;

    public LineBelief(Estimate intercept, Estimate slope)
    {
        (_a, _b) = (intercept.Value, slope.Value);
        (_aa, _bb) = (intercept.StandardError * intercept.StandardError, slope.StandardError * slope.StandardError);
        _ab = 0;
    }

    public readonly Estimate Intercept => new(_a, Math.Sqrt(_aa));

    public readonly Estimate Slope => new(_b, Math.Sqrt(_bb));

    /// <summary>The line at x, without the error of a reading.</summary>
    public readonly Estimate At(double x) => new(_a + _b * x, Math.Sqrt(Math.Max(0, _aa + 2 * x * _ab + x * x * _bb)));

    /// <summary>Takes in a reading y at x of the given variance and returns its log predictive density.</summary>
    public double Take(double x, double y, double variance)
    {
        var ga = _aa + x * _ab;
        var gb = _ab + x * _bb;
        var total = ga + x * gb + variance;
        var residual = y - _a - _b * x;
        _a += ga / total * residual;
        _b += gb / total * residual;
        _aa -= ga * ga / total;
        _ab -= ga * gb / total;
        _bb -= gb * gb / total;
        return LogDensity(residual, total);
    }

    /// <summary>Log density of a normal deviation.</summary>
    public static double LogDensity(double deviation, double variance) =>
        -0.5 * (deviation * deviation / variance + Math.Log(2 * Math.PI * variance));
}
