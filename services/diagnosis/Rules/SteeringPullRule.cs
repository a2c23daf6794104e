using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Roads;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Rules;

/// <summary>The driver must hold the steering wheel to keep the vehicle straight on a flat road.</summary>
public static class SteeringPullRule
{
    public static IEnumerable<Finding> Find(VehicleFigures figures)
    {
        if (figures.Steering is not { SteeringPullNm: { } pull } steering) yield break;
        if (figures.Vehicle.SteerAxle() is not { } axle) yield break;
        if (!RuleLimits.Stands(pull, RuleLimits.SteeringPull.Value, RuleLimits.AgreeingErrors)) yield break;
        var sign = Witnesses.SignOf(pull.Value);
        var side = Witnesses.PullSide(pull.Value);
        var camber = CamberEvidence(figures, axle, sign).ToList();
        var soft = SofterSide(figures, axle);
        var causes = Causes(figures, axle, steering, sign, camber.Count > 0, soft == side);
        var (workshopFor, workshopAgainst) = Witnesses.Workshop(figures);
        var atLeast = steering.TorqueIncludesAssist ? "" : "at least ";
        var names = camber.Count > 0 && causes[0] == Quantity.CamberSplit ? "; the wear of the steer tyres agrees on a difference of camber" : "";
        yield return new Finding
        {
            Kind = FindingKind.SteeringPull,
            Axle = axle.Number,
            Side = side,
            Sentence = $"The vehicle pulls {side.Word()}: holding it straight on a flat road takes {atLeast}{TradeWords.Full(pull * sign, 2, "N·m")} to the {side.Opposite().Word()} at the steering wheel{names}.",
            EvidenceFor =
            [
                Witnesses.Pull(figures, pull), .. camber, .. PressureEvidence(figures, axle, soft == side),
                .. Witnesses.Reports(figures, side == Side.Right ? Symptom.PullsRight : Symptom.PullsLeft, $"pulls {side.Word()}"), .. workshopFor,
            ],
            EvidenceAgainst =
            [
                .. CamberEvidence(figures, axle, -sign),
                .. Witnesses.Reports(figures, side == Side.Right ? Symptom.PullsLeft : Symptom.PullsRight, $"pulls {side.Opposite().Word()}"), .. workshopAgainst,
            ],
            Confounders = Confounders(figures, steering, axle, sign),
            Causes = causes,
            FirstCheck = FirstCheck.For(CheckFor.SteeringPull, axle.Suspension),
            AlignmentMends = causes[0].IsAngle(),
            Caution = causes[0] == Quantity.Drag ? Cautions.HotHub : Cautions.LiveSteering,
            Strength = RuleLimits.Strength(pull),
        };
    }

    /// <summary>
    /// Steer tyres whose wear says that the wheel on the pull side leans out more: its outboard or the other side's inboard
    /// shoulder. The vehicle pulls to the side with more positive camber (truth table of pull, trade practice).
    /// </summary>
    private static IEnumerable<Evidence> CamberEvidence(VehicleFigures figures, Axle axle, double sign)
    {
        var edge = WheelPair.Edge(figures, axle, Dual.Single);
        var split = edge is { LeftFigure: { } l, RightFigure: { } r } ? l - r : edge.LeftFigure ?? -edge.RightFigure;
        // Pull right (positive torque) needs the right wheel leaning out more: left less right below zero.
        if (!RuleLimits.Agrees(split, -sign) || !RuleLimits.Stands(split!.Value, edge.Limit, RuleLimits.AgreeingErrors)) yield break;
        // Opposite shoulders on both wheels alike are a side force, not a difference of camber.
        if (edge.Pattern == PairPattern.SameVehicleSide) yield break;
        yield return Witnesses.EdgeOf(figures.Vehicle, edge.WorseTyre!);
    }

    private static IReadOnlyList<Quantity> Causes(VehicleFigures figures, Axle axle, SteeringFigures steering, double sign, bool camberAgrees, bool softOnPullSide)
    {
        var causes = new List<Quantity> { Quantity.CamberSplit, Quantity.CasterSplit, Quantity.Conicity, Quantity.Drag };
        // Caster pull may grow under braking; a dragging brake may vanish or flip there.
        if (RuleLimits.Agrees(steering.BrakePullNm, sign)) MoveFirst(causes, Quantity.CasterSplit);
        if (RuleLimits.Agrees(steering.BrakePullNm, -sign)) MoveFirst(causes, Quantity.Drag);
        // On hydraulic steering a caster split leaves almost no trace in the torque (from memory).
        if (figures.Vehicle.Assist is SteeringAssist.Hydraulic && causes[0] != Quantity.CasterSplit) { causes.Remove(Quantity.CasterSplit); causes.Add(Quantity.CasterSplit); }
        if (RearAgrees(figures)) causes.Add(Quantity.Thrust);
        if (camberAgrees) MoveFirst(causes, Quantity.CamberSplit);
        if (softOnPullSide) MoveFirst(causes, Quantity.Pressure);
        if (steering.RoadShare == RoadShare.UsualCrown && figures.Depot.CrownSign() * sign > 0) causes.Insert(1, Quantity.Crown);
        return causes;
    }

    private static bool RearAgrees(VehicleFigures figures) => AxleSkewRule.Strongest(figures) is not null;

    private static void MoveFirst(List<Quantity> causes, Quantity quantity)
    {
        causes.Remove(quantity);
        causes.Insert(0, quantity);
    }

    /// <summary>Side of the softer steer tyre where the difference is beyond the limit and its noise.</summary>
    private static Side? SofterSide(VehicleFigures figures, Axle axle)
    {
        if (PressureGap(figures, axle) is not { } gap || !RuleLimits.Stands(gap, RuleLimits.Pressure.Value, RuleLimits.AgreeingErrors)) return null;
        return gap.Value > 0 ? Side.Right : Side.Left;
    }

    /// <summary>Left less right, as a share of the set pressure.</summary>
    private static Estimate? PressureGap(VehicleFigures figures, Axle axle) =>
        figures.At(new(axle.Number, Side.Left))?.PressureShare is { } l && figures.At(new(axle.Number, Side.Right))?.PressureShare is { } r ? l - r : null;

    private static IEnumerable<Evidence> PressureEvidence(VehicleFigures figures, Axle axle, bool agrees)
    {
        if (!agrees) yield break;
        var gap = PressureGap(figures, axle)!.Value;
        yield return new($"The steer tyre on that side is softer than its mate by {TradeWords.Full(gap * (100 * Witnesses.SignOf(gap.Value)), 0, "% of its setting")}",
            [.. figures.At(new(axle.Number, Side.Left))!.SurveyIds, .. figures.At(new(axle.Number, Side.Right))!.SurveyIds]);
    }

    private static IReadOnlyList<Confounder> Confounders(VehicleFigures figures, SteeringFigures steering, Axle axle, double sign)
    {
        var list = new List<Confounder>
        {
            new("A tyre that pulls by its construction", "Swap the steer tyres left and right: its pull changes side, an angle's does not"),
            new("Zero of the torque sensor", "The reading while nobody holds the wheel equals the offset; no tyre shows wear"),
        };
        if (steering.RoadShare == RoadShare.UsualCrown)
            list.Add(new("The road's crown was only assumed", figures.Depot.CrownSign() * sign > 0 ? "Roads shared with other vehicles, or a lateral acceleration channel" : "It would push the other way here; shared roads would settle its size"));
        if (!steering.TorqueIncludesAssist) list.Add(new("The assist's share of the torque is not logged", "The assist torque or motor current channel"));
        if (figures.Vehicle.Assist == SteeringAssist.Electric) list.Add(new("Pull compensation of electric steering hides the driver's share", "The sum of driver and assist torque"));
        if (DepthGapRule.AcrossAxle(figures, axle) is { } gap && RuleLimits.Stands(gap, RuleLimits.AxleGap.Value, RuleLimits.AgreeingErrors))
            list.Add(new($"Tread depth differs across the axle by {TradeWords.Number(Math.Abs(gap.Value), 1)} mm", "Match the steer tyres and drive again"));
        return list;
    }
}
