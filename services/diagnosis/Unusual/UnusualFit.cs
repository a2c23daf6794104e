using WearWatch.Diagnosis.Rules;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Unusual;

/// <summary>Distances of one vehicle from its class; both are mean squares (about 1 on a usual vehicle) and grow with the square of a deviation.</summary>
/// <param name="SquaredPredictionError">Per figure: what the common directions do not explain.</param>
/// <param name="HotellingT2">Per direction: how far out along the common directions.</param>
/// <param name="Errors">The larger of the two, in robust standard deviations of the class's cube roots.</param>
/// <param name="Standardised">Each figure less its class's centre over its spread; NaN where not known.</param>
/// <param name="Residual">Each figure's part of the prediction error, standardised; NaN where not known.</param>
public sealed record UnusualDistances(double SquaredPredictionError, double HotellingT2, double Errors, double[] Standardised, double[] Residual)
{
    public bool BeyondLimit => Errors > DistanceSpread.LimitErrors;
}

/// <summary>What is usual in a fleet; plain numbers, so that it can be stored in a fleet snapshot.</summary>
public sealed record UnusualFit
{
    /// <summary>Names of the figures, in the order of all arrays.</summary>
    public required string[] Figures { get; init; }
    /// <summary>Classes with enough vehicles to judge by.</summary>
    public required IReadOnlyList<ClassSpread> Classes { get; init; }
    /// <summary>Orthonormal directions over the standardised figures, strongest first.</summary>
    public required double[][] Components { get; init; }
    /// <summary>Robust variance of the scores along each direction.</summary>
    public required double[] ComponentVariance { get; init; }
    /// <summary>Robust standard deviation of each figure's residual.</summary>
    public required double[] ResidualScale { get; init; }

    /// <summary>Why a vehicle cannot be judged; null when it can.</summary>
    public string? CannotJudge(VehicleFigures figures)
    {
        var own = Classes.FirstOrDefault(c => c.Class == figures.Vehicle.Class);
        if (own is null) return $"fewer than {UnusualVehicles.LeastVehicles} vehicles of its class to compare with";
        return UnusualVehicles.Standardise(figures, own).Any(double.IsFinite) ? null : "none of the figures its class is compared by is known";
    }

    /// <summary>Distances from the class, or null when the vehicle cannot be judged. Figures named by <paramref name="findings"/> are left out.</summary>
    public UnusualDistances? Distances(VehicleFigures figures, IReadOnlyList<Finding>? findings = null)
    {
        if (!Figures.SequenceEqual(UnusualFigures.All.Select(f => f.Name))) throw new InvalidOperationException("The fit was made for other figures; make a new one.");
        if (CannotJudge(figures) is not null) return null;
        var own = Classes.First(c => c.Class == figures.Vehicle.Class);
        var z = UnusualVehicles.Standardise(figures, own);
        for (var j = 0; j < z.Length; j++)
            if (findings is not null && UnusualFigures.IsNamed(UnusualFigures.All[j], figures.Vehicle, findings)) z[j] = double.NaN;
        if (!z.Any(double.IsFinite)) return null;
        return Against(z, own.SquaredPredictionError, own.HotellingT2);
    }

    /// <summary>Distances of standardised figures (NaN where not known) against these spreads.</summary>
    public UnusualDistances Against(double[] z, DistanceSpread speSpread, DistanceSpread t2Spread)
    {
        var scores = PrincipalScores.Of(z, Components, ComponentVariance);
        var residual = PrincipalScores.Residual(z, scores, Components);
        for (var j = 0; j < residual.Length; j++) residual[j] /= ResidualScale[j];
        var known = residual.Where(double.IsFinite).ToList();
        var spe = known.Sum(r => r * r) / known.Count;
        var t2 = Components.Length == 0 ? 0 : scores.Zip(ComponentVariance, (t, v) => t * t / v).Sum() / scores.Length;
        return new(spe, t2, Math.Max(speSpread.Errors(spe), Components.Length == 0 ? double.NegativeInfinity : t2Spread.Errors(t2)), z, residual);
    }

    /// <summary>A request for an inspection where a vehicle is unlike its class in ways that no rule names; null otherwise.</summary>
    public Finding? Judge(VehicleFigures figures) => Judge(figures, GeometryRules.Find(figures));

    /// <summary>The same beside findings already made.</summary>
    public Finding? Judge(VehicleFigures figures, IReadOnlyList<Finding> findings)
    {
        if (Distances(figures, findings) is not { BeyondLimit: true } distances) return null;
        var own = Classes.First(c => c.Class == figures.Vehicle.Class);
        var outstanding = Outstanding(distances).Select(j => Statement(figures, own, j)).ToList();
        return new Finding
        {
            Kind = FindingKind.Unusual,
            Sentence = $"Unlike the {own.Vehicles} vehicles of its class that it was compared with, in ways no rule names: {string.Join("; ", outstanding.Select(e => e.Statement))}.",
            EvidenceFor = outstanding,
            Confounders = [new("A wrong reading or a sensor fault looks the same", "Measure the figures named once more"), new("A duty unlike the rest of its class", "Vehicles on the same route")],
            FirstCheck = FirstCheck.For(CheckFor.Inspection),
            AlignmentMends = false,
            Strength = Math.Min(RuleLimits.StrengthCap, distances.Errors),
        };
    }

    /// <summary>Up to three figures that stand out, most outstanding first: far from the class, or from what the others foretell.</summary>
    private static IEnumerable<int> Outstanding(UnusualDistances distances)
    {
        var known = Enumerable.Range(0, distances.Standardised.Length).Where(j => double.IsFinite(distances.Standardised[j])).ToList();
        var top = known.Max(j => Math.Abs(distances.Standardised[j]));
        // Where no figure is far out alone, it is their combination: then the residuals tell.
        var of = top >= RuleLimits.AgreeingErrors.Value ? distances.Standardised : distances.Residual;
        var most = known.Max(j => Math.Abs(of[j]));
        return known.Where(j => Math.Abs(of[j]) >= most / 2).OrderByDescending(j => Math.Abs(of[j])).ThenBy(j => j).Take(3);
    }

    private static Evidence Statement(VehicleFigures figures, ClassSpread own, int j)
    {
        var figure = UnusualFigures.All[j];
        var value = figure.Of(figures)!.Value;
        var usual = new Estimate(own.Centre[j], own.Scale[j]);
        var unit = figure.Unit == "1" ? "" : $" {figure.Unit}";
        return new($"{figure.Name} {TradeWords.Number(value.Value, figure.Decimals)}{unit} ({TradeWords.Range(value, figure.Decimals)}), "
            + $"where nine in ten of its class lie between {TradeWords.Number(usual.Low, figure.Decimals)} and {TradeWords.Number(usual.High, figure.Decimals)}{unit}", UnusualFigures.Rests(figure, figures));
    }
}
