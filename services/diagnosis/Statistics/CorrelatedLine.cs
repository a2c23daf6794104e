namespace WearWatch.Diagnosis.Statistics;

/// <summary>One reading for a line.</summary>
/// <param name="X">Place.</param>
/// <param name="Y">Reading.</param>
/// <param name="Variance">Own variance of the reading.</param>
/// <param name="Group">Readings of one group share an error; −1 for none.</param>
/// <param name="GroupVariance">Variance of that shared error; the error moves each reading of the group by its own standard deviation.</param>
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
        var copy = new LineReading[n];
        for (var i = 0; i < n; i++) copy[i] = readings[i];
        var standardised = new double[n];
        return LineSolver.Fit(copy, standardised) is not { } fit ? null : new CorrelatedLine
        {
            Slope = fit.Slope,
            AtLast = fit.AtLast,
            Standardised = standardised,
            ChiSquare = fit.ChiSquare,
            Count = n,
        };
    }
}
