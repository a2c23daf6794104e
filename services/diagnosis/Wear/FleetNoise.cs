using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Wear;

/// <summary>Noise of a fleet's readings from the residuals of its wear lines.</summary>
internal static class FleetNoise
{
    /// <summary>Degrees of freedom with which the assumed noise counts against what is seen.</summary>
    private const double PriorFreedom = 30;

    /// <summary>Pairs of neighbouring residuals with which the assumed correlation counts.</summary>
    private const double PriorPairs = 60;

    private const double PriorCorrelation = 0.1;

    public static NoiseFigures Of(IReadOnlyList<FittingLines> lines, NoiseFigures before) => before with
    {
        MeanScale = before.MeanScale * Scale([.. lines.Select(l => l.Mean).OfType<CorrelatedLine>()], before.MeanScale),
        EdgeScale = before.EdgeScale * Scale([.. lines.Select(l => l.Edge).OfType<CorrelatedLine>()], before.EdgeScale),
        ShoulderScale = before.ShoulderScale * Scale([.. lines.Select(l => l.Shoulder).OfType<CorrelatedLine>()], before.ShoulderScale),
        ResidualCorrelation = Correlation([.. lines.SelectMany(l => new[] { l.Edge, l.Shoulder }).OfType<CorrelatedLine>()]),
    };

    /// <summary>
    /// Factor that makes the residuals what their errors say: per line the mean square on its degrees of freedom, over lines the
    /// mean without the worst tenth, which blunders make.
    /// </summary>
    private static double Scale(IReadOnlyList<CorrelatedLine> lines, double present)
    {
        var usable = lines.Where(l => l.Count > 3).Select(l => (Square: l.ChiSquare, Freedom: l.Count - 2.0)).OrderBy(l => l.Square / l.Freedom).ToList();
        if (usable.Count == 0) return 1;
        var kept = usable.Take((int)Math.Ceiling(usable.Count * 0.9)).ToList();
        // Leaving out the worst tenth of χ²/df values takes some honest scatter with it: about a sixth on few degrees of freedom.
        var trimmed = usable.Count >= 10 ? 1.17 : 1;
        var seen = kept.Sum(l => l.Square) * trimmed;
        var freedom = kept.Sum(l => l.Freedom);
        var prior = PriorFreedom / (present * present);
        return Math.Clamp(Math.Sqrt((prior + seen) / (PriorFreedom + freedom)), 0.5, 2);
    }

    /// <summary>
    /// Lag-one correlation of residuals, corrected for what fitting a line alone does to it: near −2/n for white noise
    /// at even spacing.
    /// </summary>
    private static double Correlation(IReadOnlyList<CorrelatedLine> lines)
    {
        double products = 0, squares = 0, pairs = 0;
        foreach (var line in lines.Where(l => l.Count >= 5))
        {
            var r = line.Standardised.Select(v => Math.Clamp(v, -3, 3)).ToArray();
            var square = r.Sum(v => v * v) / (line.Count - 2);
            for (var i = 1; i < r.Length; i++) products += r[i] * r[i - 1];
            products += 2 * square * (line.Count - 1.0) / line.Count;
            squares += square * (line.Count - 1);
            pairs += line.Count - 1;
        }
        var seen = squares > 0 ? products / squares : 0;
        return Math.Clamp((PriorPairs * PriorCorrelation + pairs * seen) / (PriorPairs + pairs), 0, 0.6);
    }
}
