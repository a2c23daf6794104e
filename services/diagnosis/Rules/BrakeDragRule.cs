using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Rules;

/// <summary>
/// The vehicle pulls while rolling and braking takes the pull away or turns it over: then both brakes work, and the one that drags
/// at rest no longer stands out (truth table of pull, trade practice). Camber stays the same under braking, caster may grow.
/// </summary>
public static class BrakeDragRule
{
    public static IEnumerable<Finding> Find(VehicleFigures figures)
    {
        if (figures.Steering is not { SteeringPullNm: { } pull, BrakePullNm: { } braking } steering || figures.Vehicle.SteerAxle() is not { } axle) yield break;
        if (!RuleLimits.Stands(pull, RuleLimits.SteeringPull.Value, RuleLimits.AgreeingErrors)) yield break;
        var sign = Witnesses.SignOf(pull.Value);
        if (braking.Value * sign >= 0 || !RuleLimits.Stands(braking, RuleLimits.BrakeFlip.Value * Math.Abs(pull.Value), RuleLimits.AgreeingErrors)) yield break;
        var side = Witnesses.PullSide(pull.Value);
        yield return new Finding
        {
            Kind = FindingKind.BrakeDrag,
            Axle = axle.Number,
            Side = side,
            Sentence = $"The vehicle pulls {side.Word()} while rolling and braking takes {TradeWords.Full(braking * -sign, 2, "N·m")} of the holding torque away, as a brake dragging on that side does.",
            EvidenceFor =
            [
                Witnesses.Pull(figures, pull),
                new($"Holding torque under braking less that of rolling: {TradeWords.Full(braking * -sign, 2, "N·m")} the other way", steering.EvidenceRuns),
                .. Size(figures, axle, pull * sign, steering.TorqueIncludesAssist),
            ],
            EvidenceAgainst = RuleLimits.Agrees(steering.DrivePullNm, -sign) ? [new("The pull is weaker under drive too", steering.EvidenceRuns)] : [],
            Confounders =
            [
                new("Brakes of unequal force pull only while braking", "Brake forces left and right on a roller bench"),
                new("A soft tyre or one that pulls by its construction does not change under braking", "Pressures; swap the steer tyres left and right"),
            ],
            Causes = [Quantity.Drag, Quantity.Pressure, Quantity.Conicity],
            FirstCheck = FirstCheck.For(CheckFor.BrakeDrag),
            AlignmentMends = false,
            Caution = Cautions.HotHub,
            Strength = Math.Min(RuleLimits.Strength(pull), RuleLimits.Strength(braking)),
        };
    }

    /// <summary>Drag that the pull would take, force = torque × ratio ÷ scrub radius, where ratio and scrub radius are known and outboard.</summary>
    private static IEnumerable<Evidence> Size(VehicleFigures figures, Axle axle, Estimate torque, bool whole)
    {
        if (!whole || figures.Vehicle.SteeringRatio is not { } ratio || figures.Vehicle.Chassis(axle).ScrubRadiusMm is not { } scrub || scrub < 5) yield break;
        yield return new($"A drag of {TradeWords.Full(torque * (ratio / (scrub / 1000)), 0, "N")} would take that torque at a scrub radius of {TradeWords.Number(scrub, 0)} mm", figures.Steering!.EvidenceRuns);
    }
}
