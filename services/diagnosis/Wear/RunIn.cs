using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Wear;

/// <summary>
/// How the first wear of a fleet's tyres differs from the later: a new tread loses some depth faster than the line it then
/// follows (run-in), may slow down a little as it gets stiffer, and may have had another driver or route before it was surveyed.
/// </summary>
/// <remarks>Break-in over the first 1 to 2 mm: common practice, no source. Lines straight otherwise unless the fleet shows a curve by more than 4 of AIC.</remarks>
public sealed record RunIn
{
    /// <summary>Depth that a new tread loses beyond its later line, mm.</summary>
    public Estimate ExcessMm { get; init; } = new(0.15, 0.2);
    /// <summary>Fall of the rate over the whole new depth, share; zero unless the fleet shows it.</summary>
    public double SlowDown { get; init; }
    /// <summary>
    /// The same for what lies ahead, evidence and belief together: a thinner tread is stiffer and slides less, by nothing to a tenth
    /// over its life (from memory). Looking back needs no belief, looking ahead cannot do without.
    /// </summary>
    public Estimate SlowingAhead { get; init; } = new(0.05, 0.04);
    /// <summary>Standard deviation of the share by which a tyre's rate before its surveys differs from its rate during them.</summary>
    public double EarlierRateSd { get; init; } = 0.1;
    /// <summary>Fittings behind it.</summary>
    public int Fittings { get; init; }

    /// <summary>Loss within which two thirds of the excess is gone, mm: half of the 1 to 2 mm in which break-in shows.</summary>
    private const double DecayMm = 0.75;

    /// <summary>Loss after which run-in is over, mm.</summary>
    private const double OverMm = 1.5;

    /// <summary>Gain of AIC from which a curve is believed, and fewest readings of a fitting that may show it.</summary>
    private const double LeastAicGain = 4;
    private const int LeastReadings = 5;

    /// <summary>Spread of the excess from tyre to tyre, mm (from memory).</summary>
    private const double ExcessBetweenSdMm = 0.08;

    private const double LeastEarlierRateSd = 0.03;

    /// <summary>A point of a tyre fitted new, brought onto its later line.</summary>
    /// <param name="p">Start or measured point.</param>
    /// <param name="newMm">Depth when new, mm.</param>
    /// <param name="lossMm">Loss at the middle of the measured points, mm.</param>
    internal LinePoint OnLine(in LinePoint p, double newMm, double lossMm)
    {
        var loss = Math.Max(0, newMm - p.Mean.Value);
        var off = ExcessMm.Value * Math.Exp(-loss / DecayMm);
        if (p.Measured) return p with { Mean = p.Mean with { Value = p.Mean.Value - off } };
        off += Slowed(newMm, lossMm);
        var variance = p.Mean.StandardError * p.Mean.StandardError + ExcessMm.StandardError * ExcessMm.StandardError + EarlierRateSd * EarlierRateSd * lossMm * lossMm;
        return p with { Mean = new(p.Mean.Value - off, Math.Sqrt(variance)) };
    }

    /// <summary>What a tread that never ran in nor slowed down would have lost where this one lost so much since new, mm.</summary>
    internal double SettledMm(double lossMm, double newMm) =>
        lossMm <= 0 ? lossMm : lossMm - ExcessMm.Value * (1 - Math.Exp(-lossMm / DecayMm)) + Slowed(newMm, lossMm);

    /// <summary>Standard deviation of that through the excess of this tyre, mm.</summary>
    internal double SettledSdMm(double lossMm) =>
        Math.Sqrt(ExcessMm.StandardError * ExcessMm.StandardError + ExcessBetweenSdMm * ExcessBetweenSdMm) * (1 - Math.Exp(-Math.Max(0, lossMm) / DecayMm));

    /// <summary>Rate from a depth down to a limit over the rate measured about another depth; mean and error.</summary>
    /// <param name="measuredMm">Depth about which the rate was measured, mm.</param>
    /// <param name="depthMm">Depth now, mm.</param>
    /// <param name="limitMm">Limit, mm.</param>
    /// <param name="newMm">Depth when new, mm.</param>
    internal Estimate RateAhead(double measuredMm, double depthMm, double limitMm, double newMm)
    {
        var further = Math.Clamp(measuredMm - (Math.Max(depthMm, limitMm) + limitMm) / 2, 0, newMm) / newMm;
        return new(1 - SlowingAhead.Value * further, SlowingAhead.StandardError * further);
    }

    private double Slowed(double newMm, double lossMm) => SlowDown * lossMm * lossMm / (2 * newMm);

    /// <summary>Loss at the middle of the measured points, mm.</summary>
    internal static double MiddleLoss(ReadOnlySpan<LinePoint> points)
    {
        double sum = 0;
        for (var i = 1; i < points.Length; i++) sum += points[i].Mean.Value;
        return points.Length < 2 ? 0 : Math.Max(0, points[0].Mean.Value - sum / (points.Length - 1));
    }

    /// <summary>How far the start of one tyre stands above the line through its surveys alone.</summary>
    private readonly record struct Start(int Vehicle, double NewMm, double LossMm, double ExcessMm, double Variance);

    /// <summary>From the fittings that were surveyed often enough after their run-in.</summary>
    internal static RunIn Of(IReadOnlyList<FleetTyre> tyres, NoiseFigures noise, ReaderTable readers, Func<FleetTyre, double> rateMmPer1000Km)
    {
        var starts = new List<Start>();
        foreach (var tyre in tyres)
            if (Above(tyre, noise, readers, rateMmPer1000Km(tyre)) is { } start) starts.Add(start);
        if (starts.Count == 0) return new();
        var vehicles = starts.Select(s => s.Vehicle).Distinct().Count();
        var straight = Fit(starts, curved: false, vehicles);
        var curve = Fit(starts, curved: true, vehicles);
        var ahead = Fit(starts, curved: true, vehicles, believed: true).RunIn.SlowingAhead;
        return (straight.Deviance - curve.Deviance - 2 > LeastAicGain && curve.RunIn.SlowDown > 0 ? curve.RunIn : straight.RunIn) with { SlowingAhead = ahead };
    }

    private static Start? Above(FleetTyre tyre, NoiseFigures noise, ReaderTable readers, double rate)
    {
        var points = tyre.Points;
        if (!tyre.FittedNew || points.Length < LeastReadings || points[0].Mean.Value - points[1].Mean.Value < OverMm) return null;
        Span<LineReading> readings = points.Length <= 64 ? stackalloc LineReading[points.Length] : new LineReading[points.Length];
        Span<double> standardised = points.Length <= 64 ? stackalloc double[points.Length] : new double[points.Length];
        for (var i = 1; i < points.Length; i++) readings[i - 1] = FittingLines.Reading(points[i], TreadFigure.Mean, noise, readers.Bias(points[i]), rate)!.Value;
        // A reading without weight: it marks the place where the line is asked for.
        readings[^1] = new(points[0].X, points[1].Mean.Value, 1e9);
        if (LineSolver.Fit(readings, standardised) is not { } line) return null;
        var newMm = points[0].Mean.Value;
        var error = FittingLines.Widened(line.AtLast, line.ChiSquare, points.Length - 1, noise).StandardError;
        if (error > 0.3 * newMm) return null;
        return new(tyre.Vehicle, newMm, MiddleLoss(points), newMm - line.AtLast.Value, error * error + points[0].Mean.StandardError * points[0].Mean.StandardError);
    }

    /// <summary>Excess and slow-down by Huber weights with the prior as one more reading each; the spread from the median deviation.</summary>
    private static (RunIn RunIn, double Deviance) Fit(List<Start> starts, bool curved, int vehicles, bool believed = false)
    {
        var prior = new RunIn();
        var (excess, slow, between) = (prior.ExcessMm.Value, 0.0, prior.EarlierRateSd);
        // Tyres of one vehicle share its past: they count as what they were sampled with.
        var share = (double)vehicles / starts.Count;
        double excessSd = prior.ExcessMm.StandardError, slowSd = 0, deviance = 0;
        var slowPrecision = believed ? 1 / (prior.SlowingAhead.StandardError * prior.SlowingAhead.StandardError) : 1e-9;
        var needed = new double[starts.Count];
        for (var step = 0; step < 30; step++)
        {
            var priorPrecision = 1 / (prior.ExcessMm.StandardError * prior.ExcessMm.StandardError);
            double a = priorPrecision, b = 0, d = slowPrecision, ya = priorPrecision * prior.ExcessMm.Value, yb = believed ? slowPrecision * prior.SlowingAhead.Value : 0;
            deviance = 0;
            foreach (var s in starts)
            {
                var variance = s.Variance + between * between * s.LossMm * s.LossMm;
                var x = s.LossMm * s.LossMm / (2 * s.NewMm);
                var u = (s.ExcessMm - excess - slow * x) / Math.Sqrt(variance);
                var w = RobustRegression.Weight(u, RobustLoss.Huber) / variance * share;
                a += w;
                b += w * x;
                d += w * x * x;
                ya += w * s.ExcessMm;
                yb += w * x * s.ExcessMm;
                deviance += share * (Math.Abs(u) <= RobustRegression.HuberK ? u * u : RobustRegression.HuberK * (2 * Math.Abs(u) - RobustRegression.HuberK)) + share * Math.Log(variance);
            }
            var determinant = curved ? a * d - b * b : 1;
            var next = curved ? (Excess: (d * ya - b * yb) / determinant, Slow: (a * yb - b * ya) / determinant) : (ya / a, 0);
            (excessSd, slowSd) = (Math.Sqrt(curved ? d / determinant : 1 / a), curved ? Math.Sqrt(a / determinant) : 0);
            var moved = Math.Abs(next.Excess - excess) + Math.Abs(next.Slow - slow);
            (excess, slow) = next;
            for (var i = 0; i < needed.Length; i++)
            {
                var s = starts[i];
                var off = Medians.MadToSd * (s.ExcessMm - excess - slow * s.LossMm * s.LossMm / (2 * s.NewMm));
                needed[i] = (off * off - s.Variance) / Math.Max(0.25, s.LossMm * s.LossMm);
            }
            // A spread among few is hardly known.
            var seen = Math.Max(LeastEarlierRateSd * LeastEarlierRateSd, Selection.Median(needed));
            between = Math.Sqrt((10 * prior.EarlierRateSd * prior.EarlierRateSd + vehicles * seen) / (10 + vehicles));
            if (moved < 1e-9) break;
        }
        return (new RunIn { ExcessMm = new(excess, excessSd), SlowDown = slow, SlowingAhead = new(slow, slowSd), EarlierRateSd = between, Fittings = starts.Count }, deviance);
    }
}
