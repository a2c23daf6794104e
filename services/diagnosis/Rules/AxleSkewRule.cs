using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Rules;

/// <summary>
/// An axle that keeps its direction points aside: its left and right tyres wear, or feather, toward the same side of the
/// vehicle. Left tyre inboard and right tyre outboard means the axle points left of where it travels.
/// </summary>
public static class AxleSkewRule
{
    public static IEnumerable<Finding> Find(VehicleFigures figures)
    {
        var axles = Standing(figures);
        if (axles.Count == 0) yield break;
        var lead = axles.MaxBy(a => a.Strength)!;
        var causes = Causes(figures, axles);
        var direction = lead.Pair.Direction!.Value;
        var sign = Witnesses.SignOf(direction.Value);
        var offCentre = figures.Steering?.OffCentreDeg;
        var evidence = axles.SelectMany(a => EvidenceOf(figures, a)).ToList();
        // Off-centre angle = ratio × thrust: the wheel is turned to the side the rear axle points to.
        var wheelAgrees = causes[0] == Quantity.Thrust && RuleLimits.Agrees(offCentre, sign);
        if (wheelAgrees) evidence.Add(Witnesses.OffCentre(figures, offCentre!.Value));
        // Feather of one axle's two tyres is one kind of evidence: the profile, another axle or the steering must agree.
        var names = lead.ByEdge || axles.Count > 1 || wheelAgrees || ProfileAgrees(figures, lead);
        var (workshopFor, workshopAgainst) = Witnesses.Workshop(figures);
        var against = new List<Evidence>(workshopAgainst);
        if (causes[0] == Quantity.Thrust && RuleLimits.Agrees(offCentre, -sign)) against.Add(Witnesses.OffCentre(figures, offCentre!.Value));
        yield return new Finding
        {
            Kind = FindingKind.AxleSkew,
            Axle = lead.Axle.Number,
            Sentence = Sentence(figures, axles, lead, causes, names),
            EvidenceFor = [.. evidence, .. workshopFor],
            EvidenceAgainst = against,
            Confounders = Confounders(figures, axles, sign),
            Causes = causes,
            FirstCheck = FirstCheck.For(figures.Vehicle.Class == VehicleClass.Trailer ? CheckFor.TrailerDirection : CheckFor.AxleDirection, figures.Vehicle, lead.Axle),
            AlignmentMends = figures.Vehicle.Mends(lead.Axle, causes[0]),
            Caution = Cautions.Under(lead.Axle),
            Strength = lead.Strength,
        };
    }

    /// <summary>An axle whose tyres show a direction, by edge slope (mm per 1000 km) or by feather (mm).</summary>
    internal sealed record SkewedAxle(Axle Axle, WheelPair Pair, bool ByEdge)
    {
        public double Strength => Pair.Strength;
        public double Sign => Witnesses.SignOf(Pair.Direction!.Value.Value);
    }

    internal static SkewedAxle? Strongest(VehicleFigures figures) => Standing(figures).MaxBy(a => a.Strength);

    /// <summary>
    /// Sign of the tandem scrub angle ψ (front axle's direction less the rear one's) as far as the tyres tell; 0 when they do
    /// not, or when the axles point alike.
    /// </summary>
    internal static int TandemSign(VehicleFigures figures)
    {
        var numbers = figures.Vehicle.FixedAxles().Select(a => a.Number).ToList();
        if (numbers.Count < 2) return 0;
        var standing = Standing(figures);
        double Of(int axle) => standing.FirstOrDefault(a => a.Axle.Number == axle)?.Sign ?? 0;
        return Math.Sign(Of(numbers[0]) - Of(numbers[^1]));
    }

    internal static IEnumerable<Evidence> EvidenceOf(VehicleFigures figures, SkewedAxle skewed)
    {
        foreach (var dual in WheelPair.Members(skewed.Axle))
        {
            foreach (var e in Witnesses.Wheels(figures.Vehicle, WheelPair.Edge(figures, skewed.Axle, dual), Witnesses.EdgeOf, -skewed.Sign, skewed.Sign)) yield return e;
            foreach (var e in Witnesses.Wheels(figures.Vehicle, WheelPair.Feather(figures, skewed.Axle, dual), Witnesses.FeatherOf, -skewed.Sign, skewed.Sign)) yield return e;
        }
    }

    private static bool ProfileAgrees(VehicleFigures figures, SkewedAxle skewed) =>
        WheelPair.Members(skewed.Axle).Any(dual => RuleLimits.Agrees(WheelPair.Edge(figures, skewed.Axle, dual).Direction, skewed.Sign));

    /// <summary>Axles that keep their direction and show one, front to rear.</summary>
    private static List<SkewedAxle> Standing(VehicleFigures figures)
    {
        var found = new List<SkewedAxle>();
        foreach (var axle in figures.Vehicle.FixedAxles())
        {
            var best = WheelPair.Members(axle)
                .SelectMany(dual => new[] { new SkewedAxle(axle, WheelPair.Edge(figures, axle, dual), true), new SkewedAxle(axle, WheelPair.Feather(figures, axle, dual), false) })
                .Where(a => a.Pair.Pattern == PairPattern.SameVehicleSide)
                .MaxBy(a => a.Strength);
            if (best is not null) found.Add(best);
        }
        return found;
    }

    private static IReadOnlyList<Quantity> Causes(VehicleFigures figures, IReadOnlyList<SkewedAxle> axles)
    {
        var fixedAxles = figures.Vehicle.FixedAxles().Count;
        var opposed = axles.Any(a => a.Sign != axles[0].Sign);
        var sign = axles.MaxBy(a => a.Strength)!.Sign;
        var duty = Witnesses.OneWayTurning(figures) * sign > 0;
        var crown = figures.Depot.CrownSign() * sign > 0;
        var causes = new List<Quantity>();
        if (figures.Vehicle.Class == VehicleClass.Trailer)
        {
            // Three axles, the outer two opposed: tight turning scrubs them like that; then the spacing.
            if (opposed) return fixedAxles >= 3 ? [Quantity.Duty, Quantity.TandemSkew, Quantity.TrailerSkew] : [Quantity.TandemSkew, Quantity.Duty, Quantity.TrailerSkew];
            causes.Add(Quantity.TrailerSkew);
            if (axles.Count < fixedAxles) causes.Add(Quantity.TandemSkew);
        }
        else if (opposed)
            causes.AddRange([Quantity.TandemSkew, Quantity.Thrust]);
        else if (fixedAxles > 1 && axles.Count < fixedAxles)
            causes.AddRange([Quantity.TandemSkew, Quantity.Thrust]);
        else
            causes.Add(Quantity.Thrust);
        if (duty) causes.Add(Quantity.Duty);
        if (crown) causes.Add(Quantity.Crown);
        return causes;
    }

    private static string Sentence(VehicleFigures figures, IReadOnlyList<SkewedAxle> axles, SkewedAxle lead, IReadOnlyList<Quantity> causes, bool named)
    {
        var toward = (lead.Sign > 0 ? Side.Right : Side.Left).Word();
        var figure = lead.Pair.Direction!.Value * lead.Sign;
        var (what, unit, decimals) = lead.ByEdge ? ("wear faster than normal on the shoulder", TradeWords.PerDistance, 3) : ("carry sharp rib edges", "mm", 2);
        var where = lead.ByEdge ? toward : (lead.Sign > 0 ? Side.Left : Side.Right).Word();
        var tyres = $"Both {TradeWords.Tyres(figures.Vehicle, lead.Axle.Number, lead.Pair.Dual)} {what} toward the vehicle's {where} by {TradeWords.Full(figure, decimals, unit)}";
        var names = !named ? "" : causes[0] switch
        {
            Quantity.TandemSkew when axles.Any(a => a.Sign != lead.Sign) => ", a neighbour axle the other way: the axles do not run parallel",
            Quantity.TandemSkew => $": agreeing on an axle pointing {TradeWords.Direction(lead.Sign)} of its neighbour",
            Quantity.TrailerSkew => $": agreeing on a trailer axle pointing {TradeWords.Direction(lead.Sign)}",
            Quantity.Thrust => $": agreeing on an axle pointing {TradeWords.Direction(lead.Sign)}",
            _ => ", another axle the other way",
        };
        return $"{tyres}{names}.";
    }

    private static IReadOnlyList<Confounder> Confounders(VehicleFigures figures, IReadOnlyList<SkewedAxle> axles, double sign)
    {
        var list = new List<Confounder>();
        if (figures.Depot.CrownSign() * sign > 0) list.Add(new("Crown of the road on the traffic side does the same", "Vehicles of the same depot and class would show it too"));
        if (figures.Route is { Loop: true } || Witnesses.OneWayTurning(figures) is not null)
            list.Add(new("The usual route turns mostly one way", "Compare vehicles on the same route"));
        if (axles.Count > 1 || figures.Vehicle.FixedAxles().Count > 2)
            list.Add(new("Tight turning scrubs the first and last axle of a group in opposite directions", "The middle axle stays clean then; ask about yards and docks"));
        list.Add(new("Bent or loose axle location moves under load", "Spacing left and right, empty and loaded"));
        return list;
    }
}
