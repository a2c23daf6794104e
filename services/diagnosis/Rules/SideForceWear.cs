using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Rules;

/// <summary>One steer tyre outboard and the other inboard: a steady side force on the steer axle.</summary>
internal static class SideForceWear
{
    public static Finding Find(VehicleFigures figures, Axle axle, WheelPair pair)
    {
        var vehicle = figures.Vehicle;
        var direction = pair.Direction!.Value;
        var sign = Witnesses.SignOf(direction.Value);
        var rear = AxleSkewRule.Strongest(figures);
        // Two axles that do not run parallel turn the vehicle, and the steer axle must push the other way: ψ to the left
        // asks for a steer-axle force to the right (couple Cψs/2 over the wheelbase; Gillespie & Winkler 1978).
        var rearContradicts = AxleSkewRule.TandemSign(figures) * sign > 0;
        var rearEvidence = rear is null ? [] : AxleSkewRule.EvidenceOf(figures, rear).ToList();
        var causes = Causes(figures, sign);
        var (workshopFor, workshopAgainst) = Witnesses.Workshop(figures);
        var side = sign > 0 ? Side.Right : Side.Left;
        var names = rear is not null && !rearContradicts && causes[0].IsAngle() ? "; the rear tyres agree on a rear axle out of direction" : "";
        return new Finding
        {
            Kind = FindingKind.OneEdgeWear,
            Axle = axle.Number,
            Sentence = $"Both {TradeWords.Tyres(vehicle, axle.Number, pair.Dual)} wear faster than normal on the shoulder toward the vehicle's {side.Word()} "
                + $"({TradeWords.LeftRight(Abs(pair.LeftFigure), Abs(pair.RightFigure), 3, TradeWords.PerDistance)}; {TradeWords.Range(direction * sign, 3)}): a steady side force{names}.",
            EvidenceFor = [Witnesses.EdgeOf(vehicle, pair.Left!), Witnesses.EdgeOf(vehicle, pair.Right!),
                .. Witnesses.Wheels(vehicle, WheelPair.Feather(figures, axle, pair.Dual), Witnesses.FeatherOf, -sign, sign), .. rearContradicts ? [] : rearEvidence, .. workshopFor],
            EvidenceAgainst = [.. rearContradicts ? rearEvidence : [], .. workshopAgainst, .. AgainstRoad(figures, sign)],
            Confounders = Confounders(figures, sign),
            Causes = causes,
            FirstCheck = FirstCheck.For(CheckFor.SideForce, figures.Vehicle, axle),
            AlignmentMends = causes[0].IsAngle(),
            Caution = Cautions.Under(axle),
            Strength = pair.Strength,
        };
    }

    /// <summary>Rear axles first, then what the road and the route can do, where they push that way.</summary>
    private static IReadOnlyList<Quantity> Causes(VehicleFigures figures, double sign)
    {
        var causes = new List<Quantity>();
        if (figures.Vehicle.FixedAxles().Count > 0) causes.Add(Quantity.Thrust);
        if (figures.Vehicle.FixedAxles().Count > 1) causes.Add(Quantity.TandemSkew);
        if (figures.Depot.CrownSign() * sign > 0) causes.Add(Quantity.Crown);
        var turning = Witnesses.OneWayTurning(figures);
        if (turning * sign > 0) causes.Insert(0, Quantity.Duty);
        else if (turning is null) causes.Add(Quantity.Duty);
        causes.Add(Quantity.FrontTotalToe);
        return causes;
    }

    private static IEnumerable<Evidence> AgainstRoad(VehicleFigures figures, double sign)
    {
        if (figures.Depot.CrownSign() * sign < 0)
            yield return new("The usual crown of the traffic side would wear the other way", []);
    }

    private static IReadOnlyList<Confounder> Confounders(VehicleFigures figures, double sign)
    {
        var list = new List<Confounder>();
        if (figures.Depot.CrownSign() * sign > 0)
            list.Add(new("Crown of the road on the traffic side does the same", "Vehicles of the same depot and class would show it too"));
        if (figures.Route is { Loop: true } || Witnesses.OneWayTurning(figures) is not null)
            list.Add(new("The usual route turns mostly one way", "Run the route the other way round, or compare vehicles on the same route"));
        list.Add(new("A bent steering arm sets one wheel in and the other out while turning", "Turning angles of both wheels at 20 deg"));
        return list;
    }

    private static Estimate? Abs(Estimate? figure) => figure is { } f ? f * Witnesses.SignOf(f.Value) : null;
}
