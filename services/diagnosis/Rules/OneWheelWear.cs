using WearWatch.Diagnosis.Facts;

namespace WearWatch.Diagnosis.Rules;

/// <summary>One wheel wears one shoulder and its mate does not, or was not measured.</summary>
internal static class OneWheelWear
{
    public static Finding Find(VehicleFigures figures, Axle axle, WheelPair pair)
    {
        var vehicle = figures.Vehicle;
        var tyre = pair.WorseTyre!;
        var slope = pair.Worse!.Value;
        var sign = Witnesses.SignOf(slope.Value);
        var camberSide = sign > 0 ? pair.WorseSide : pair.WorseSide.Opposite();
        // A wheel leaning out pulls to its own side; its holding torque is positive when that side is the right.
        var pullSign = camberSide == Side.Right ? 1 : -1;
        var pull = vehicle.IsFront(axle.Number) ? figures.Steering?.SteeringPullNm : null;
        var pullAgrees = RuleLimits.Agrees(pull, pullSign);
        var (workshopFor, workshopAgainst) = Witnesses.Workshop(figures);
        var mate = pair.Mate is { } m
            ? $"{TradeWords.Number(m.Value * sign, 3)} on its mate"
            : "its mate was not measured";
        var names = pullAgrees ? $"; the steering pull agrees on camber with the top leaning {(sign > 0 ? "out" : "in")}" : "";
        IReadOnlyList<Quantity> causes = pair.Mate is null
            ? [Quantity.Camber, vehicle.ToeOf(axle.Number), Quantity.Pressure]
            : [Quantity.Camber, Quantity.Pressure];
        return new Finding
        {
            Kind = FindingKind.OneEdgeWear,
            Axle = axle.Number,
            Side = pair.WorseSide,
            Dual = axle.Duals ? pair.Dual : null,
            Sentence = $"The {TradeWords.Tyre(vehicle, tyre.Position)} wears its {(sign > 0 ? "outboard" : "inboard")} shoulder faster than normal by "
                + $"{TradeWords.Full(slope * sign, 3, TradeWords.PerDistance)}, {mate}{names}.",
            EvidenceFor = [Witnesses.EdgeOf(vehicle, tyre), .. pullAgrees ? [Witnesses.Pull(figures, pull!.Value)] : Array.Empty<Evidence>(), .. workshopFor],
            EvidenceAgainst = [.. RuleLimits.Agrees(pull, -pullSign) ? [Witnesses.Pull(figures, pull!.Value)] : Array.Empty<Evidence>(), .. workshopAgainst],
            Confounders = Confounders(figures, axle, pair),
            Causes = causes,
            FirstCheck = FirstCheck.For(CheckFor.WheelCamber, figures.Vehicle, axle),
            AlignmentMends = vehicle.Mends(axle, causes[0]),
            Caution = Cautions.Under(axle),
            Strength = pair.Strength,
        };
    }

    private static IReadOnlyList<Confounder> Confounders(VehicleFigures figures, Axle axle, WheelPair pair)
    {
        var list = new List<Confounder>
        {
            new("A worn hub bearing lets the wheel lean like camber", "Play at the raised wheel"),
            new("Tyres of different make or pattern on the axle wear differently", "Read make and pattern on both"),
        };
        if (figures.Vehicle.Chassis(axle).Row is { CamberDegPerCm: not 0 } row) list.Add(CamberWithHeight(row.CamberDegPerCm));
        if (pair.Mate is not { } mate) list.Add(new("The mate tyre was not measured, so toe, a side force and this wheel alone cannot be told apart", "Measure the mate tyre across its width"));
        else if (mate.StandardError > pair.Limit / 2) list.Add(new("The mate tyre's figure is too rough to call it clean", "One more survey of the mate tyre across its width"));
        return list;
    }

    internal static Confounder CamberWithHeight(double degPerCm) =>
        new($"A sagged spring leans the wheel by about {TradeWords.Number(Math.Abs(degPerCm), 2)} deg for each 10 mm of ride height", "Ride height left and right before camber");
}
