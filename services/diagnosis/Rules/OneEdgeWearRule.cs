using WearWatch.Diagnosis.Facts;
using WearWatch.Diagnosis.Statistics;

namespace WearWatch.Diagnosis.Rules;

/// <summary>
/// One shoulder wears faster than the other beyond what is normal for the class and position. What the mate tyre does
/// tells toe and camber (mirrored), a steady side force (same vehicle side) and one wheel's fault apart.
/// </summary>
public static class OneEdgeWearRule
{
    public static IEnumerable<Finding> Find(VehicleFigures figures)
    {
        foreach (var axle in figures.Vehicle.Axles.OrderBy(a => a.Number))
        {
            // One finding an axle: of the outer and the inner pair the stronger speaks.
            var pair = WheelPair.Members(axle).Select(dual => WheelPair.Edge(figures, axle, dual)).MaxBy(p => p.Strength)!;
            var finding = pair.Pattern switch
            {
                PairPattern.Mirrored => Mirrored(figures, axle, pair),
                // The same vehicle side on an axle that keeps its direction is the axle's own skew: AxleSkewRule.
                PairPattern.SameVehicleSide when axle.Steered || figures.Vehicle.IsFront(axle.Number) => SideForceWear.Find(figures, axle, pair),
                PairPattern.OneWheel => OneWheelWear.Find(figures, axle, pair),
                _ => null,
            };
            if (finding is not null) yield return finding;
        }
    }

    private static Finding Mirrored(VehicleFigures figures, Axle axle, WheelPair pair)
    {
        var vehicle = figures.Vehicle;
        var shared = pair.Shared!.Value;
        var sign = Witnesses.SignOf(shared.Value);
        var feather = WheelPair.Feather(figures, axle, pair.Dual);
        var finAgrees = RuleLimits.Agrees(feather.Shared, sign) || (feather.Shared is null && RuleLimits.Agrees(feather.Worse, sign));
        var finContradicts = RuleLimits.Agrees(feather.Shared, -sign);
        var finClean = FeatherReading.Clean(pair.Left) && FeatherReading.Clean(pair.Right);
        var causes = MirroredCauses(figures, axle, pair.Dual, sign, finAgrees, finContradicts, finClean);

        var (workshopFor, workshopAgainst) = Witnesses.Workshop(figures);
        var against = new List<Evidence>(workshopAgainst);
        if (finContradicts) against.AddRange(Witnesses.Wheels(vehicle, feather, Witnesses.FeatherOf, -sign, -sign));
        if (finClean) against.Add(new("The rib edges are clean on both tyres", [.. pair.Left!.SurveyIds, .. pair.Right!.SurveyIds]));

        var edge = sign > 0 ? "outboard" : "inboard";
        var points = !causes[0].IsAngle() ? "" : (causes[0], finAgrees) switch
        {
            (Quantity.Camber, _) => sign > 0 ? "; both agree on camber with the tops leaning out" : "; both agree on camber with the tops leaning in",
            (_, true) => sign > 0 ? "; their rib edges agree on toe-in" : "; their rib edges agree on toe-out",
            _ => sign > 0 ? "; both wheels agree on toe-in first, camber second" : "; both wheels agree on toe-out first, camber second",
        };
        return new Finding
        {
            Kind = FindingKind.OneEdgeWear,
            Axle = axle.Number,
            Dual = axle.Duals ? pair.Dual : null,
            Sentence = $"Both {TradeWords.Tyres(vehicle, axle.Number, pair.Dual)} wear their {edge} shoulders faster than normal "
                + $"({TradeWords.LeftRight(pair.LeftFigure * sign, pair.RightFigure * sign, 3, TradeWords.PerDistance)}; {TradeWords.Range(shared * sign, 3)}){points}.",
            EvidenceFor = [Witnesses.EdgeOf(vehicle, pair.Left!), Witnesses.EdgeOf(vehicle, pair.Right!),
                .. finAgrees ? Witnesses.Wheels(vehicle, feather, Witnesses.FeatherOf, sign, sign) : [], .. workshopFor],
            EvidenceAgainst = against,
            Confounders = MirroredConfounders(figures, axle, sign),
            Causes = causes,
            FirstCheck = FirstCheck.For(causes[0] == Quantity.Camber ? CheckFor.WheelCamber : CheckFor.Toe, axle.Suspension),
            AlignmentMends = causes[0].IsAngle(),
            Caution = Cautions.UnderVehicle,
            Strength = pair.Strength,
        };
    }

    private static IReadOnlyList<Quantity> MirroredCauses(VehicleFigures figures, Axle axle, Dual dual, double sign, bool finAgrees, bool finContradicts, bool finClean)
    {
        var toe = figures.Vehicle.ToeOf(axle.Number);
        // Inner duals worn inboard on both sides: the beam bends under load (trade practice).
        if (dual == Dual.Inner && sign < 0) return finAgrees ? [toe, Quantity.Camber, Quantity.Pressure] : [Quantity.Camber, Quantity.Pressure, Quantity.Crown];
        if (finContradicts) return [Quantity.Camber, toe, Quantity.Duty];
        // Rounded shoulders with no fin: cornering (1948 shop manual, pp. 212-213), outboard only.
        if (sign > 0 && finClean && figures.Vehicle.IsFront(axle.Number)) return [Quantity.Duty, Quantity.Pressure, Quantity.Camber, toe];
        return sign > 0 ? [toe, Quantity.Camber, Quantity.Duty] : [toe, Quantity.Camber];
    }

    private static IReadOnlyList<Confounder> MirroredConfounders(VehicleFigures figures, Axle axle, double sign)
    {
        var list = new List<Confounder>();
        if (sign > 0 && figures.Vehicle.IsFront(axle.Number))
        {
            list.Add(new("Cornering and roundabouts round both outboard shoulders", "A clean fin inboard speaks for toe-in, an abraded edge without a fin for cornering; compare vehicles on the same route"));
            if (figures.Vehicle.Class is VehicleClass.Bus or VehicleClass.Van)
                list.Add(new("Body roll of a high vehicle loads the outboard shoulders", "The fin of the rib edges; the same wear on others of its class and route"));
        }
        if (axle.Suspension is Suspension.BeamLeaf or Suspension.BeamAir)
            list.Add(new("Camber of a beam axle changes with load", "Measure loaded as in service"));
        list.Add(new("Tyres turned on the rim change their shoulders over", "Ask whether both were turned; the fin turns with the tyre"));
        return list;
    }
}

/// <summary>One steer tyre outboard and the other inboard: a steady side force on the steer axle.</summary>
internal static class SideForceWear
{
    public static Finding Find(VehicleFigures figures, Axle axle, WheelPair pair)
    {
        var vehicle = figures.Vehicle;
        var direction = pair.Direction!.Value;
        var sign = Witnesses.SignOf(direction.Value);
        var rear = AxleSkewRule.Strongest(figures);
        var rearFor = rear is null ? [] : AxleSkewRule.EvidenceOf(figures, rear).ToList();
        var causes = Causes(figures, sign);
        var (workshopFor, workshopAgainst) = Witnesses.Workshop(figures);
        var side = sign > 0 ? Side.Right : Side.Left;
        var names = rear is not null && causes[0].IsAngle() ? "; the rear tyres agree on a rear axle out of direction" : "";
        return new Finding
        {
            Kind = FindingKind.OneEdgeWear,
            Axle = axle.Number,
            Sentence = $"Both {TradeWords.Tyres(vehicle, axle.Number, pair.Dual)} wear faster than normal on the shoulder toward the vehicle's {side.Word()} "
                + $"({TradeWords.LeftRight(Abs(pair.LeftFigure), Abs(pair.RightFigure), 3, TradeWords.PerDistance)}; {TradeWords.Range(direction * sign, 3)}): a steady side force{names}.",
            EvidenceFor = [Witnesses.EdgeOf(vehicle, pair.Left!), Witnesses.EdgeOf(vehicle, pair.Right!),
                .. Witnesses.Wheels(vehicle, WheelPair.Feather(figures, axle, pair.Dual), Witnesses.FeatherOf, -sign, sign), .. rearFor, .. workshopFor],
            EvidenceAgainst = [.. workshopAgainst, .. AgainstRoad(figures, sign)],
            Confounders = Confounders(figures, sign),
            Causes = causes,
            FirstCheck = FirstCheck.For(CheckFor.SideForce, axle.Suspension),
            AlignmentMends = causes[0].IsAngle(),
            Caution = Cautions.UnderVehicle,
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
            Confounders = Confounders(pair),
            Causes = causes,
            FirstCheck = FirstCheck.For(CheckFor.WheelCamber, axle.Suspension),
            AlignmentMends = true,
            Caution = Cautions.UnderVehicle,
            Strength = pair.Strength,
        };
    }

    private static IReadOnlyList<Confounder> Confounders(WheelPair pair)
    {
        var list = new List<Confounder>
        {
            new("A worn hub bearing lets the wheel lean like camber", "Play at the raised wheel"),
            new("Tyres of different make or pattern on the axle wear differently", "Read make and pattern on both"),
        };
        if (pair.Mate is not { } mate) list.Add(new("The mate tyre was not measured, so toe, a side force and this wheel alone cannot be told apart", "Measure the mate tyre across its width"));
        else if (mate.StandardError > pair.Limit / 2) list.Add(new("The mate tyre's figure is too rough to call it clean", "One more survey of the mate tyre across its width"));
        return list;
    }
}
