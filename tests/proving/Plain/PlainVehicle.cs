namespace WearWatch.Proving.Plain;

/// <summary>What anyone could work out of one vehicle's files with a table and a ruler; what the figures are set beside.</summary>
internal sealed record PlainVehicle
{
    /// <summary>Largest |outermost − innermost groove| of a tyre at the last finished survey, mm; null without one.</summary>
    public double? AcrossTreadMm { get; init; }
    /// <summary>Raw mean over trips of driver torque while driving straight, N·m; null without the channel.</summary>
    public PlainMean? TorqueNm { get; init; }
    /// <summary>The same with assist torque added where it is there.</summary>
    public PlainMean? TorqueWithAssistNm { get; init; }
    /// <summary>Raw mean of the steering-wheel angle while driving straight, deg.</summary>
    public PlainMean? AngleDeg { get; init; }
    /// <summary>Days since the bench last saw it; those of the window plus one where it did not.</summary>
    public int DaysSinceAlignment { get; init; }
    /// <summary>Lateral acceleration or position is logged, so that the road's bank could be known.</summary>
    public bool RoadLogged { get; init; }
    public IReadOnlyList<PlainTyre> Tyres { get; init; } = [];
}

/// <summary>Mean of trip means and its standard error.</summary>
internal sealed record PlainMean(double Value, double StandardError, int Trips);

/// <summary>Straight lines through the groove depths of one tyre since its recorded fitting.</summary>
internal sealed record PlainTyre(string Position, string LastSurveyId, IReadOnlyList<PlainLine> Grooves);

/// <summary>Ordinary least squares of depth, mm, on distance, 1000 km, from the last reading on.</summary>
/// <param name="LevelMm">Fitted depth at the last reading.</param>
/// <param name="SlopeMmPer1000Km">Below zero where it wears.</param>
/// <param name="LevelVariance">mm², from the residuals.</param>
/// <param name="SlopeVariance">Its square.</param>
/// <param name="Covariance">Of level and slope.</param>
/// <param name="Readings">Surveys, at least three.</param>
internal sealed record PlainLine(double LevelMm, double SlopeMmPer1000Km, double LevelVariance, double SlopeVariance, double Covariance, int Readings)
{
    public static PlainLine? Fit(IReadOnlyList<(double Km, double Mm)> points)
    {
        if (points.Count < 3) return null;
        var last = points.Max(p => p.Km);
        double[] x = [.. points.Select(p => (p.Km - last) / 1000)];
        double meanX = x.Average(), meanY = points.Average(p => p.Mm);
        var sxx = x.Sum(v => (v - meanX) * (v - meanX));
        if (sxx <= 0) return null;
        var slope = points.Select((p, i) => (x[i] - meanX) * (p.Mm - meanY)).Sum() / sxx;
        var level = meanY - slope * meanX;
        var variance = points.Select((p, i) => Math.Pow(p.Mm - level - slope * x[i], 2)).Sum() / (points.Count - 2);
        return new(level, slope, variance * (1.0 / points.Count + meanX * meanX / sxx), variance / sxx, -variance * meanX / sxx, points.Count);
    }

    /// <summary>Distance to a depth, km, with its 90 % interval by linearising; null where the line does not fall.</summary>
    public (double Value, double Low, double High)? Remaining(double limitMm)
    {
        if (SlopeMmPer1000Km >= 0) return null;
        var far = (LevelMm - limitMm) / -SlopeMmPer1000Km;
        var variance = (LevelVariance + far * far * SlopeVariance + 2 * far * Covariance) / (SlopeMmPer1000Km * SlopeMmPer1000Km);
        var half = MathNet.Numerics.Distributions.StudentT.InvCDF(0, 1, Readings - 2, 0.95) * Math.Sqrt(Math.Max(0, variance));
        return (1000 * Math.Max(0, far), 1000 * Math.Max(0, far - half), 1000 * Math.Max(0, far + half));
    }
}
