namespace WearWatch.Diagnosis.Wear;

/// <summary>Noise of a fleet's readings from the residuals of its wear lines.</summary>
internal static class FleetNoise
{
    /// <summary>Degrees of freedom with which the assumed noise counts against what is seen.</summary>
    private const double PriorFreedom = 30;

    /// <summary>Pairs of neighbouring residuals with which the assumed correlation counts.</summary>
    private const double PriorPairs = 60;

    private const double PriorCorrelation = 0.1;

    public static NoiseFigures Of(IReadOnlyList<FleetTyre> tyres, NeighbourSums neighbours, NoiseFigures before) => before with
    {
        MeanScale = before.MeanScale * Scale(tyres, t => t.Mean, before.MeanScale),
        EdgeScale = before.EdgeScale * Scale(tyres, t => t.Edge, before.EdgeScale),
        ShoulderScale = before.ShoulderScale * Scale(tyres, t => t.Shoulder, before.ShoulderScale),
        ResidualCorrelation = Math.Clamp(
            (PriorPairs * PriorCorrelation + (neighbours.Squares > 0 ? neighbours.Pairs * neighbours.Products / neighbours.Squares : 0)) / (PriorPairs + neighbours.Pairs), 0, 0.6),
    };

    /// <summary>
    /// Factor that makes the residuals what their errors say: per line the mean square on its degrees of freedom, over lines the
    /// mean without the worst tenth, which blunders make.
    /// </summary>
    private static double Scale(IReadOnlyList<FleetTyre> tyres, Func<FleetTyre, KeptLine> line, double present)
    {
        var ratios = new List<double>(tyres.Count);
        var lines = new List<(double Square, double Freedom)>(tyres.Count);
        foreach (var tyre in tyres)
        {
            if (line(tyre) is not { Fit: { } fit, Count: > 3 } kept) continue;
            ratios.Add(fit.ChiSquare / (kept.Count - 2.0));
            lines.Add((fit.ChiSquare, kept.Count - 2.0));
        }
        if (lines.Count == 0) return 1;
        var (keys, sorted) = (ratios.ToArray(), lines.ToArray());
        Array.Sort(keys, sorted);
        // Leaving out the worst tenth of χ²/df values takes some honest scatter with it: about a sixth on few degrees of freedom.
        var trimmed = sorted.Length >= 10 ? 1.17 : 1;
        double seen = 0, freedom = 0;
        for (var i = 0; i < (int)Math.Ceiling(sorted.Length * 0.9); i++)
        {
            seen += sorted[i].Square * trimmed;
            freedom += sorted[i].Freedom;
        }
        var prior = PriorFreedom / (present * present);
        return Math.Clamp(Math.Sqrt((prior + seen) / (PriorFreedom + freedom)), 0.5, 2);
    }
}
