using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Wear;

/// <summary>How the noise of a fleet's readings compares with what is assumed of them.</summary>
public sealed record NoiseFigures
{
    /// <summary>Factors on the standard error of one tyre's mean, edge and shoulder figure; 1 as assumed.</summary>
    public double MeanScale { get; init; } = 1;
    public double EdgeScale { get; init; } = 1;
    public double ShoulderScale { get; init; } = 1;
    /// <summary>Correlation of neighbouring residuals of a wear line, 0 to 0.6: they come in runs of one sign.</summary>
    public double ResidualCorrelation { get; init; } = 0.1;

    /// <summary>Widening of a slope's error for that correlation: √((1+ρ)/(1−ρ)), the AR(1) factor.</summary>
    public double SlopeFactor(int count) => count > 2 ? Math.Sqrt((1 + ResidualCorrelation) / (1 - ResidualCorrelation)) : 1;
}

/// <summary>Lines of one fitting against distance, per 1000 km; losses positive.</summary>
internal sealed record FittingLines(CorrelatedLine? Mean, CorrelatedLine? Edge, CorrelatedLine? Shoulder)
{
    /// <summary>Deviation of one tyre's figures from their line beyond reading noise, mm.</summary>
    public const double WanderSdMm = 0.05;

    /// <summary>Fittings judged by their own scatter count for this many degrees of freedom of the fleet's.</summary>
    private const double FleetFreedom = 10;

    /// <summary>Loss of mean depth, mm per 1000 km.</summary>
    public Estimate? Rate(NoiseFigures noise) => Slope(Mean, noise) is { } s ? -s : null;

    public Estimate? EdgeRate(NoiseFigures noise) => Slope(Edge, noise);

    public Estimate? ShoulderRate(NoiseFigures noise) => Slope(Shoulder, noise);

    private static Estimate? Slope(CorrelatedLine? line, NoiseFigures noise)
    {
        if (line is null) return null;
        var own = (FleetFreedom + line.ChiSquare) / (FleetFreedom + Math.Max(0, line.Count - 2));
        return line.Slope with { StandardError = line.Slope.StandardError * Math.Sqrt(Math.Max(0.8, own)) * noise.SlopeFactor(line.Count) };
    }

    /// <param name="points">Points of the fitting in order of distance.</param>
    /// <param name="noise">Scales of the readings' errors.</param>
    /// <param name="bias">Bias of a survey still to be taken off the means and its error; group tells surveys of one reader.</param>
    /// <param name="rateMmPer1000Km">About the rate, to turn an error of distance into one of depth.</param>
    public static FittingLines Fit(IReadOnlyList<FittingPoint> points, NoiseFigures noise, Func<int, (Estimate Bias, int Reader)> bias, double rateMmPer1000Km)
    {
        var (mean, edge, shoulder) = Readings(points, noise, bias, rateMmPer1000Km);
        return new(CorrelatedLine.Fit(mean), CorrelatedLine.Fit(edge), CorrelatedLine.Fit(shoulder));
    }

    /// <summary>The points with their whole errors: of the reading, of the wandering line, of the distance, of the reader.</summary>
    public static (List<LineReading> Mean, List<LineReading> Edge, List<LineReading> Shoulder) Readings(IReadOnlyList<FittingPoint> points, NoiseFigures noise, Func<int, (Estimate Bias, int Reader)> bias, double rateMmPer1000Km)
    {
        var mean = new List<LineReading>(points.Count);
        var edge = new List<LineReading>(points.Count);
        var shoulder = new List<LineReading>(points.Count);
        foreach (var p in points)
        {
            var (b, reader) = p.Survey < 0 ? (new Estimate(0, 0), -1) : bias(p.Survey);
            var x = p.Km / 1000;
            var distance = Square(rateMmPer1000Km / 1000 * p.KmSd);
            var wander = p.Survey < 0 ? 0 : WanderSdMm * WanderSdMm;
            mean.Add(new(x, p.Mean.Value - b.Value, (Square(noise.MeanScale) * (Square(p.Mean.StandardError) + wander) + distance) / p.Weight, reader, Square(b.StandardError)));
            if (p.Edge is { } e) edge.Add(new(x, e.Value, (Square(noise.EdgeScale) * (Square(e.StandardError) + wander) + 0.04 * distance) / p.Weight));
            if (p.Shoulder is { } s) shoulder.Add(new(x, s.Value, (Square(noise.ShoulderScale) * (Square(s.StandardError) + wander) + 0.04 * distance) / p.Weight));
        }
        return (mean, edge, shoulder);
    }

    private static double Square(double x) => x * x;
}
