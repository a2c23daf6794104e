using WearWatch.Diagnosis.Rules;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Unusual;

/// <summary>
/// Distances of one vehicle from its class; all grow with the square of a deviation. The first two are the textbook's; a vehicle is judged by
/// the other three, whose tails the bulk of a fleet foretells: one figure far out counts in <see cref="Greatest"/> and not everywhere.
/// </summary>
/// <param name="SquaredPredictionError">Mean square per figure of what the common directions do not explain; about 1 on a usual vehicle.</param>
/// <param name="HotellingT2">Mean square per direction of how far out along the common directions; about 1 on a usual vehicle.</param>
/// <param name="Greatest">The greatest square among the residuals: one figure far out is not thinned by the many that are not.</param>
/// <param name="Breadth">Mean square of the residuals, none counting for more than three spreads: many figures a little off.</param>
/// <param name="Along">Mean square along the common directions, no figure counting for more than three spreads: out together, as the fleet varies, but further.</param>
/// <param name="Errors">The largest of the three, in scales of the class's cube roots.</param>
/// <param name="Standardised">Each figure less its class's centre over its spread; NaN where not known.</param>
/// <param name="Residual">Each figure's part that the common directions do not explain, standardised; NaN where not known.</param>
public sealed record UnusualDistances(double SquaredPredictionError, double HotellingT2, double Greatest, double Breadth, double Along, double Errors, double[] Standardised, double[] Residual)
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
        return Against(z, own);
    }

    /// <summary>Distances of standardised figures (NaN where not known) against the spreads of a class.</summary>
    public UnusualDistances Against(double[] z, ClassSpread own)
    {
        double T2(double[] scores) => Components.Length == 0 ? 0 : scores.Zip(ComponentVariance, (t, v) => t * t / v).Sum() / scores.Length;
        double[] Residual(double[] scores)
        {
            var residual = PrincipalScores.Residual(z, scores, Components);
            for (var j = 0; j < residual.Length; j++) residual[j] /= ResidualScale[j];
            return residual;
        }
        double MeanSquare(double[] residual, double most) => residual.Where(double.IsFinite).Average(r => Math.Min(r * r, most));

        var whole = PrincipalScores.Of(z, Components, ComponentVariance);
        var held = PrincipalScores.Of(UnusualVehicles.Held(z), Components, ComponentVariance);
        var left = Residual(held);
        var (greatest, breadth, along) = (left.Where(double.IsFinite).Max(r => r * r), MeanSquare(left, UnusualVehicles.Winsor * UnusualVehicles.Winsor), T2(held));
        var errors = Math.Max(own.Greatest.Errors(greatest), own.Breadth.Errors(breadth));
        if (Components.Length > 0) errors = Math.Max(errors, own.Along.Errors(along));
        return new(MeanSquare(Residual(whole), double.PositiveInfinity), T2(whole), greatest, breadth, along, errors, z, left);
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
