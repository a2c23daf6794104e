using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Roads;

namespace WearWatch.Diagnosis.Rules;

/// <summary>
/// Let go after turns, the steering wheel comes to rest beside straight, left and right turns taken together. A difference of caster
/// does this and pulls to the same side; it is named when the steering pull agrees and no tyre speaks for camber.
/// </summary>
/// <remarks>Truth table of pull: caster split pulls constantly and shows in the return after turns (trade practice).</remarks>
public static class UnevenReturnRule
{
    public static IEnumerable<Finding> Find(VehicleFigures figures)
    {
        if (figures.Study?.Return?.ReleaseAsymmetryDeg is not { } sum || figures.Vehicle.SteerAxle() is not { } axle) yield break;
        var rest = sum * 0.5;
        if (!RuleLimits.Stands(rest, RuleLimits.UnevenReturn.Value, RuleLimits.AgreeingErrors)) yield break;
        var sign = Witnesses.SignOf(rest.Value);
        // The free wheel goes where the vehicle pulls; the torque that holds it goes the other way.
        var pull = figures.Steering?.SteeringPullNm;
        var pullAgrees = RuleLimits.Agrees(pull, -sign);
        var camber = WheelPair.Edge(figures, axle, Dual.Single);
        var camberSpeaks = camber.Pattern == PairPattern.OneWheel;
        var crown = figures.Depot.CrownSign() * sign < 0;
        var names = pullAgrees && !camberSpeaks;
        var direction = TradeWords.Direction(sign);
        yield return new Finding
        {
            Kind = FindingKind.UnevenReturn,
            Axle = axle.Number,
            Side = sign > 0 ? Side.Left : Side.Right,
            Sentence = $"After turns the steering wheel comes to rest {TradeWords.Full(rest * sign, 1, "deg")} to the {direction} of straight, left and right turns taken together"
                + (names ? $"; the steering pull to that side agrees on less caster on the {direction}." : "."),
            EvidenceFor =
            [
                new($"Rest after {figures.Study.Return.AfterLeft} left and {figures.Study.Return.AfterRight} right turns: {TradeWords.Full(rest * sign, 1, "deg")} to the {direction}", Witnesses.Signals(figures)),
                .. pullAgrees ? [Witnesses.Pull(figures, pull!.Value)] : Array.Empty<Evidence>(),
            ],
            EvidenceAgainst =
            [
                .. RuleLimits.Agrees(pull, sign) ? [Witnesses.Pull(figures, pull!.Value)] : Array.Empty<Evidence>(),
                .. camberSpeaks ? [Witnesses.EdgeOf(figures.Vehicle, camber.WorseTyre!)] : Array.Empty<Evidence>(),
            ],
            Confounders = Confounders(figures, crown),
            Causes = [.. camberSpeaks ? new[] { Quantity.CamberSplit, Quantity.CasterSplit } : [Quantity.CasterSplit, Quantity.CamberSplit], Quantity.Conicity, .. crown ? [Quantity.Crown] : Array.Empty<Quantity>()],
            FirstCheck = FirstCheck.For(CheckFor.UnevenReturn, figures.Vehicle, axle),
            AlignmentMends = names && figures.Vehicle.Mends(axle, Quantity.CasterSplit),
            Caution = Cautions.LiveSteering,
            Strength = RuleLimits.Strength(rest),
        };
    }

    private static IReadOnlyList<Confounder> Confounders(VehicleFigures figures, bool crown)
    {
        var list = new List<Confounder>
        {
            new("A tyre that pulls by its construction draws the free wheel aside too", "Swap the steer tyres left and right: its share changes side"),
            new("A worn bush or ball joint that gives more one way", "Joints and bushes under a bar"),
        };
        if (crown) list.Add(new("The road falls to that side: a free wheel runs downhill", figures.Steering?.RoadShare == RoadShare.UsualCrown ? "Roads shared with other vehicles" : "The steering pull has the bank removed; the return has not"));
        if (figures.Vehicle.Assist is SteeringAssist.Hydraulic) list.Add(new("On hydraulic steering a difference of caster leaves little trace in the torque", "Caster by a swing of the wheels"));
        return list;
    }
}

/// <summary>The steering wheel stops short of straight after turns either way: it binds, or remembers the last turn.</summary>
public static class SteeringBindsRule
{
    public static IEnumerable<Finding> Find(VehicleFigures figures)
    {
        if (figures.Study?.Return is not { RestAfterLeftDeg: { } left, RestAfterRightDeg: { } right } study || figures.Vehicle.SteerAxle() is not { } axle) yield break;
        var half = (left - right) * 0.5;
        if (!(half.Value > 0) || !RuleLimits.Stands(half, RuleLimits.Binding.Value, RuleLimits.AgreeingErrors)) yield break;
        yield return new Finding
        {
            Kind = FindingKind.SteeringBinds,
            Axle = axle.Number,
            Sentence = $"After turns the steering wheel stops {TradeWords.Full(half, 1, "deg")} short of straight on the side it came from, left and right alike.",
            EvidenceFor =
            [
                new($"Rest after {study.AfterLeft} left and {study.AfterRight} right turns: {TradeWords.Full(half, 1, "deg")} short", Witnesses.Signals(figures)),
                .. study.HalfLoopNm is { } loop && RuleLimits.Agrees(loop, 1) ? [new Evidence($"Half the friction loop {TradeWords.Full(loop, 2, "N·m")}", Witnesses.Signals(figures))] : Array.Empty<Evidence>(),
            ],
            Confounders =
            [
                new("Little trail or soft tyres return slowly as well", "Pressures; caster of both wheels"),
                new("A driver who holds the wheel", "Another driver on the same road"),
            ],
            FirstCheck = FirstCheck.For(CheckFor.SteeringBinds, figures.Vehicle, axle),
            AlignmentMends = false,
            Caution = Cautions.LiveSteering,
            Strength = RuleLimits.Strength(half),
        };
    }
}
