using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Rules;

/// <summary>
/// Rib edges stand sharp on one side: the tread slid sideways while rolling. Sharp inboard means that wheel runs toe-in,
/// sharp outboard toe-out (1948 shop manual, pp. 212-213, agrees with the sliding direction).
/// </summary>
public static class FeatheringRule
{
    public static IEnumerable<Finding> Find(VehicleFigures figures)
    {
        foreach (var axle in figures.Vehicle.Axles.OrderBy(a => a.Number))
        {
            var pair = WheelPair.Members(axle).Select(dual => WheelPair.Feather(figures, axle, dual)).MaxBy(p => p.Strength)!;
            var steers = axle.Steered || figures.Vehicle.IsFront(axle.Number);
            if (pair.Pattern == PairPattern.None || (pair.Pattern == PairPattern.SameVehicleSide && !steers)) continue;
            yield return pair.Pattern == PairPattern.SameVehicleSide ? Opposed(figures, axle, pair) : Sharp(figures, axle, pair);
        }
    }

    /// <summary>Both wheels alike, or one wheel alone.</summary>
    private static Finding Sharp(VehicleFigures figures, Axle axle, WheelPair pair)
    {
        var vehicle = figures.Vehicle;
        var leading = pair.Leading!.Value;
        var sign = Witnesses.SignOf(leading.Value);
        var both = pair.Pattern == PairPattern.Mirrored;
        var edge = WheelPair.Edge(figures, axle, pair.Dual);
        var profile = both ? edge.Shared : pair.WorseSide == Side.Left ? edge.LeftFigure : edge.RightFigure;
        var profileAgrees = RuleLimits.Agrees(profile, sign);
        var toe = sign > 0 ? "toe-in" : "toe-out";
        var where = sign > 0 ? "inboard" : "outboard";
        var (workshopFor, workshopAgainst) = Witnesses.Workshop(figures);
        var sentence = both
            ? $"Both {TradeWords.Tyres(vehicle, axle.Number, pair.Dual)} carry sharp rib edges {where} ({TradeWords.LeftRight(pair.LeftFigure * sign, pair.RightFigure * sign, 2, "mm")}; {TradeWords.Range(leading * sign, 2)})"
            : $"The {TradeWords.Tyre(vehicle, pair.WorseTyre!.Position)} carries sharp rib edges {where} by {TradeWords.Full(leading * sign, 2, "mm")}";
        IReadOnlyList<Quantity> causes = both || vehicle.IsFront(axle.Number)
            ? [vehicle.ToeOf(axle.Number), Quantity.Duty]
            : [Quantity.RearTotalToe, vehicle.Class == VehicleClass.Trailer ? Quantity.TrailerSkew : Quantity.Thrust];
        return new Finding
        {
            Kind = FindingKind.Feathering,
            Axle = axle.Number,
            Side = both ? null : pair.WorseSide,
            Dual = axle.Duals ? pair.Dual : null,
            Sentence = sentence + (profileAgrees ? $"; the wear across the tread agrees on {toe}." : "."),
            EvidenceFor = [.. Wheels(figures, pair, both, sign), .. ProfileEvidence(figures, edge, pair, both, profileAgrees ? sign : 0), .. workshopFor],
            EvidenceAgainst = [.. ProfileEvidence(figures, edge, pair, both, RuleLimits.Agrees(profile, -sign) ? -sign : 0), .. workshopAgainst],
            Confounders = Confounders(pair, both),
            Causes = causes,
            FirstCheck = FirstCheck.For(CheckFor.Toe, figures.Vehicle, axle),
            AlignmentMends = vehicle.Mends(axle, causes[0]),
            Caution = Cautions.Under(axle),
            Strength = pair.Strength,
        };
    }

    /// <summary>One wheel in and its mate out, on wheels that steer.</summary>
    private static Finding Opposed(VehicleFigures figures, Axle axle, WheelPair pair)
    {
        var vehicle = figures.Vehicle;
        var direction = pair.Direction!.Value;
        var sign = Witnesses.SignOf(direction.Value);
        var rearAxles = vehicle.FixedAxles().Count;
        var turning = Witnesses.OneWayTurning(figures) * sign > 0;
        var causes = new List<Quantity>();
        if (turning) causes.Add(Quantity.Duty);
        causes.Add(vehicle.ToeOf(axle.Number));
        if (rearAxles > 0) causes.Add(Quantity.Thrust);
        if (rearAxles > 1) causes.Add(Quantity.TandemSkew);
        if (figures.Depot.CrownSign() * sign > 0) causes.Add(Quantity.Crown);
        var (workshopFor, workshopAgainst) = Witnesses.Workshop(figures);
        return new Finding
        {
            Kind = FindingKind.Feathering,
            Axle = axle.Number,
            Sentence = $"The {TradeWords.Tyres(vehicle, axle.Number, pair.Dual)} carry sharp rib edges toward the vehicle's {TradeWords.Direction(sign)}, one inboard and its mate outboard, "
                + $"by {TradeWords.Full(direction * sign, 2, "mm")}.",
            EvidenceFor = [.. Witnesses.Wheels(vehicle, pair, Witnesses.FeatherOf, -sign, sign),
                .. Witnesses.Wheels(vehicle, WheelPair.Edge(figures, axle, pair.Dual), Witnesses.EdgeOf, -sign, sign), .. workshopFor],
            EvidenceAgainst = [.. workshopAgainst],
            Confounders =
            [
                new("A bent steering arm or wrong turning angles", "Turning angles of both wheels at 20 deg"),
                new("A steady side force from the rear axles or the road", "Direction of the rear axles; vehicles of the same depot and class"),
                new("One tyre turned on its rim carries its old edges the other way", "Ask whether it was turned; the next rub is fresh"),
            ],
            Causes = causes,
            FirstCheck = FirstCheck.For(CheckFor.TurnAngles, figures.Vehicle, axle),
            // What stands first may lie at the rear axles: the angle decides, not what this axle lets set.
            AlignmentMends = causes[0].IsAngle(),
            Caution = Cautions.Under(axle),
            Strength = pair.Strength,
        };
    }

    private static IEnumerable<Evidence> Wheels(VehicleFigures figures, WheelPair pair, bool both, double sign) =>
        both ? Witnesses.Wheels(figures.Vehicle, pair, Witnesses.FeatherOf, sign, sign) : [Witnesses.FeatherOf(figures.Vehicle, pair.WorseTyre!)];

    /// <summary>Profile of the wheels concerned where it points the way of <paramref name="sign"/>; none for 0.</summary>
    private static IEnumerable<Evidence> ProfileEvidence(VehicleFigures figures, WheelPair edge, WheelPair pair, bool both, double sign)
    {
        if (sign == 0) return [];
        if (both && edge is { Left: { } left, Right: { } right }) return [Witnesses.EdgeOf(figures.Vehicle, left), Witnesses.EdgeOf(figures.Vehicle, right)];
        return [Witnesses.EdgeOf(figures.Vehicle, pair.WorseTyre!)];
    }

    private static IReadOnlyList<Confounder> Confounders(WheelPair pair, bool both)
    {
        var list = new List<Confounder> { new("A tyre turned on its rim carries its old edges the other way", "Ask whether it was turned; the next rub is fresh") };
        if (!both && pair.Mate is null) list.Add(new("The mate tyre was not felt or measured", "Rub the mate tyre both ways"));
        else if (!both) list.Add(new("Equal toe on both wheels would feather both: the mate may be newly fitted", "Date the mate tyre's fitting"));
        return list;
    }
}
