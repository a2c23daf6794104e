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

    /// <summary>How the first wear differs from the later.</summary>
    public RunIn RunIn { get; init; } = new();

    /// <summary>Widening of a slope's error for that correlation: √((1+ρ)/(1−ρ)), the AR(1) factor.</summary>
    public double SlopeFactor(int count) => count > 2 ? Math.Sqrt((1 + ResidualCorrelation) / (1 - ResidualCorrelation)) : 1;
}

/// <summary>The figures of a tread that are followed over distance.</summary>
internal enum TreadFigure { Mean, Edge, Shoulder }

/// <summary>
/// A point of a fitting as its lines need it: a fleet has millions, so errors and parts of the shape are kept in single precision
/// (mm to seven digits).
/// </summary>
internal readonly record struct LinePoint
{
    private readonly double _meanMm;
    private readonly float _meanSd, _edgeMm, _edgeSd, _shoulderMm, _shoulderSd, _kmSd, _weight;
    private readonly short _technician, _gauge;
    private readonly Half _resolution;

    /// <summary>Distance, 1000 km.</summary>
    public double X { get; private init; }
    /// <summary>Survey of the vehicle, in order of time; all beyond 65 534 share the last number.</summary>
    public ushort Survey { get; private init; }
    /// <summary>False for the start of the fitting, which is recorded and not measured.</summary>
    public bool Measured { get; private init; }

    /// <summary>Error of the distance, km.</summary>
    public double KmSd => _kmSd;
    /// <summary>0 to 1: how far the survey is believed.</summary>
    public double Weight => _weight;
    /// <summary>Mean depth, mm.</summary>
    public Estimate Mean
    {
        get => new(_meanMm, _meanSd);
        init => (_meanMm, _meanSd) = (value.Value, (float)value.StandardError);
    }
    /// <summary>Edge part, mm; NaN where it was not measured.</summary>
    public Estimate Edge => new(_edgeMm, _edgeSd);
    /// <summary>Shoulder part, mm; NaN where it was not measured.</summary>
    public Estimate Shoulder => new(_shoulderMm, _shoulderSd);
    /// <summary>Step of the gauge, mm.</summary>
    public double ResolutionMm => (double)_resolution;
    /// <summary>Number of the technician; −1 for the start of the fitting and for an unnamed hand.</summary>
    public int Technician => _technician;
    /// <summary>Number of the gauge; −1 where there is none.</summary>
    public int Gauge => _gauge;

    /// <summary>Precision of the mean depth with the tyre's wandering, before the fleet's own scale, mm⁻².</summary>
    public double MeanPrecision => _weight / ((double)_meanSd * _meanSd + FittingLines.WanderSdMm * FittingLines.WanderSdMm);

    private LinePoint(FittingPoint p, int technician, int gauge, double resolutionMm)
    {
        (X, Survey, Measured) = (p.Km / 1000, (ushort)Math.Min(Math.Max(0, p.Survey), ushort.MaxValue), p.Survey >= 0);
        (_meanMm, _meanSd, _kmSd, _weight) = (p.Mean.Value, (float)p.Mean.StandardError, (float)p.KmSd, (float)p.Weight);
        (_edgeMm, _edgeSd) = p.Edge is { } e ? ((float)e.Value, (float)e.StandardError) : (float.NaN, float.NaN);
        (_shoulderMm, _shoulderSd) = p.Shoulder is { } s ? ((float)s.Value, (float)s.StandardError) : (float.NaN, float.NaN);
        _resolution = (Half)resolutionMm;
        // Beyond 32 000 names a reader is one of the unnamed.
        (_technician, _gauge) = (technician <= short.MaxValue ? (short)technician : (short)-1, gauge <= short.MaxValue ? (short)gauge : (short)-1);
    }

    public static LinePoint Of(FittingPoint p, int technician, int gauge, double resolutionMm = 0.1) => new(p, technician, gauge, resolutionMm);
}

/// <summary>Lines of one fitting against distance, per 1000 km; losses positive.</summary>
internal sealed record FittingLines(CorrelatedLine? Mean, CorrelatedLine? Edge, CorrelatedLine? Shoulder)
{
    /// <summary>Deviation of one tyre's figures from their line beyond reading noise, mm.</summary>
    public const double WanderSdMm = 0.05;

    /// <summary>Fittings judged by their own scatter count for this many degrees of freedom of the fleet's.</summary>
    private const double FleetFreedom = 10;

    /// <summary>Share of an error of distance that reaches the edge and shoulder parts, as a variance (from memory).</summary>
    private const double ShapeShareOfDistance = 0.04;

    /// <summary>Loss of mean depth, mm per 1000 km.</summary>
    public Estimate? Rate(NoiseFigures noise) => Slope(Mean, noise) is { } s ? -s : null;

    public Estimate? EdgeRate(NoiseFigures noise) => Slope(Edge, noise);

    public Estimate? ShoulderRate(NoiseFigures noise) => Slope(Shoulder, noise);

    private static Estimate? Slope(CorrelatedLine? line, NoiseFigures noise) => line is null ? null : Widened(line.Slope, line.ChiSquare, line.Count, noise);

    /// <summary>A slope with its error widened for the scatter of its own residuals and for their correlation.</summary>
    public static Estimate Widened(Estimate slope, double chiSquare, int count, NoiseFigures noise)
    {
        var own = (FleetFreedom + chiSquare) / (FleetFreedom + Math.Max(0, count - 2));
        return slope with { StandardError = slope.StandardError * Math.Sqrt(Math.Max(0.8, own)) * noise.SlopeFactor(count) };
    }

    /// <param name="points">Points of the fitting in order of distance.</param>
    /// <param name="noise">Scales of the readings' errors.</param>
    /// <param name="bias">Bias of a survey still to be taken off the means and its error; group tells surveys of one reader.</param>
    /// <param name="rateMmPer1000Km">About the rate, to turn an error of distance into one of depth.</param>
    public static FittingLines Fit(IReadOnlyList<FittingPoint> points, NoiseFigures noise, Func<int, (Estimate Bias, int Reader)> bias, double rateMmPer1000Km)
    {
        var readings = new List<LineReading>(points.Count);
        var kept = new LinePoint[points.Count];
        for (var i = 0; i < kept.Length; i++) kept[i] = LinePoint.Of(points[i], points[i].Survey < 0 ? -1 : bias(points[i].Survey).Reader, -1);
        var fittedNew = kept.Length > 0 && points[0].New;
        var loss = fittedNew ? RunIn.MiddleLoss(kept) : 0;
        return new(Line(TreadFigure.Mean), Line(TreadFigure.Edge), Line(TreadFigure.Shoulder));

        CorrelatedLine? Line(TreadFigure figure)
        {
            readings.Clear();
            for (var i = 0; i < kept.Length; i++)
            {
                var b = points[i].Survey < 0 ? new Estimate(0, 0) : bias(points[i].Survey).Bias;
                var p = fittedNew ? noise.RunIn.OnLine(kept[i], kept[0].Mean.Value, loss) : kept[i];
                if (Reading(p, figure, noise, b, rateMmPer1000Km) is { } reading) readings.Add(reading);
            }
            return CorrelatedLine.Fit(readings);
        }
    }

    /// <summary>One reading of a figure's line; null where the point does not have it. Readings of one technician share the error of his bias.</summary>
    public static LineReading? Reading(in LinePoint p, TreadFigure figure, NoiseFigures noise, in Estimate bias, double rateMmPer1000Km)
    {
        var seen = figure switch { TreadFigure.Mean => p.Mean, TreadFigure.Edge => p.Edge, _ => p.Shoulder };
        if (double.IsNaN(seen.Value)) return null;
        var distance = Square(rateMmPer1000Km / 1000 * p.KmSd);
        var variance = Square(seen.StandardError) + (p.Measured ? WanderSdMm * WanderSdMm : 0);
        return figure switch
        {
            TreadFigure.Mean => new(p.X, seen.Value - bias.Value, (Square(noise.MeanScale) * variance + distance) / p.Weight, p.Technician, Square(bias.StandardError)),
            TreadFigure.Edge => new(p.X, seen.Value, (Square(noise.EdgeScale) * variance + ShapeShareOfDistance * distance) / p.Weight),
            _ => new(p.X, seen.Value, (Square(noise.ShoulderScale) * variance + ShapeShareOfDistance * distance) / p.Weight),
        };
    }

    private static double Square(double x) => x * x;
}
