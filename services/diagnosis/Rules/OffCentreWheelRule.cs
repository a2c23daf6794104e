using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Roads;

namespace WearWatch.Diagnosis.Rules;

/// <summary>
/// The steering wheel is not straight when the vehicle travels straight on a flat road. Off-centre angle = steering
/// ratio × (thrust − front toe difference) + sensor zero: the last two cannot be told apart and wear no tyre.
/// </summary>
public static class OffCentreWheelRule
{
    public static IEnumerable<Finding> Find(VehicleFigures figures)
    {
        if (figures.Steering is not { OffCentreDeg: { } angle } steering) yield break;
        if (!RuleLimits.Stands(angle, RuleLimits.OffCentre.Value, RuleLimits.AgreeingErrors)) yield break;
        var sign = Witnesses.SignOf(angle.Value);
        var rear = AxleSkewRule.Strongest(figures);
        var rearAgrees = rear is not null && rear.Sign == sign;
        IReadOnlyList<Quantity> causes = rearAgrees
            ? [Quantity.Thrust, Quantity.SensorZeroOrFrontToeSplit]
            : [Quantity.SensorZeroOrFrontToeSplit, Quantity.Thrust];
        if (steering.RoadShare == RoadShare.UsualCrown && figures.Depot.CrownSign() * sign > 0) causes = [.. causes, Quantity.Crown];
        var direction = TradeWords.Direction(sign);
        var names = rearAgrees ? $"; the rear tyres agree on a rear axle pointing {direction}" : "";
        var (workshopFor, workshopAgainst) = Witnesses.Workshop(figures);
        yield return new Finding
        {
            Kind = FindingKind.OffCentreWheel,
            Axle = figures.Vehicle.SteerAxle()?.Number,
            Side = sign > 0 ? Side.Left : Side.Right,
            Sentence = $"Travelling straight on a flat road the steering wheel stands {TradeWords.Full(angle * sign, 1, "deg")} to the {direction}{names}.",
            EvidenceFor =
            [
                Witnesses.OffCentre(figures, angle), .. rearAgrees ? AxleSkewRule.EvidenceOf(figures, rear!) : [],
                .. Witnesses.Reports(figures, Symptom.WheelNotStraight, "steering wheel not straight"), .. workshopFor,
            ],
            EvidenceAgainst = [.. rear is not null && !rearAgrees ? AxleSkewRule.EvidenceOf(figures, rear) : [], .. workshopAgainst],
            Confounders =
            [
                new("Zero of the angle sensor, or front toe shared unequally with its total in order: neither wears tyres", "Steps at key-on or at a service; front toe of each wheel with the steering wheel centred"),
                .. steering.RoadShare == RoadShare.UsualCrown ? [new("The road's crown was only assumed", "Roads shared with other vehicles, or a lateral acceleration channel")] : Array.Empty<Confounder>(),
            ],
            Causes = causes,
            FirstCheck = FirstCheck.For(CheckFor.OffCentreWheel),
            // A sensor zero is no alignment matter and cannot be told from an unequal front toe: only the rear tyres settle it.
            AlignmentMends = rearAgrees,
            Caution = Cautions.LiveSteering,
            Strength = RuleLimits.Strength(angle),
        };
    }
}
